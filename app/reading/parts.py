"""The parts of a reading that need no long work, each by itself."""

from collections.abc import Callable
from dataclasses import replace
from typing import Any, TypeVar, get_args

import numpy as np
import pandas as pd

from analytics.base_effect import base_effects, drop_outs
from analytics.carry_over import carry_over
from analytics.distribution import distribution_fit, kernel_fit
from analytics.families import FAMILIES
from analytics.high_inflation import cagan_episodes, runs_beyond, three_year_change
from analytics.print_rates import PrintRates, factor_since, print_rates
from analytics.rates import Formula, growth_rate
from analytics.seasonal import HERE, SeasonalAdjustment, seasonal_adjustment
from analytics.series import (
    PERIOD_NOUN,
    PERIODS_PER_YEAR,
    FloatArray,
    Series,
    period_label,
)
from analytics.standing import RankKind, rank_through_time, standing
from analytics.tail import observed_tail
from app.reading.result import Reading, SubSample
from app.state import StateError, ViewState

T = TypeVar("T")


def core_reading(
    state: ViewState,
    loaded: Series,
    season: Callable[[Series], SeasonalAdjustment] = seasonal_adjustment,
) -> Reading:
    """Work out each part that needs no long work; `season` takes a season out."""
    series, notes = _to_print(loaded, state)
    adjusted, said = _adjusted(series, state, season)
    short, notes = adjusted or series, (*notes, *said)
    refused: dict[str, str] = {}

    def part(name: str, make: Callable[[], T]) -> T | None:
        try:
            return make()
        except ValueError as error:
            refused[name] = str(error)
            return None

    year, formula = PERIODS_PER_YEAR[series.frequency], _formula(state)
    kind: RankKind = state.rank_kind  # type: ignore[assignment]
    growing = series.kind != "rate"
    yearly = part("12-month rate", lambda: _rate(series, year, formula))
    yearly = _on_time(yearly, series, "12-month rate", refused)
    quarter = None
    if growing and year >= 4:
        quarter = part("3-month rate", lambda: _rate(short, year // 4, formula, annualised=True))
    ranked = series if state.measure == "12m" else short
    measured = part("rank", lambda: _measured(ranked, state))
    measured = _on_time(measured, series, "rank", refused)
    rates = {
        each: found
        for each in get_args(Formula)
        if growing and (found := part("rates", lambda each=each: _rates(series, short, each)))  # type: ignore[misc]
    }
    built: dict[str, Any] = {}
    if measured is not None:
        built |= _ranked(measured, state, kind, part)
    if yearly is not None:
        built |= _high(series, yearly, state, part)
    return Reading(
        state=state,
        loaded=loaded,
        series=series,
        short=adjusted,
        notes=notes,
        rates=rates,
        measured=measured,
        yearly=yearly,
        quarter=quarter,
        factor=part("factor", lambda: _since_factor(series, state)),
        base=part("base effect", lambda: base_effects(series, formula=formula)),
        drops=part("drop-outs", lambda: drop_outs(series, formula=formula)),
        carried=part("carry-over", lambda: carry_over(series)),
        refused=refused,
        **built,
    )


def _adjusted(
    series: Series, state: ViewState, season: Callable[[Series], SeasonalAdjustment]
) -> tuple[Series | None, tuple[str, ...]]:
    """Take the season out up to the print, as it would have been done then; say what was done."""
    if state.season == "read" or series.frequency == "annual" or series.adjustment == "yes":
        return None, ()
    if series.adjustment == "unknown":
        text = "since its file does not say whether it is adjusted; the Data page can"
        return None, (f"The season of {series.name} is left in, {text}.",)
    try:
        found = season(series).adjusted
    except ValueError as error:
        return None, (f"The season of {series.name} is left in: {error}.",)
    if series.kind == "rate":
        return found, (f"{series.name} is read {HERE}; the 12-month view is as it is in the file.",)
    noun = PERIOD_NOUN[series.frequency]
    return found, (
        f"Rates over less than a year are of {series.name} {HERE}; rates over a year, base effects"
        f" and carry-over are of the {noun}s as read.",
    )


def _rates(series: Series, short: Series, formula: Formula) -> PrintRates:
    """Rates of the print: over less than a year of `short`, over a year of the series as read."""
    year, less = (print_rates(each, formula=formula) for each in (series, short))
    return replace(less, year=year.year, annual_average=year.annual_average)


def _ranked(
    measured: Series,
    state: ViewState,
    kind: RankKind,
    part: Callable[[str, Callable[[], Any]], Any],
) -> dict[str, Any]:
    """Rank, distribution and tail of the print."""
    value = float(measured.values[-1])
    sample = part("rank", lambda: _sample(measured, state))
    built: dict[str, Any] = {
        "through_time": part(
            "rank through time",
            lambda: rank_through_time(
                measured, kind=kind, window=state.rank_window if state.among == "rolling" else None
            ),
        ),
        "earlier": part("earlier", lambda: standing(measured.values[:-1], value, kind="strict")),
    }
    if sample is None:
        return built
    fits = part("distribution", lambda: {name: distribution_fit(sample, name) for name in FAMILIES})
    kinds = get_args(RankKind)
    return built | {
        "sample": sample,
        "standing": part("rank", lambda: standing(sample, value, kind=kind)),
        "ranks": part("rank", lambda: {k: standing(sample, value, kind=k).rank for k in kinds})
        or {},
        "fits": fits or {},
        "kernel": part("kernel", lambda: kernel_fit(sample)) if fits else None,
        "observed": part("tail", lambda: observed_tail(sample, value)),
        "parts": part("sub-samples", lambda: _parts(measured, state, value)) or (),
    }


def _high(
    series: Series,
    yearly: Series,
    state: ViewState,
    part: Callable[[str, Callable[[], Any]], Any],
) -> dict[str, Any]:
    """Episodes above the mark, falling prices, the three-year mark and Cagan's rule."""
    mark = float(state.level)
    if state.beyond == "rank":
        mark = float(np.nanquantile(yearly.values, state.rank_level / 100.0))
    built: dict[str, Any] = {
        "mark": mark,
        "runs": part(
            "episodes",
            lambda: runs_beyond(yearly, mark, shortest=state.shortest, gap=state.gap),
        )
        or (),
    }
    if series.kind == "rate":
        return built
    return built | {
        "falling": part("falling prices", lambda: runs_beyond(yearly, 0.0, below=True)) or (),
        "three_years": part("36-month change", lambda: three_year_change(series)),
        "cagan": part(
            "Cagan's rule", lambda: cagan_episodes(growth_rate(series, formula="percent"))
        )
        or (),
    }


def _to_print(loaded: Series, state: ViewState) -> tuple[Series, tuple[str, ...]]:
    """Cut a series to the print and leave out values that have no growth rate."""
    notes = []
    series = loaded
    if state.newest:
        asked = pd.Period(state.newest).asfreq(loaded.first.freqstr, how="end")
        series = loaded.between(None, asked)
        if series.last != asked and len(state.newest) > 4:
            notes.append(
                f"There is no value for {period_label(asked)}; {period_label(series.last)} is read."
            )
    if series.gaps.size:
        notes.append(
            f"{series.gaps.size} {PERIOD_NOUN[series.frequency]}"
            f"{'s' if series.gaps.size > 1 else ''} of {loaded.name} without a value; rates that"
            " need them are missing."
        )
    if series.kind != "rate" and (series.values <= 0).any():
        low = np.flatnonzero(series.values <= 0)
        many = low.size > 1
        if low.size == np.count_nonzero(~np.isnan(series.values)):
            raise StateError(f"{loaded.name!r} must have a value above zero, but has none")
        last = series.last
        values = np.where(series.values > 0, series.values, np.nan)
        notes.append(
            f"{low.size} value{'s' if many else ''} of {loaded.name} at or below zero (the first in"
            f" {period_label(series.periods[low[0]])}) {'have' if many else 'has'} no growth rate"
            f" and {'are' if many else 'is'} left out."
        )
        series = replace(series, values=values)
        if series.last != last:
            notes.append(f"So {period_label(series.last)} is read, and not {period_label(last)}.")
    return series, tuple(notes)


def _formula(state: ViewState) -> Formula:
    return state.formula  # type: ignore[return-value]


def _measured(series: Series, state: ViewState) -> Series:
    year = PERIODS_PER_YEAR[series.frequency]
    span = {"1m": 1, "3m": year // 4, "6m": year // 2, "12m": year}[state.measure]
    if span < 1:
        raise StateError(
            f"{series.name!r} is annual and has no rate over {state.measure[0]} months"
        )
    return _rate(series, span, _formula(state), annualised=state.measure in ("3m", "6m"))


def _rate(series: Series, span: int, formula: Formula, *, annualised: bool = False) -> Series:
    """Return a growth rate, or say how many periods it would need."""
    noun, n = PERIOD_NOUN[series.frequency], series.values.size
    if series.kind != "rate" and n <= span:
        raise StateError(
            f"a rate over {span} {noun}{'s' if span > 1 else ''} needs {span + 1} {noun}s, but"
            f" {series.name!r} has {n} up to the print"
        )
    return growth_rate(series, span=span, formula=formula, annualised=annualised)


def _on_time(
    rate: Series | None, series: Series, name: str, refused: dict[str, str]
) -> Series | None:
    """Return the rate if it reaches the print."""
    if rate is None or rate.last == series.last:
        return rate
    refused[name] = (
        f"{series.name!r} has no such rate in {period_label(series.last)}, because the value that"
        " it is compared with is missing"
    )
    return None


def _since_factor(series: Series, state: ViewState) -> Series:
    if series.kind == "rate":
        raise StateError(
            f"{series.name!r} must be an index or a level to have a cumulative change, but it is a"
            " rate already"
        )
    return factor_since(series, _place(series, state.since))


def _place(series: Series, text: str) -> int:
    """Place in a series of a period of the state; the first one where it names none."""
    if not text:
        return 0
    asked = pd.Period(text).asfreq(series.first.freqstr, how="start")
    place = max(0, asked.ordinal - series.first.ordinal)
    if place >= series.values.size - 1:
        raise StateError(
            f"a period must come before the print of {period_label(series.last)}, but got {text}"
        )
    return int(place)


def _sample(measured: Series, state: ViewState) -> FloatArray:
    """Return the readings that the print is compared with, in the order of time."""
    values = measured.values
    match state.among:
        case "prior":
            values = values[:-1]
        case "rolling":
            values = values[-state.rank_window :]
        case "since":
            values = values[_place(measured, state.since) :]
        case "season":
            values = values[:: -PERIODS_PER_YEAR[measured.frequency]][::-1]
    if np.isnan(values).all():
        raise StateError(f"{measured.name!r} has no earlier reading to compare the print with")
    return values


def _parts(measured: Series, state: ViewState, value: float) -> tuple[SubSample, ...]:
    place = _place(measured, state.split) if state.split else measured.values.size // 2
    found = []
    for start, stop in ((0, place), (place, measured.values.size)):
        values = measured.values[start:stop]
        fits = {name: distribution_fit(values, name) for name in FAMILIES}
        found.append(
            SubSample(
                measured.first + start,
                measured.first + (stop - 1),
                fits,
                float(np.nanmean(values)),
                observed_tail(values, value),
            )
        )
    return tuple(found)
