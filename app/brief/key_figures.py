"""The few numbers of a page that the next brief is held against."""

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from analytics.series import period_label
from app.breadth.bridge import breadth
from app.compute import Bridge, noun
from app.lag.evidence import completed
from app.outlook.answer import LEVEL
from app.outlook.bridge import outlook
from app.outlook.words import best_benchmark, rate_words
from app.reading.bridge import reading
from app.reading.fields import MEASURE
from app.reading.words import quantities
from app.state import ViewState
from app.words import p_words, plain, signed


@dataclass(frozen=True)
class KeyFigure:
    """One number of a brief.

    Attributes
    ----------
    key, label, unit : str
        Name in the recipe, words on the page, unit.
    value : float
        Unrounded; nan where there is none.
    shape : str
        How it is written: ``p`` for a probability, else the number of decimals, ``+`` before it
        where the sign is to be shown.
    """

    key: str
    label: str
    unit: str
    value: float
    shape: str = "2"

    @property
    def text(self) -> str:
        """The number as people read it."""
        if np.isnan(self.value):
            return "none"
        if self.shape == "p":
            return p_words(self.value)
        write = signed if self.shape.startswith("+") else plain
        return write(self.value, int(self.shape.lstrip("+")))


_RATES = (
    ("rate_1m", "rate over one period", "%", "+2"),
    ("rate_3m_annualised", "3-month rate, annualised", "%", "+2"),
    ("rate_12m", "12-month rate", "%", "+2"),
    ("change_12m", "change in the 12-month rate", "points", "+2"),
    ("rank_percent", "rank in history of the {measure}", "of 100", "1"),
    ("change_36m", "change over 36 months", "%", "+2"),
)


def _reading(state: ViewState, bridge: Bridge) -> tuple[KeyFigure, ...]:
    known = reading(state, bridge)
    values, measure = quantities(known), MEASURE.options[state.measure]
    found = [
        KeyFigure(
            key,
            f"{known.series.name}, {words.format(measure=measure)}",
            unit,
            float(values[key]),
            shape,
        )
        for key, words, unit, shape in _RATES
        if not np.isnan(values[key])
    ]
    if known.carried is not None:
        year = known.carried.year + 1
        found.append(
            KeyFigure(
                "carry_over",
                f"{known.series.name}, carry-over to {year}",
                "%",
                float(known.carried.next_year),
                "+2",
            )
        )
    return tuple(found)


def _breadth(state: ViewState, bridge: Bridge) -> tuple[KeyFigure, ...]:
    shown = breadth(state, bridge)
    over = f"over {shown.span} {shown.noun}s" if shown.span > 1 else f"over one {shown.noun}"
    found = [
        KeyFigure("diffusion", "diffusion", "of 100", float(shown.diffusion[-1]), "0"),
        KeyFigure(
            "above_pace",
            f"rising faster than {shown.state.pace} % a year",
            "% of components",
            float(shown.above[-1]),
            "0",
        ),
    ]
    if shown.weighted is not None:
        for place, (name, values) in enumerate(shown.weighted.measures.items()):
            label = f"{name[0].lower()}{name[1:]}, {over}"
            found.append(KeyFigure(f"measure_{place}", label, "%", float(values[-1]), "+2"))
    return tuple(found)


def _lag(state: ViewState, bridge: Bridge) -> tuple[KeyFigure, ...]:
    state = bridge.fitted(state)
    known, cell, pair = completed(state, bridge), bridge.cell(state), bridge.pair(state)
    unit, where = noun(pair), f"window {state.window}, shift {state.shift:+d}"
    found = [
        KeyFigure("correlation", f"correlation at {where}", "", cell.correlation, "+2"),
        KeyFigure("slope", f"slope at {where}", "points a point", cell.slope, "3"),
        KeyFigure("p_naive", f"naive p at {where}", "", cell.p_naive, "p"),
        KeyFigure("p_cell", f"per-cell p at {where}", "", float(known.inference.p), "p"),
        KeyFigure(
            "effective",
            f"effective {unit}s at {where}",
            f"{unit}s",
            float(known.inference.effective_months),
            "0",
        ),
        KeyFigure(
            "fragility", "change of slope without one episode", "of 1", known.influence.fragility
        ),
    ]
    search = known.search
    if search is not None:
        found += [
            KeyFigure("p_search", "search-adjusted p of the best cell", "", float(search.p), "p"),
            KeyFigure(
                "best_window", "window of the best cell", f"{unit}s", search.best_window, "0"
            ),
            KeyFigure("best_shift", "shift of the best cell", f"{unit}s", search.best_shift, "+0"),
        ]
    if known.found and known.shift_set is not None and known.shift_set.shifts.size:
        ends = known.shift_set.shifts
        found += [
            KeyFigure("set_first", "shift set, first", f"{unit}s", float(ends[0]), "+0"),
            KeyFigure("set_last", "shift set, last", f"{unit}s", float(ends[-1]), "+0"),
        ]
    return tuple(found)


def _outlook(state: ViewState, bridge: Bridge) -> tuple[KeyFigure, ...]:
    known = outlook(state, bridge)
    found, unit = known.found, "%"
    if known.path is None or known.fan is None:
        return ()
    words = rate_words(found, state.target)
    place = min(found.ahead, known.reach) - 1
    when = period_label(known.periods[place])
    low, high = known.fan.band(LEVEL)
    figures = [
        KeyFigure(
            "implied", f"implied {words}, {when}", unit, float(known.fan.centre[place]), "+2"
        ),
        KeyFigure(
            "low",
            f"low end of the {100 * LEVEL:.0f} % interval, {when}",
            unit,
            float(low[place]),
            "+2",
        ),
        KeyFigure(
            "high",
            f"high end of the {100 * LEVEL:.0f} % interval, {when}",
            unit,
            float(high[place]),
            "+2",
        ),
    ]
    if known.scores is not None:
        ahead = min(found.ahead, known.scores.ahead.size)
        benchmark = best_benchmark(known.scores, ahead)
        row = known.scores.benchmarks.index(benchmark)
        ratio = float(known.scores.ratio[row, ahead - 1])
        label = f"past errors {ahead} {found.noun}s ahead, over those of {benchmark}"
        figures.append(KeyFigure("ratio", label, "times", ratio, "2"))
    if known.gap is not None:
        gap = float(known.gap.gap[-1])
        figures.append(KeyFigure("gap", "observed less expected, newest", "points", gap, "+2"))
    return tuple(figures)


KEY_FIGURES: dict[str, Callable[[ViewState, Bridge], tuple[KeyFigure, ...]]] = {
    "reading": _reading,
    "breadth": _breadth,
    "lag": _lag,
    "outlook": _outlook,
}  # page name -> figures; a page that is not here has none


def newest_period(state: ViewState, bridge: Bridge) -> str:
    """Return the period of the print that the Reading page would read, in words."""
    return period_label(reading(state, bridge).series.last)
