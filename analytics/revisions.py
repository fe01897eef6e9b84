"""Revisions of a series from its vintages: first prints, what became of them, their bias."""

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
import pandas as pd
from numpy.typing import ArrayLike, NDArray

from analytics.readable import Readable
from analytics.series import FloatArray, Series, read_only

MIN_PRINTS = 24
BoolArray = NDArray[np.bool_]
IntArray = NDArray[np.int64]


@dataclass(frozen=True, eq=False)
class Revisions(Readable):
    """Result of `revisions`; every array has shape (n,) and is read-only.

    Attributes
    ----------
    periods : PeriodIndex
        From the first to the last period that any vintage has.
    first : ndarray of float
        Value in the earliest vintage that has one, in the unit of the vintages.
    latest : ndarray of float
        Value in the newest vintage that has one.
    revision : ndarray of float
        ``latest - first``; nan where no vintage has a value.
    held : ndarray of int
        Vintages that have a value for the period.
    first_print : ndarray of bool
        Whether `first` is a first print: the newest period of the vintage it first stands in.
        The history that comes along with a vintage had been printed before.
    counted : ndarray of bool
        First prints that a later vintage has as well, and that could therefore be revised.
    mean, mean_absolute : float
        Mean and mean absolute revision of the counted first prints; nan where there is none.
    """

    periods: pd.PeriodIndex
    first: FloatArray
    latest: FloatArray
    revision: FloatArray
    held: IntArray
    first_print: BoolArray
    counted: BoolArray
    mean: float
    mean_absolute: float

    def __repr__(self) -> str:
        return (
            f"Revisions({self.periods.size} periods, {self.n} first prints counted,"
            f" mean {self.mean:.4g}, mean absolute {self.mean_absolute:.4g})"
        )

    @property
    def n(self) -> int:
        """Number of first prints counted."""
        return int(self.counted.sum())


def revisions(vintages: Sequence[Series]) -> Revisions:
    """First print, latest value and revision of every period, from the vintages of a series.

    Parameters
    ----------
    vintages : sequence of Series
        Oldest first, of one calendar and one unit. For revisions of growth give growth rates:
        they are not moved by a re-referencing of the index.

    Returns
    -------
    Revisions

    Raises
    ------
    ValueError
        Fewer than two vintages, or calendars that differ.

    Examples
    --------
    >>> march = Series("Prices", pd.Period("2024-01", "M"), [1.0, 2.0, 3.0], kind="rate")
    >>> april = Series("Prices", pd.Period("2024-01", "M"), [1.0, 2.5, 3.5, 4.0], kind="rate")
    >>> found = revisions([march, april])
    >>> found.revision.tolist(), found.counted.tolist()
    ([0.0, 0.5, 0.5, 0.0], [False, False, True, False])
    """
    if len(vintages) < 2:
        raise ValueError(f"vintages must be two or more, but got {len(vintages)}")
    calendars = sorted({one.frequency for one in vintages})
    if len(calendars) > 1:
        raise ValueError(f"vintages must have one calendar, but got {' and '.join(calendars)}")
    start = min(one.first for one in vintages)
    size = max(one.last for one in vintages).ordinal - start.ordinal + 1
    table = np.full((len(vintages), size), np.nan)
    for row, one in zip(table, vintages, strict=True):
        place = one.first.ordinal - start.ordinal
        row[place : place + one.values.size] = one.values
    there = ~np.isnan(table)
    held = there.sum(axis=0)
    earliest = there.argmax(axis=0)
    newest = len(vintages) - 1 - there[::-1].argmax(axis=0)
    columns = np.arange(size)
    first, latest = table[earliest, columns], table[newest, columns]
    ends = np.array([one.last.ordinal - start.ordinal for one in vintages])
    first_print = (held > 0) & (ends[earliest] == columns)
    counted = first_print & (newest > earliest)
    revision = latest - first
    chosen = revision[counted]
    return Revisions(
        periods=pd.period_range(start, periods=size),
        first=read_only(first),
        latest=read_only(latest),
        revision=read_only(revision),
        held=_locked(held),
        first_print=_locked(first_print),
        counted=_locked(counted),
        mean=float(chosen.mean()) if chosen.size else float("nan"),
        mean_absolute=float(np.abs(chosen).mean()) if chosen.size else float("nan"),
    )


@dataclass(frozen=True)
class BiasTest(Readable):
    """Result of `bias_test`: the line through revisions over first prints, and the joint test.

    Attributes
    ----------
    intercept, slope : float
        Least squares; both 0 where first prints are unbiased and no better forecast of the latest
        value can be made from them. In the unit of the series, and without unit.
    se_intercept, se_slope : float
        Newey-West standard errors.
    statistic : float
        F of intercept = slope = 0, with 2 and ``n - 2`` degrees of freedom.
    p : float
        Its p-value, 0 to 1.
    lags : int
        Lags of the Bartlett kernel.
    n : int
        First prints.
    """

    intercept: float
    slope: float
    se_intercept: float
    se_slope: float
    statistic: float
    p: float
    lags: int
    n: int


def bias_test(first: ArrayLike, revision: ArrayLike) -> BiasTest:
    """Whether first prints are biased: revisions regressed on them with a constant.

    Parameters
    ----------
    first, revision : array_like of float, shape (n,)
        First prints in the order of their periods and what was added to them later, n >= 24.

    Returns
    -------
    BiasTest

    Raises
    ------
    ValueError
        Too few first prints, or first prints or revisions that do not vary.

    Notes
    -----
    The regression of Mincer and Zarnowitz [1]_, ``latest = a + b first + u`` with a = 0 and b = 1
    under no bias, written for ``latest - first``. Errors are those of Newey and West [2]_ with
    ``floor(4 (n / 100)^(2/9))`` lags, multiplied by n / (n - 2). With few first prints the test
    rejects unbiased ones too often: at 5 %, 16 % with 24 of them, 13 % with 36, 8 % with 60 and
    6 % with 120 (own measurement, 300 draws each, independent normal revisions).

    References
    ----------
    .. [1] Mincer and Zarnowitz (1969), The Evaluation of Economic Forecasts, in Economic Forecasts
       and Expectations, National Bureau of Economic Research.
    .. [2] Newey and West (1987), Econometrica 55, 703-708; the lags as in Newey and West (1994),
       Review of Economic Studies 61, 631-653.
    """
    print_, change = (np.asarray(side, dtype=np.float64) for side in (first, revision))
    if print_.shape != change.shape or print_.ndim != 1:
        raise ValueError(
            "first and revision must have the same length, but got shapes"
            f" {print_.shape} and {change.shape}"
        )
    n = int(print_.size)
    if n < MIN_PRINTS:
        raise ValueError(
            f"a test of bias must have at least {MIN_PRINTS} first prints, but got {n}"
        )
    for name, side in (("first prints", print_), ("revisions", change)):
        if not np.isfinite(side).all():
            raise ValueError(f"{name} must be finite, but got one that is not")
        if np.ptp(side) <= 1e-12 * np.abs(side).max():
            raise ValueError(f"{name} must vary for a test of bias, but all are {side[0]:g}")
    from statsmodels.regression.linear_model import OLS

    lags = int(4 * (n / 100) ** (2 / 9))
    design = np.column_stack([np.ones(n), print_])
    fitted = OLS(change, design).fit(
        cov_type="HAC", cov_kwds={"maxlags": lags, "use_correction": True}, use_t=True
    )
    if float(np.abs(fitted.resid).max()) <= 1e-12 * float(np.abs(change).max()):
        raise ValueError("revisions must vary about their line for a test of bias, but do not")
    joint = fitted.wald_test(np.eye(2), use_f=True, scalar=True)
    return BiasTest(
        intercept=float(fitted.params[0]),
        slope=float(fitted.params[1]),
        se_intercept=float(fitted.bse[0]),
        se_slope=float(fitted.bse[1]),
        statistic=float(joint.statistic),
        p=float(joint.pvalue),
        lags=lags,
        n=n,
    )


def _locked(array: NDArray[Any]) -> NDArray[Any]:
    array.flags.writeable = False
    return array
