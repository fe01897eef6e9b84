"""The verdict on the Lag page: sentences made from results; every number in them is a result's."""

from analytics.series import Pair, period_label
from app.compute import cell_span, noun
from app.lag.evidence import SIGNIFICANT, Evidence
from app.state import ViewState
from app.words import counted, p_words, percent, plain, runs_words, shift_words, signed


def effective_words(n: int, effective: float, unit: str) -> str:
    """Say what overlapping months are worth: ``766 months behave like 23 independent ones``."""
    return f"{counted(n, unit)} behave like {max(3, round(effective))} independent ones"


def verdict(known: Evidence, pair: Pair, state: ViewState) -> list[str]:
    """Return the verdict for a state: a few sentences, most important first."""
    return [*_judgement(known, pair, state), *_limits(known, pair, state)]


def _limits(known: Evidence, pair: Pair, state: ViewState) -> list[str]:
    """Say where the search reads other months, or other errors, than what is looked at."""
    said = []
    if known.rest is not None:
        said.append(
            f"Without the months left out the cell has slope {plain(known.rest.slope)} and"
            f" per-cell p {p_words(known.rest.p)}; search, shift set and what folds out below read"
            f" every {noun(pair)} of the sample."
        )
    if state.months == "same" and not known.refusal:
        said.append(
            f"The search lets each cell use all the {noun(pair)}s it has, not only those that"
            " every cell has."
        )
    if state.quantity == "p_hac":
        said.append("HAC errors are a map to look at; the search does not use them.")
    return said


def _judgement(known: Evidence, pair: Pair, state: ViewState) -> list[str]:
    found = known.search
    if known.refusal:
        return [f"There is no search here: {known.refusal}.", _cell_sentence(known, pair, state)]
    if found is None:
        return [
            "Not searched yet: what the map shows has not been held against unrelated drivers.",
            _cell_sentence(known, pair, state),
        ]
    sentences = [_search_sentence(known, pair)]
    if found.level_shifts_removed:
        sentences.append(_shift_guard_sentence(known, pair))
    if known.regimes is not None:
        sentences.append(_regime_sentence(known, pair))
    if known.found:
        place = known.p_searched(state.window, state.shift)
        if place is None or not place <= SIGNIFICANT:
            sentences.append(_chosen_sentence(known, pair, state))
        sentences.append(_set_sentence(known, pair, state))
        sentences.append(fragility(known, pair, state))
        sentences.append("An association, not a cause.")
    else:
        sentences.append(_chosen_sentence(known, pair, state))
    return sentences


def fragility(known: Evidence, pair: Pair, state: ViewState) -> str:
    """Say in one sentence what the chosen cell rests on."""
    influence = known.influence
    cause = influence.episodes[influence.cause]
    start = cell_span(pair, state)[0]
    first = period_label(pair.periods[start + cause.first_month])
    last = period_label(pair.periods[start + cause.stop_month - 1])
    head = {
        "spread over history": "The chosen cell is spread over history",
        "leans on one episode": "The chosen cell leans on one episode",
        "one-episode result": "The chosen cell is a one-episode result",
    }[influence.band]
    if cause.too_few_left:
        return f"{head}: without {first} to {last} too few {noun(pair)}s are left to fit a line to."
    return (
        f"{head}: removing {first} to {last} changes the slope by {percent(cause.change)}"
        f" (per-cell p {p_words(influence.p)} to {p_words(cause.p_without)})."
    )


def _search_sentence(known: Evidence, pair: Pair) -> str:
    found, unit = known.search, noun(pair)
    assert found is not None
    searched = (
        f"windows {found.windows[0]} to {found.windows[-1]} and shifts"
        f" {runs_words([int(found.shifts[0])])} to {runs_words([int(found.shifts[-1])])} {unit}s"
    )
    best = (
        f"the cell at window {found.best_window} and shift"
        f" {shift_words(found.best_shift, unit)} stands out most"
        f" (correlation {signed(found.best_correlation)})"
    )
    guard = ", level shifts removed," if found.level_shifts_removed else ""
    if found.p > SIGNIFICANT:
        return (
            f"The search found nothing that an unrelated driver would not: of {searched}{guard}"
            f" {best}, and its search-adjusted p is {p_words(found.p)}."
        )
    relation = (
        "led" if found.best_shift > 0 else "followed" if found.best_shift < 0 else "moved with"
    )
    opposite = "" if found.best_correlation > 0 else ", in the opposite direction"
    return (
        f"{pair.driver.name} has {relation} {pair.response.name}{opposite}: of {searched}{guard}"
        f" {best}; an unrelated driver does as well with probability {p_words(found.p)}"
        " (search-adjusted, two-sided)."
    )


def _shift_guard_sentence(known: Evidence, pair: Pair) -> str:
    found = known.search
    assert found is not None
    sides = []
    for side, steps in (("driver", found.driver_steps), ("response", found.response_steps)):
        months = ", ".join(period_label(pair.periods[step]) for step in steps)
        sides.append(f"{side} from {months}" if steps else f"{side}: a trend")
    evened = " or of spread" if found.spreads_evened else ""
    kind = "shifts of level" if found.driver_steps or found.response_steps else "trends"
    rest = " The shift set and the episodes are of the series with them." if known.found else ""
    return (
        f"Both series have {kind}{evened} ({'; '.join(sides)}), which alone can look like"
        f" a lag; with them left in, p would be {p_words(found.p_with_level_shifts)}.{rest}"
    )


def _regime_sentence(known: Evidence, pair: Pair) -> str:
    assert known.regimes is not None
    sides = "; ".join(
        f"{side} from about {period_label(pair.periods[shift.position])}, {plain(shift.before)} to"
        f" {plain(shift.after)}"
        for side, shift in zip(("driver", "response"), known.regimes, strict=True)
    )
    return (
        f"Take this p with care: both series change how much they cling to their past ({sides},"
        " lag-1 autocorrelation), and of simulated unrelated pairs like that the search calls about"
        " 13 of 100 significant at 5 %, not 5."
    )


def _chosen_sentence(known: Evidence, pair: Pair, state: ViewState) -> str:
    cell = f"window {state.window} and shift {shift_words(state.shift, noun(pair))}"
    place = known.p_searched(state.window, state.shift)
    if place is None:
        return f"The chosen cell, {cell}, lies outside the cells searched."
    return (
        f"The chosen cell, {cell}, is not supported: after the search its p is {p_words(place)},"
        f" where the naive p is {p_words(known.naive_p)}."
    )


def _set_sentence(known: Evidence, pair: Pair, state: ViewState) -> str:
    unit, chosen = noun(pair), known.shift_set
    if known.set_refusal:
        return f"There is no shift set at window {state.window}: {known.set_refusal}."
    if chosen is None:
        return f"Which shifts fit as well at window {state.window} is being worked out."
    if not chosen.identified:
        reach = f"{runs_words([int(s) for s in chosen.shifts])} {unit}s"
        return (
            f"At window {state.window} the lag is not identified: the"
            f" {100 * chosen.level:.0f} % shift set is {reach}, which reaches over more"
            " than half of the range."
        )
    if chosen.shifts.size == 1:
        return (
            f"At window {state.window} the data tell a shift of"
            f" {shift_words(int(chosen.shifts[0]), unit)} apart from every other"
            f" ({100 * chosen.level:.0f} % shift set)."
        )
    return (
        f"At window {state.window} the data cannot tell shifts"
        f" {runs_words([int(s) for s in chosen.shifts])} {unit}s apart"
        f" ({100 * chosen.level:.0f} % shift set)."
    )


def _cell_sentence(known: Evidence, pair: Pair, state: ViewState) -> str:
    inference, unit = known.inference, noun(pair)
    low, high = inference.slope_interval
    return (
        f"Window {state.window}, shift {shift_words(state.shift, unit)}, as if it were the only"
        f" cell looked at: slope {plain(inference.slope)} ({plain(low)} to {plain(high)}),"
        f" p {p_words(inference.p)}."
    )
