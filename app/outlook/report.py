"""What `pricewake outlook` prints: the same words and numbers as the page."""

import numpy as np

from analytics.series import period_label
from app.outlook.result import Outlook
from app.outlook.words import (
    CAUTION,
    best_benchmark,
    held_words,
    looked_at,
    rate_words,
    ratio_words,
    sentence,
    verdict,
)
from app.words import counted, plain, signed


def report(known: Outlook) -> list[str]:
    """Return the lines to print."""
    found = known.found
    said = [sentence(known), *verdict(known), *found.notes]
    fan = known.fan
    if fan is not None:
        low, high = fan.band(0.8)
        for h in looked_at(found, known.reach):
            interval = (
                ""
                if np.isnan(low[h - 1])
                else f" (80 % interval {plain(low[h - 1])} to {plain(high[h - 1])})"
            )
            said.append(
                f"{period_label(known.periods[h - 1])}: implied"
                f" {rate_words(found, known.state.target)} {plain(float(fan.centre[h - 1]))}"
                f" percent{interval}."
            )
        off = [held_words(known, row) for row in range(len(known.levels))]
        if off := [words for words in off if "held" in words]:
            said.append(f"Intervals that did not hold as named: {'; '.join(off)}.")
    if known.gap is not None:
        when = found.pair.response.first + int(known.gap.place[-1])
        said.append(
            f"{period_label(when)}: observed {rate_words(found, 'window')}"
            f" {plain(float(known.gap.observed[-1]))}, expected"
            f" {plain(float(known.gap.expected[-1]))}, gap {signed(float(known.gap.gap[-1]))}."
        )
    if known.scores is not None:
        for h in looked_at(found, known.scores.ahead.size):
            best = best_benchmark(known.scores, h)
            said.append(
                f"{counted(h, found.noun)} ahead, {known.scores.n[h - 1]} past dates: RMSE"
                f" {plain(float(known.scores.rmse[h - 1]))}; against {best}:"
                f" {ratio_words(known.scores, best, h)}."
            )
    for line in known.lines:
        ahead = min(found.ahead, line.path.size)
        said.append(
            f"{line.name}: {plain(float(line.path[ahead - 1]))} percent"
            f" {counted(ahead, found.noun)} ahead, RMSE"
            f" {plain(float(line.scores.rmse[ahead - 1]))}."
        )
    for one in known.judged:
        outcomes = one.score.known if one.score is not None else 0
        said.append(
            f"Statement {one.said.id} of {one.said.day}: {counted(outcomes, 'outcome')} so far."
            + (f" Not scored: {one.refusal}." if one.refusal else "")
        )
    said += [f"No {part}: {why}." for part, why in known.refused.items() if part != "path"]
    return [*said, CAUTION]
