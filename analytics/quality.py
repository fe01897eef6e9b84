"""What looks wrong with a series before it is used: jumps, redefinitions, stale ends, rounding."""

from collections.abc import Iterable
from dataclasses import dataclass
from typing import Literal

import numpy as np
import pandas as pd

from analytics.series import (
    PERIOD_NOUN,
    PERIODS_PER_YEAR,
    FloatArray,
    Series,
    period_code,
    period_label,
)
from analytics.stable_season import log_growth, season_test

Severity = Literal["warning", "note"]
Check = Literal[
    "unit jump",
    "level shift",
    "re-referenced",
    "stale end",
    "rounding",
    "residual season",
    "mixed frequencies",
    "too short",
]

BOUND = 12.0  # robust standard deviations beyond which one growth rate is not of the others' kind
SMALLEST = 2.0  # percent; smaller steps are left to the reader
STAYS = 0.5  # share of the step that must be left over six periods
AHEAD = 6
AROUND = 36  # periods on each side from which the scale is taken
STALE = 3  # equal last values
COARSE = 0.25  # of a usual change, taken up by one step of rounding
SEASON_LEVEL = 0.001  # of the test for a season that is left
LEAST = 24


@dataclass(frozen=True)
class Finding:
    """One thing to look at.

    Attributes
    ----------
    severity : {"warning", "note"}
        A warning can make results wrong; a note is worth knowing.
    check : str
        Which check found it.
    series : str
        Name of the series.
    period : pandas.Period or None
        First period concerned; None for the whole series.
    message : str
        What was found, with its numbers.
    way : str
        What can be done.
    """

    severity: Severity
    check: Check
    series: str
    period: pd.Period | None
    message: str
    way: str

    def __str__(self) -> str:
        return f"{self.message}; {self.way}"


def findings(
    series: Series, *, stored: Series | None = None, window: int = 12
) -> tuple[Finding, ...]:
    """Return everything that the checks find in one series, warnings first.

    Parameters
    ----------
    series : Series
        As read.
    stored : Series, optional
        The vintage before it, for `rereferencing`.
    window : int, default 12
        Periods averaged, for `shortness`.
    """
    found = [
        *jumps(series),
        *(rereferencing(series, stored) if stored is not None else ()),
        *stale_end(series),
        *rounding(series),
        *residual_season(series),
        *shortness(series, window),
    ]
    return tuple(sorted(found, key=lambda finding: finding.severity != "warning"))


def jumps(series: Series) -> tuple[Finding, ...]:
    """Growth rates of another kind than the rest: a change of unit, or of definition.

    A growth rate, less the median of its calendar month where there are five years, is out of
    kind beyond 12 robust standard deviations (1.4826 times the median absolute deviation, the
    larger of the whole and of three years around it) and 2 percent. With Laplace shocks about 1
    period in 200 000 lies there by chance. Near a factor of 10, 1000 or 1 000 000 it is a jump of
    unit; else it is a level shift, if at least half of the step is left all through six periods.
    Own rule; the frequencies of false and missed alarms are own measurement, in the tests.
    """
    rate = log_growth(series)
    if rate is None or np.isfinite(rate).sum() < LEAST:
        return ()
    rest = _less_month(rate, series)
    whole = _spread(rest)
    grid = 100.0 * _step(series.values) / np.nanmedian(np.abs(series.values))
    found = []
    undone = -1  # the way back of a step that did not stay
    for place in np.flatnonzero(np.abs(rest) > max(BOUND * max(whole, grid / 2.0), SMALLEST)):
        near = rest[max(0, place - AROUND) : place + AROUND + 1]
        scale = max(whole, _spread(near), grid / 2.0)
        if place == undone or abs(rest[place]) <= BOUND * scale:
            continue
        period = series.first + int(place) + 1
        ahead = np.nancumsum(rest[place + 1 : place + 1 + AHEAD]) / rest[place]
        stays = ahead.size == 0 or bool(ahead.min() > STAYS - 1.0)
        if not stays:
            undone = int(place) + 1 + int(np.argmax(ahead <= STAYS - 1.0))
        power = int(np.rint(rest[place] / (100.0 * np.log(10.0))))
        off = abs(rest[place] - 100.0 * power * np.log(10.0))
        if abs(power) in (1, 3, 6) and off <= 4.0 * scale + 5.0:
            found.append(_unit_jump(series, period, power, stays))
        elif stays and ahead.size:
            found.append(_level_shift(series, period, float(rate[place]), rest[place] / scale))
    return tuple(found)


def _unit_jump(series: Series, period: pd.Period, power: int, stays: bool) -> Finding:
    times = f"{10 ** abs(power):,}".replace(",", " ")
    way = "multiplied" if power > 0 else "divided"
    length = "from there on" if stays else "for a while"
    return Finding(
        "warning",
        "unit jump",
        series.name,
        period,
        f"in {period_label(period)} values are {way} by about {times} {length}, as by a change of"
        " unit or a slip of the decimal mark",
        "correct the file, or mark a break there if the unit did change"
        if stays
        else "correct the file",
    )


def _level_shift(series: Series, period: pd.Period, rate: float, size: float) -> Finding:
    percent = 100.0 * np.expm1(rate / 100.0)
    noun = PERIOD_NOUN[series.frequency]
    return Finding(
        "warning",
        "level shift",
        series.name,
        period,
        f"the change of {percent:+.1f} percent in {period_label(period)} is {abs(size):.0f} times"
        f" the usual spread of a {noun}'s change, and the level stays: a new definition or a break"
        " is likely",
        "mark a break there, or make sure that the change is real",
    )


def rereferencing(series: Series, stored: Series) -> tuple[Finding, ...]:
    """Find whether a new vintage is the stored one times a constant, to within rounding.

    At least six common periods; the ratio may differ from its median by what half a step of
    rounding in each vintage explains, and its median must differ from 1 by more.
    """
    if series.frequency != stored.frequency or "rate" in (series.kind, stored.kind):
        return ()
    first, last = max(series.first, stored.first), min(series.last, stored.last)
    if last.ordinal - first.ordinal + 1 < 6:
        return ()
    new, old = (
        one.values[first.ordinal - one.first.ordinal : last.ordinal - one.first.ordinal + 1]
        for one in (series, stored)
    )
    both = np.isfinite(new) & np.isfinite(old)
    if both.sum() < 6 or (np.minimum(new[both], old[both]) <= 0).any():
        return ()
    new, old = new[both], old[both]
    ratio = np.log(new / old)
    room = 0.5 * _step(new) / new + 0.5 * _step(old) / old + 1e-9
    middle = float(np.median(ratio))
    if (np.abs(ratio - middle) > 2.0 * room).any() or abs(middle) <= 2.0 * float(np.max(room)):
        return ()
    return (
        Finding(
            "note",
            "re-referenced",
            series.name,
            series.first,
            f"every value is {np.exp(middle):.5g} times that of the vintage before, as by a new"
            " reference period",
            "nothing has to be done for growth rates; values of the two vintages do not compare",
        ),
    )


def stale_end(series: Series) -> tuple[Finding, ...]:
    """Find whether the series ends in equal values, at least three and more than ever before."""
    known = series.values[np.isfinite(series.values)]
    if known.size < LEAST:
        return ()
    starts = np.flatnonzero(np.r_[True, np.diff(known) != 0])
    lengths = np.diff(np.r_[starts, known.size])
    last = int(lengths[-1])
    if last < STALE or lengths.size == 1 or last <= lengths[:-1].max():
        return ()
    period = series.last - (last - 1)
    noun = PERIOD_NOUN[series.frequency]
    return (
        Finding(
            "warning",
            "stale end",
            series.name,
            period,
            f"the last {last} {noun}s all have the value {known[-1]:g}, longer than any stretch"
            " before",
            "see whether the newest values are out yet; end the sample before if they are not",
        ),
    )


def rounding(series: Series) -> tuple[Finding, ...]:
    """Find whether values carry too few decimals for their growth rates.

    One step of rounding against the median absolute change from one period to the next: a
    quarter of it is worth a note, all of it a warning. Two rounded values add an error of
    standard deviation ``step / sqrt(6)`` to their difference (uniform rounding errors).
    """
    if series.kind == "rate":
        return ()
    change = np.abs(np.diff(series.values))
    change = change[np.isfinite(change)]
    if change.size < LEAST:
        return ()
    step, usual = _step(series.values), float(np.median(change))
    if step == 0.0 or not change.any() or step < COARSE * usual:
        return ()
    level = float(np.nanmedian(np.abs(series.values)))
    share = f"{step / usual:.0%} of" if usual else "more than"
    noun = PERIOD_NOUN[series.frequency]
    return (
        Finding(
            "warning" if step >= usual else "note",
            "rounding",
            series.name,
            None,
            f"values are rounded to {step:g}, {share} a usual change; that alone adds"
            f" {100.0 * step / np.sqrt(6.0) / level:.2g} percentage points of noise to the growth"
            f" over one {noun}",
            "take a file with more decimals if there is one, or a longer window",
        ),
    )


def residual_season(series: Series) -> tuple[Finding, ...]:
    """Find a season in a series that is said to be adjusted, at 0.1 percent; see `season_test`."""
    if series.adjustment != "yes":
        return ()
    try:
        test = season_test(series)
    except ValueError:
        return ()
    if test.pvalue >= SEASON_LEVEL:
        return ()
    return (
        Finding(
            "warning",
            "residual season",
            series.name,
            None,
            "it is said to be seasonally adjusted, but a season is left in its growth (Friedman's"
            f" rank test: {test.statistic:.1f}, {test.places - 1} degrees of freedom,"
            f" {test.years} years, p below {SEASON_LEVEL:g})",
            "see whether the file holds the unadjusted series, and correct what is said of it",
        ),
    )


def shortness(series: Series, window: int, *, pairs: int = LEAST) -> tuple[Finding, ...]:
    """Find whether fewer than `pairs` smoothed growth rates are left at a window."""
    noun = PERIOD_NOUN[series.frequency]
    rates = int(np.isfinite(series.values).sum()) - (series.kind != "rate")
    left = max(0, rates - window + 1)
    if left >= pairs:
        return ()
    return (
        Finding(
            "warning",
            "too short",
            series.name,
            series.first,
            f"with a window of {window} {noun}s, {left} smoothed {noun}s are left of {rates} growth"
            f" rates; {pairs} are needed",
            "take a shorter window, or a file that goes further back",
        ),
    )


def frequency_mix(loaded: Iterable[Series]) -> tuple[Finding, ...]:
    """Find series of another frequency than most of those loaded; one note a frequency."""
    by_frequency: dict[str, list[Series]] = {}
    for one in loaded:
        by_frequency.setdefault(one.frequency, []).append(one)
    if len(by_frequency) < 2:
        return ()
    usual = max(by_frequency, key=lambda key: len(by_frequency[key]))
    found = []
    for frequency, group in by_frequency.items():
        if frequency != usual:
            more = f" and {len(group) - 1} more are" if len(group) > 1 else " is"
            found.append(
                Finding(
                    "note",
                    "mixed frequencies",
                    group[0].name,
                    None,
                    f"{group[0].name}{more} {frequency}, most series are {usual}",
                    "two series of different frequency meet at the lower one, by average or last"
                    " value",
                )
            )
    return tuple(found)


def code_of(finding: Finding) -> str:
    """Return the period of a finding as addresses carry it; empty for the whole series."""
    return "" if finding.period is None else period_code(finding.period)


def _less_month(rate: FloatArray, series: Series) -> FloatArray:
    """Growth less the median of its calendar month, where every month has five values."""
    per_year = PERIODS_PER_YEAR[series.frequency]
    if np.isfinite(rate).sum() < 5 * per_year or per_year == 1:
        return rate - float(np.nanmedian(rate))
    rest = np.array(rate)
    for month in range(per_year):
        values = rate[month::per_year]
        if np.isfinite(values).any():
            rest[month::per_year] -= np.nanmedian(values)
    return rest


def _spread(values: FloatArray) -> float:
    """Return 1.4826 times the median absolute deviation from the median."""
    known = values[np.isfinite(values)]
    return 1.4826 * float(np.median(np.abs(known - np.median(known))))


def _step(values: FloatArray) -> float:
    """Return the power of ten that all values are multiples of, from 1e-10 up; 0 for none."""
    known = values[np.isfinite(values)]
    for decimals in range(-6, 11):
        if np.allclose(known, np.round(known, decimals), rtol=1e-12, atol=0.0):
            return float(10.0**-decimals)
    return 0.0
