"""Seasons taken out here: one result for every page, its words, and its numbers as rows."""

import math
from collections.abc import Iterable, Sequence
from typing import Any

import numpy as np

from analytics.seasonal import HERE, SeasonalAdjustment, seasonal_adjustment
from analytics.series import PERIODS_PER_YEAR, Series, period_code, period_label
from app.memory import Memory
from app.words import signed


def season_of(series: Series, memory: Memory) -> SeasonalAdjustment:
    """Return a series with its season taken out, the same object for whoever asks.

    Raises
    ------
    ValueError
        It is annual, too short, has a gap or a value not above zero; one sentence.
    """
    told = (series.fingerprint, series.name, series.kind, series.source, series.unit)
    return memory.once(f"stl:{':'.join(told)}", lambda: seasonal_adjustment(series))


def may_be_adjusted(series: Series) -> bool:
    """Tell whether a series is said to be unadjusted and has a season that could be taken out."""
    return series.adjustment == "no" and series.frequency != "annual"


def season_words(found: SeasonalAdjustment) -> str:
    """Say how far the season moves the newest year: ``From -1.2 percent (Jan) to +2.0 (Dec)``."""
    season = found.season
    year = PERIODS_PER_YEAR[season.frequency]
    newest = season.values[-year:]
    low, high = int(newest.argmin()), int(newest.argmax())
    start = season.periods[-newest.size]
    when = [period_label(start + place) for place in (low, high)]
    unit = season.unit or "in its own unit"
    words = (
        f"In the newest year the season moves {found.adjusted.name} from"
        f" {signed(float(newest[low]))} ({when[0]}) to {signed(float(newest[high]))} ({when[1]}),"
        f" {unit}"
    )
    before = season.values[:year]
    span = [float(np.ptp(part)) for part in (before, newest)]
    if season.values.size >= 2 * year and not math.isclose(span[0], span[1], rel_tol=0.1):
        words += f"; its range was {span[0]:.2f} in the first year and is {span[1]:.2f} now"
    return f"{words}. {HERE[0].upper()}{HERE[1:]}."


def season_rows(parts: Sequence[tuple[Series, SeasonalAdjustment]]) -> Iterable[Sequence[Any]]:
    """Give each series as used, adjusted and its season, a row a period, one after another."""
    yield "series", "period", "as_used", "adjusted_here", "season", "season_unit"
    for series, found in parts:
        for i, period in enumerate(series.periods):
            yield (
                series.name,
                period_code(period),
                float(series.values[i]),
                float(found.adjusted.values[i]),
                float(found.season.values[i]),
                found.season.unit,
            )
