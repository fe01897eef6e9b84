"""What `pricewake reading` prints: the same words and numbers as the page."""

import re
from typing import Any

from analytics.series import period_label
from app.compute import Bridge
from app.kept_rules import rules_in_force
from app.outlook.statements import kept_statements, stated_bounds
from app.reading.alerts import Rule, read_rules
from app.reading.answer import reading_answer
from app.reading.bridge import completed_reading
from app.reading.result import Reading
from app.reading.words import CAUTION, fit_words, quantities, sentence, set_off, tail_words, verdict
from app.state import ViewState
from app.store import Store
from app.words import plain

RATE_WORDS = {
    "rate_1m": "over one period",
    "rate_3m_annualised": "3 months annualised",
    "rate_6m_annualised": "6 months annualised",
    "rate_12m": "12 months",
    "annual_average": "annual averages",
}


def as_of_fields(text: str | None) -> dict[str, str]:
    """Tell a period that is read as the print from a date whose vintages are used."""
    if not text:
        return {}
    day = re.fullmatch(r"[0-9]{4}-[0-9]{2}-[0-9]{2}", text.strip())
    return {"as_of" if day else "newest": text}


def rules_of(lines: tuple[str, ...], store: Store) -> tuple[Rule, ...]:
    """Read the rules given, or take those of the workspace."""
    return read_rules(lines) or rules_in_force(store)[0]


def report(
    state: ViewState, bridge: Bridge, rules: tuple[Rule, ...]
) -> tuple[Reading, dict[str, Any], list[str]]:
    """Return what is known about the print, the JSON answer and the lines to print."""
    known = completed_reading(state, bridge)
    kept = kept_statements(bridge.workspace.statement_store)
    name, last = known.series.name, known.series.last
    found = set_off(known, rules, stated_bounds(kept, name, last, state.formula))
    values = quantities(known)
    said = [sentence(known), *verdict(known)]
    rates = [
        f"{words} {plain(values[name])}"
        for name, words in RATE_WORDS.items()
        if values[name] == values[name]
    ]
    if rates and known.series.kind != "rate":
        said.append(f"Rates, percent ({state.formula} formula): {', '.join(rates)}.")
    if known.standing is not None:
        said.append(
            f"Rank {plain(known.standing.rank, 1)} ({known.standing.kind}) among"
            f" {known.standing.n} {known.noun}s."
        )
    if known.fits:
        said.append(fit_words(known))
    if known.fitted is not None:
        said.append(tail_words(known.fitted, known, "A reading at least as high, fitted"))
    for run in known.runs:
        said.append(
            f"Above {plain(known.mark or 0.0, 1)} percent: {period_label(run.first)} to"
            f" {period_label(run.last)}, {run.length} {known.noun}s, peak {plain(run.peak, 1)} in"
            f" {period_label(run.peak_period)}."
        )
    said += [f"Alert ({alert.rule}): {alert.sentence}" for alert in found]
    said += known.notes
    if known.series.kind == "rate":
        said.append(
            f"{known.series.name} is a rate already: growth, base effect, carry-over: none."
        )
    else:
        said += [f"No {part}: {why}." for part, why in known.refused.items()]
    said.append(CAUTION)
    return known, reading_answer(known, found), said
