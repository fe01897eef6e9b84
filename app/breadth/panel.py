"""Components and weights that are loaded, laid side by side on one calendar."""

import re
from collections import Counter
from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np
import pandas as pd

from analytics.series import PERIOD_NOUN, FloatArray, Frequency, Series, period_label
from analytics.weights import ChainedBasket, WeightTable, chained_basket, price_updated
from app.intake.problems import counted, quoted
from app.state import StateError, ViewState
from app.workspace import WorkspaceView

ALL_ITEMS = re.compile(r"price|\bh?icp\b|\bcpi|all.?items|total|headline|overall", re.IGNORECASE)


@dataclass(frozen=True, eq=False)
class Panel:
    """Prices and weights of the components that have both.

    Attributes
    ----------
    names : tuple of str, length K
        In the order of the weights.
    periods : PeriodIndex, shape (n,)
        From the earliest to the newest value of any component.
    frequency : {"monthly", "quarterly", "annual"}
        Calendar of the components.
    prices : ndarray of float, shape (n, K)
        Positive; nan where there is none.
    table : WeightTable
        As loaded, with the components that have no prices.
    columns : tuple of int, length K
        Column of `table` of each component.
    notes : tuple of str
        What was left out, a sentence each.
    """

    names: tuple[str, ...]
    periods: pd.PeriodIndex
    frequency: Frequency
    prices: FloatArray
    table: WeightTable
    columns: tuple[int, ...]
    notes: tuple[str, ...]

    @property
    def weights(self) -> FloatArray:
        """Weights of the components, shape (years, K), as they were published."""
        return self.table.values[:, list(self.columns)]

    def until(self, last: pd.Period) -> "Panel":
        """Return the panel up to a period."""
        stop = max(0, last.ordinal - self.periods[0].ordinal + 1)
        return Panel(
            self.names,
            self.periods[:stop],
            self.frequency,
            self.prices[:stop],
            self.table,
            self.columns,
            self.notes,
        )


def components(in_view: WorkspaceView) -> tuple[dict[str, Series], WeightTable]:
    """Return the loaded series that have weights, by the name that the weights give them.

    Raises
    ------
    StateError
        No weights are loaded, or none of them is of a loaded series.
    """
    table = in_view.weights
    if table is None:
        raise StateError(
            "no weights are loaded; open a file with a row a year and a column a component, named"
            " as the components are, on the Data page"
        )
    loaded = in_view.series
    folded = {name.strip().casefold(): series for name, series in loaded.items()}
    matched = {
        name: loaded.get(name) or folded[name.strip().casefold()]
        for name in table.names
        if name in loaded or name.strip().casefold() in folded
    }
    if not matched:
        raise StateError(
            f"no loaded series has a weight: {table.source or 'the weights'} names"
            f" {quoted(table.names[0])}"
            + (f" and {len(table.names) - 1} more" if len(table.names) > 1 else "")
        )
    return matched, table


def panel(in_view: WorkspaceView, found: Mapping[str, Series], table: WeightTable) -> Panel:
    """Lay the components side by side; what cannot be used is left out with a sentence.

    Raises
    ------
    StateError
        Nothing is left.
    """
    notes: list[str] = []
    calendar, _ = Counter(series.frequency for series in found.values()).most_common(1)[0]
    kept: dict[str, Series] = {}
    other: dict[str, list[str]] = {}
    for name, series in found.items():
        low = np.flatnonzero(series.values <= 0)
        if series.frequency != calendar:
            other.setdefault(f"must be {calendar} as the others are, but is not", []).append(name)
        elif series.kind == "rate":
            other.setdefault("must be an index, but holds rates", []).append(name)
        elif low.size:
            notes.append(
                f"{quoted(name)} must be positive, but {period_label(series.first + int(low[0]))}"
                f" is {series.values[low[0]]:g}; it is left out and its weight goes to the others."
            )
        else:
            kept[name] = series
    notes += [
        f"{counted(quoted(names[0]), len(names) - 1, 'component')} {why}; left out, the weight"
        " goes to the others."
        for why, names in other.items()
    ]
    if not kept:
        raise StateError("no component is left: " + " ".join(notes))
    notes += _unpriced(found, table) + _unweighted(in_view, found, calendar)
    first = min(series.first.ordinal for series in kept.values())
    last = max(series.first.ordinal + series.values.size for series in kept.values())
    prices = np.full((last - first, len(kept)), np.nan)
    for column, series in enumerate(kept.values()):
        start = series.first.ordinal - first
        prices[start : start + series.values.size, column] = series.values
    opening = next(iter(kept.values())).first
    names = tuple(kept)
    return Panel(
        names,
        pd.period_range(opening + (first - opening.ordinal), periods=last - first),
        calendar,
        prices,
        table,
        tuple(table.names.index(name) for name in names),
        tuple(notes),
    )


def _unpriced(found: Mapping[str, Series], table: WeightTable) -> list[str]:
    absent = [name for name in table.names if name not in found]
    if not absent:
        return []
    places = [table.names.index(name) for name in absent]
    share = 100 * np.nansum(table.values[-1, places]) / table.sums[-1]
    return [
        f"{counted(quoted(absent[0]), len(absent) - 1, 'component')} of {table.source or 'weights'}"
        f" must be loaded as series, but {'is' if len(absent) == 1 else 'are'} not;"
        f" {share:.1f} % of the weight of {table.years[-1]} goes to the others."
    ]


def _unweighted(in_view: WorkspaceView, found: Mapping[str, Series], calendar: str) -> list[str]:
    """Name series that stand in a file with components and have no weight."""
    weighted = {id(series) for series in found.values()}
    bare = [
        one.name
        for release in in_view.releases
        if any(id(one) in weighted for one in release.series)
        for one in release.series
        if id(one) not in weighted
        and one.kind == "index"
        and one.frequency == calendar
        and not ALL_ITEMS.search(one.name)
    ]
    if not bare:
        return []
    verb = "has" if len(bare) == 1 else "have"
    return [
        f"{counted(quoted(bare[0]), len(bare) - 1, 'series')} {verb} no weight and"
        f" {'is' if len(bare) == 1 else 'are'} left out."
    ]


def chained(shown: Panel, state: ViewState) -> tuple[ChainedBasket, tuple[str, ...]]:
    """Chain the components of a panel by the weights rule of the state; notes are sentences.

    Raises
    ------
    StateError
        Weights do not sum and are not to be scaled, or none is of the time of the prices.
    """
    table, notes = shown.table, []
    n = len(shown.periods)
    rows, links = _links(table.years, shown, state)
    uneven = [row for row in table.uneven() if row in rows]
    if uneven:
        worst = uneven[-1]
        words = (
            f"weights of {table.years[worst]} must sum to {table.total:g}, but sum to"
            f" {table.sums[worst]:.10g}"
        )
        if len(uneven) > 1:
            words += f", and those of {len(uneven) - 1} more years do not sum either"
        if state.scale == "no":
            raise StateError(words)
        notes.append(f"{words[0].upper()}{words[1:]}; they are scaled.")
    shares = shown.weights[rows]
    if state.valued == "year":
        shares, note = _updated(shown, [table.years[row] for row in rows], links, shares)
        notes += note
    if links[0] > 0:
        notes.append(
            f"Weights begin in {table.years[rows[0]]}; before"
            f" {period_label(shown.periods[links[0]])} nothing is chained."
        )
    stale = shown.periods[-1].year - table.years[rows[-1]]
    if (
        stale > 0
        and links[-1] < n - 1
        and shown.periods[-1].ordinal
        > _reference(table.years[rows[-1]] + 1, shown.frequency, state.link)
    ):
        notes.append(
            f"There are no weights of {table.years[rows[-1]] + 1} or later; the basket of"
            f" {table.years[rows[-1]]} is kept on."
        )
    try:
        basket = chained_basket(shown.prices, shares, links)
    except ValueError as error:
        raise StateError(str(error)) from error
    return basket, (*notes, *_late_and_absent(shown, basket))


def _links(years: Sequence[int], shown: Panel, state: ViewState) -> tuple[list[int], list[int]]:
    """Rows of the weights in use, and the place of the period each belongs to."""
    first, n = shown.periods[0].ordinal, len(shown.periods)
    places = [_reference(year, shown.frequency, state.link) - first for year in years]
    rows = [row for row, place in enumerate(places) if place < n - 1 or (n == 1 and place < 1)]
    before = [row for row in rows if places[row] <= 0]
    rows = rows[len(before) - 1 :] if before else rows
    if not rows:
        raise StateError(
            f"weights must be of the time of the prices, but begin in {years[0]} and the prices end"
            f" in {period_label(shown.periods[-1])}"
        )
    return rows, [max(0, places[row]) for row in rows]


def _reference(year: int, frequency: Frequency, link: int) -> int:
    """Ordinal of the period to whose prices the weights of a year belong.

    A link month of 12 is the December before the year, 1 its January and so on.
    """
    month = link % 12
    match frequency:
        case "monthly":
            return (year - 1970) * 12 - 1 + month
        case "quarterly":
            return (year - 1970) * 4 - 1 + -(-month // 3)
        case "annual":
            return year - 1970 - 1


def _updated(
    shown: Panel, years: Sequence[int], links: Sequence[int], shares: FloatArray
) -> tuple[FloatArray, list[str]]:
    """Carry weights at the mean prices of the year before to the prices of the link."""
    calendar = shown.periods.year
    updated, kept = shares.copy(), []
    for row, (year, link) in enumerate(zip(years, links, strict=True)):
        of_year = shown.prices[calendar == year - 1]
        if not len(of_year):
            kept.append(year)
            continue
        known = ~np.isnan(of_year)
        means = np.where(known, of_year, 0.0).sum(axis=0) / np.where(
            known.any(axis=0), known.sum(axis=0), np.nan
        )
        updated[row] = price_updated(shares[row], shown.prices[link] / means)
    if not kept:
        return updated, []
    return updated, [
        f"Weights of {kept[0]} are used as they are: there are no prices of {kept[0] - 1}."
    ]


def _late_and_absent(shown: Panel, basket: ChainedBasket) -> list[str]:
    """Say which components start late, end early or have gaps."""
    notes = []
    known = ~np.isnan(shown.prices)
    firsts = known.argmax(axis=0)
    late = [k for k in np.flatnonzero(firsts > basket.links[0]) if basket.shares[:, k].any()]
    if late:
        k = int(late[0])
        starts = "starts" if len(late) == 1 else "start"
        entry = basket.links[int(np.flatnonzero(basket.shares[:, k])[0])]
        notes.append(
            f"{counted(quoted(shown.names[k]), len(late) - 1, 'component')}"
            f" {starts} late: {period_label(shown.periods[firsts[k]])};"
            f" in the basket from the link of {period_label(shown.periods[entry])}, and before it"
            " the weight goes to the others."
        )
    moved = np.argwhere(basket.imputed)
    if len(moved):
        t, k = moved[-1]
        noun = PERIOD_NOUN[shown.frequency]
        notes.append(
            f"{quoted(shown.names[k])} has no value in {period_label(shown.periods[t])}"
            + (f" (and {len(moved) - 1} more values are absent)" if len(moved) > 1 else "")
            + f"; in a {noun} without a value a component is moved with the others."
        )
    never = [
        shown.names[k]
        for k in np.flatnonzero(~basket.shares.any(axis=0))
        if np.nansum(shown.weights[:, k]) > 0
    ]
    if never:
        notes.append(
            f"{counted(quoted(never[0]), len(never) - 1, 'component')} has no price at any link and"
            " takes no part."
        )
    low, high = np.fmin.reduce(shown.prices, axis=0), np.fmax.reduce(shown.prices, axis=0)
    flat = (low == high) & (known.sum(axis=0) > 1)
    still = [shown.names[k] for k in np.flatnonzero(flat)]
    if still:
        notes.append(
            f"{counted(quoted(still[0]), len(still) - 1, 'component')} has the same value in every"
            f" {PERIOD_NOUN[shown.frequency]}; its rank says nothing."
        )
    return notes
