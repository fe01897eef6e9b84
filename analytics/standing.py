"""Where a print stands in its own history: percentile rank, now and as it would have read then."""

from dataclasses import dataclass
from typing import Literal, get_args

import numpy as np
from numpy.typing import ArrayLike

from analytics.readable import Readable
from analytics.series import FloatArray, Series, read_only

RankKind = Literal["mean", "weak", "strict"]


@dataclass(frozen=True, eq=False)
class Standing(Readable):
    """Result of `standing`.

    Attributes
    ----------
    value : float
        The reading that is ranked.
    kind : {"mean", "weak", "strict"}
        Definition of the rank.
    rank : float
        0 to 100.
    below, equal, above : int
        How many of the values are below, equal to and above the reading.
    values : ndarray of float, shape (n,), read-only
        What it was compared with, ascending.
    """

    value: float
    kind: RankKind
    rank: float
    below: int
    equal: int
    above: int
    values: FloatArray

    @property
    def n(self) -> int:
        """Number of values compared with."""
        return int(self.values.size)


def standing(values: ArrayLike, value: float, *, kind: RankKind = "mean") -> Standing:
    """Percentile rank of a reading among values.

    Parameters
    ----------
    values : array_like of float, shape (n,)
        History; nan is left out. Whether the reading itself is among them is the caller's choice.
    value : float
        The reading.
    kind : {"mean", "weak", "strict"}
        Share of values at or below the reading ("weak"), below it ("strict"), or the mean of the
        two ("mean").

    Returns
    -------
    Standing

    Raises
    ------
    ValueError
        No value is left, the reading is nan, or the kind is unknown.

    Examples
    --------
    >>> [standing([1, 2, 3, 3, 4], 3, kind=kind).rank for kind in ("strict", "weak", "mean")]
    [40.0, 80.0, 60.0]
    """
    if kind not in get_args(RankKind):
        raise ValueError(f"kind must be one of {', '.join(get_args(RankKind))}, but got {kind!r}")
    array = np.asarray(values, dtype=np.float64).ravel()
    array = np.sort(array[~np.isnan(array)])
    if array.size == 0:
        raise ValueError("values must hold at least one number to rank among, but there is none")
    if np.isnan(value):
        raise ValueError("value must be a number to have a rank, but got nan")
    below = int(np.searchsorted(array, value, side="left"))
    upto = int(np.searchsorted(array, value, side="right"))
    return Standing(
        float(value),
        kind,
        _rank(below, upto, array.size, kind),
        below,
        upto - below,
        array.size - upto,
        read_only(array),
    )


def rank_through_time(
    rate: Series, *, kind: RankKind = "mean", window: int | None = None, fewest: int = 24
) -> Series:
    """Rank of each reading among the readings that were there when it came out.

    Parameters
    ----------
    rate : Series
        Readings, one a period; nan in gaps.
    kind : {"mean", "weak", "strict"}
        Definition of the rank.
    window : int, optional
        Compare with the last `window` periods only, the reading among them; by default with
        everything from the first period on.
    fewest : int, default 24
        Readings that there must be, the newest included, for a rank.

    Returns
    -------
    Series
        Of kind "rate", unit "percentile rank"; nan in gaps.

    Raises
    ------
    ValueError
        Fewer than `fewest` readings, a window below `fewest`, or an unknown kind.
    """
    if kind not in get_args(RankKind):
        raise ValueError(f"kind must be one of {', '.join(get_args(RankKind))}, but got {kind!r}")
    if window is not None and window < fewest:
        raise ValueError(f"window must be {fewest} or more, but got {window}")
    values = rate.values
    ranks = np.full(values.size, np.nan)
    for place in np.flatnonzero(~np.isnan(values)):
        start = 0 if window is None else max(0, place + 1 - window)
        known = values[start : place + 1]
        there = int(np.count_nonzero(~np.isnan(known)))
        if there >= fewest:
            below = int(np.count_nonzero(known < values[place]))
            upto = int(np.count_nonzero(known <= values[place]))
            ranks[place] = _rank(below, upto, there, kind)
    if np.isnan(ranks).all():
        raise ValueError(
            f"{rate.name!r} must have {fewest} readings for a rank through time, but has"
            f" {np.count_nonzero(~np.isnan(values))}"
        )
    return Series(rate.name, rate.first, ranks, kind="rate", unit="percentile rank")


def _rank(below: int, upto: int, n: int, kind: RankKind) -> float:
    counted = {"strict": 2 * below, "weak": 2 * upto, "mean": below + upto}[kind]
    return 50.0 * counted / n
