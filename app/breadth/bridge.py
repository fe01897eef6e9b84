"""From a state to how broad the price change was: contributions, diffusion, core measures."""

import hashlib
from collections.abc import Mapping
from dataclasses import dataclass, fields, replace
from typing import Any

import numpy as np
import pandas as pd

from analytics.breadth import (
    change,
    contributions,
    diffusion_index,
    own_history_rank,
    share_above,
)
from analytics.core_measures import Tracking, core_tracking
from analytics.series import PERIOD_NOUN, PERIODS_PER_YEAR, FloatArray, Series, period_label
from analytics.weights import ChainedBasket, basket_shares, effective_weights
from app.breadth.core import core_measures, left_out_of
from app.breadth.panel import ALL_ITEMS, Panel, chained, components, panel
from app.breadth.totals import aligned, chosen_total, ended_with_total
from app.compute import Bridge
from app.intake.problems import counted, quoted
from app.state import StateError, ViewState, kind_of
from app.workspace import WorkspaceView


@dataclass(frozen=True, eq=False)
class Weighted:
    """What needs weights.

    Attributes
    ----------
    basket : ChainedBasket
        Components chained by their weights.
    points, points_1 : ndarray of float, shape (n, K)
        Contributions in percentage points to the change over `span` periods and over one.
    effective : ndarray of float, shape (n, K)
        Share of each component at each period's own prices, 0 to 1.
    diffusion, above : ndarray of float, shape (n,)
        Share rising plus half of unchanged, and share above the pace, by weight.
    measures : mapping of str to ndarray of float, shape (n,)
        All items, weighted median, trimmed mean and baskets without, in percent over `span`.
    tracking : Tracking
        How near each measure came to the trend and to the year that followed.
    """

    basket: ChainedBasket
    points: FloatArray
    points_1: FloatArray
    effective: FloatArray
    diffusion: FloatArray
    above: FloatArray
    measures: Mapping[str, FloatArray]
    tracking: Tracking


@dataclass(frozen=True, eq=False)
class Breadth:
    """Everything that the Breadth page shows for one state.

    Attributes
    ----------
    state : ViewState
        The state answered, its span that of the numbers.
    names : tuple of str, length K
        Components.
    periods : PeriodIndex, shape (n,)
        Up to the print, which is the last.
    per_year : int
        Periods in a year.
    noun : str
        Month, quarter or year.
    start : int
        First period of the sample of the state.
    span : int
        Periods over which rates are taken: a year's or one.
    total : Series or None
        The published total; None where the chained one is used.
    rate, rate_1 : ndarray of float, shape (n,)
        Change of the total over `span` periods and over one, percent.
    rates, rates_1 : ndarray of float, shape (n, K)
        The same of the components; nan where a component is not in the basket.
    ranks : ndarray of float, shape (n - start, K)
        Rank of `rates` in each component's own sample, 0 to 100.
    diffusion, above : ndarray of float, shape (n,)
        As of `Weighted`, every component counting the same.
    left_out : ndarray of bool, shape (K,)
        Components that the exclusion measure leaves out.
    weighted : Weighted or None
        None where the weights are refused.
    notes : tuple of str
        What to know of the data, a sentence each.
    refusal : str
        Why there is nothing weighted; empty otherwise.
    prices : mapping of str to Series
        The components as loaded.
    weights_source, weights_fingerprint : str
        File and content of the weights.
    """

    state: ViewState
    names: tuple[str, ...]
    periods: pd.PeriodIndex
    per_year: int
    noun: str
    start: int
    span: int
    total: Series | None
    rate: FloatArray
    rate_1: FloatArray
    rates: FloatArray
    rates_1: FloatArray
    ranks: FloatArray
    diffusion: FloatArray
    above: FloatArray
    left_out: np.ndarray
    weighted: Weighted | None
    notes: tuple[str, ...]
    refusal: str
    prices: Mapping[str, Series]
    weights_source: str
    weights_fingerprint: str

    @property
    def drawn(self) -> slice:
        """The latest years, as many as the state draws, from the first period with a rate on."""
        n = len(self.periods)
        begun = int(np.argmax(~np.isnan(self.rates).all(axis=1)))
        return slice(max(self.start, begun, n - self.state.years * self.per_year), n)

    @property
    def residual(self) -> FloatArray:
        """Rate less the sum of contributions, percentage points, shape (n,)."""
        assert self.weighted is not None
        return np.asarray(self.rate - self.weighted.points.sum(axis=1))


def breadth(state: ViewState, bridge: Bridge) -> Breadth:
    """Compute what the page shows; kept under the data and the numeric part of the state.

    Raises
    ------
    StateError
        One sentence that says why there is nothing to show.
    """
    in_view = bridge.in_view(state)
    found, table = components(in_view)
    data = [table.fingerprint, *(f"{n}:{s.fingerprint}" for n, s in found.items())]
    data += [f"{n}:{s.fingerprint}" for n, s in in_view.series.items() if ALL_ITEMS.search(n)]
    if state.aggregate:
        data.append(in_view.named(state.aggregate).fingerprint)
    parts = [state.numbers().to_query(), *in_view.series, *data]
    key = hashlib.sha256("\n".join(parts).encode()).hexdigest()[:32]
    shown = bridge.memory.once(
        "breadth:" + key, lambda: _computed(state.numbers(), in_view, found, table)
    )
    display: dict[str, Any] = {
        item.name: getattr(state, item.name) for item in fields(state) if kind_of(item).display
    }
    return replace(shown, state=replace(shown.state, **display))


def _computed(
    state: ViewState, in_view: WorkspaceView, found: Mapping[str, Series], table: Any
) -> Breadth:
    whole = panel(in_view, found, table)
    shown = _until(whole, state)
    notes = list(shown.notes)
    per_year, noun = PERIODS_PER_YEAR[shown.frequency], PERIOD_NOUN[shown.frequency]
    span = per_year if state.span == "year" else 1
    basket, refusal = None, ""
    try:
        basket, more = chained(shown, state)
        notes += more
    except StateError as error:
        refusal = str(error)
    total = chosen_total(state, in_view, shown, basket)
    shown, basket = ended_with_total(shown, basket, total, state, notes)
    n = len(shown.periods)
    begun = basket.links[0] if basket is not None else 0
    if n - begun <= span and span > 1:
        notes.append(
            f"A rate over {span} {noun}s needs {span + 1} {noun}s, but there are {n - begun}; rates"
            f" over one {noun} are shown."
        )
        span, state = 1, replace(state, span="month")
    if n - begun < 2:
        raise StateError(f"a rate needs two {noun}s of prices, but there is {n - begun}")
    index = aligned(total, shown) if total is not None else None
    if index is None:
        index = basket.total if basket is not None else np.full(n, np.nan)
        if basket is not None:
            notes.append(
                "No published total is loaded that these weights chain to; the total here"
                " is chained from the components."
            )
    notes += _seasonal(shown, found, span)
    there = _there(shown, basket)
    rates = np.where(there, change(shown.prices, span), np.nan)
    rates_1 = np.where(there, change(shown.prices, 1), np.nan)
    start = _start(shown, state)
    pace = 100.0 * ((1.0 + float(state.pace) / 100.0) ** (span / per_year) - 1.0)
    left_out, label = left_out_of(state, shown.names, notes)
    weighted = None
    if basket is not None:
        shares = basket_shares(basket, span)
        measures = core_measures(
            state, basket, shares, index, rates, rates_1, span, left_out, label, notes
        )
        weighted = Weighted(
            basket,
            contributions(basket, span),
            contributions(basket, 1),
            effective_weights(basket),
            diffusion_index(rates, shares),
            share_above(rates, pace, shares),
            measures,
            core_tracking(
                {k: v[start:] * (per_year / span) for k, v in measures.items()},
                index[start:],
                per_year=per_year,
                width=2 * per_year + 1,
            ),
        )
    return Breadth(
        state,
        shown.names,
        shown.periods,
        per_year,
        noun,
        start,
        span,
        total,
        change(index, span),
        change(index, 1),
        rates,
        rates_1,
        own_history_rank(rates[start:]),
        diffusion_index(rates),
        share_above(rates, pace),
        left_out,
        weighted,
        tuple(notes),
        refusal,
        found,
        table.source,
        table.fingerprint,
    )


def _seasonal(shown: Panel, found: Mapping[str, Series], span: int) -> list[str]:
    """Say that rates over less than a year hold the season of unadjusted components."""
    if span == PERIODS_PER_YEAR[shown.frequency]:
        return []
    bare = [name for name in shown.names if found[name].adjustment == "no"]
    if not bare:
        return []
    verb = "is" if len(bare) == 1 else "are"
    return [
        f"{counted(quoted(bare[0]), len(bare) - 1, 'component')} {verb} said to be unadjusted:"
        f" rates over one {PERIOD_NOUN[shown.frequency]} hold the season. It is not taken out"
        " here, since contributions must add up to the published total."
    ]


def _until(whole: Panel, state: ViewState) -> Panel:
    """Cut the panel at the print asked for, or at the end of the sample."""
    calendar = whole.periods[0].freqstr
    for text in (state.newest, state.last):
        if text:
            end = pd.Period(text).asfreq(calendar, how="end")
            if end < whole.periods[0] or (text == state.newest and end > whole.periods[-1]):
                raise StateError(
                    f"the print must be from {period_label(whole.periods[0])} to"
                    f" {period_label(whole.periods[-1])}, but got {text}"
                )
            return whole.until(min(end, whole.periods[-1]))
    return whole


def _start(shown: Panel, state: ViewState) -> int:
    if not state.first:
        return 0
    first = pd.Period(state.first).asfreq(shown.periods[0].freqstr, how="start")
    place = max(0, first.ordinal - shown.periods[0].ordinal)
    if place >= len(shown.periods) - 1:
        raise StateError(
            f"the sample must begin before {period_label(shown.periods[-1])}, but got {state.first}"
        )
    return place


def _there(shown: Panel, basket: ChainedBasket | None) -> np.ndarray:
    """Tell where a component has a price of its own and is in the basket of its time."""
    known = ~np.isnan(shown.prices)
    if basket is None:
        return known
    inside = np.zeros(known.shape, dtype=bool)
    inside[basket.links[0] :] = (basket.shares > 0)[basket.row[basket.links[0] :]]
    return known & inside
