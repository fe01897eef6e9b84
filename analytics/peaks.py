"""Peaks of driver and response that meet across a shift."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike

from analytics.series import FloatArray, read_only
from analytics.surface import IntArray, locked


@dataclass(frozen=True, eq=False)
class MatchedPeaks:
    """Result of `matched_peaks`; arrays are read-only.

    Attributes
    ----------
    driver, response : ndarray of int, shape (p,), (q,)
        Places of the peaks in the series given.
    pairs : ndarray of int, shape (m, 2)
        Matched peaks: place in the driver, place in the response; the driver's increasing.
    distance : ndarray of int, shape (m,)
        Periods from the driver's peak to the response's; the shift would be a perfect match.
    height : ndarray of float, shape (m, 2)
        Values at the matched peaks.
    shift, reach : int
        What was asked for.
    prominence : tuple of float
        Fewest units by which a peak of driver and of response stands out.
    by_chance : float
        Share of the places in the response's span that lie within `reach` of one of its peaks: how
        often a driver's peak anywhere would find a peak as near. nan without a span.
    in_span : int
        Peaks of the driver that read the response inside its span.
    """

    driver: IntArray
    response: IntArray
    pairs: IntArray
    distance: IntArray
    height: FloatArray
    shift: int
    reach: int
    prominence: tuple[float, float]
    by_chance: float
    in_span: int


def matched_peaks(
    driver: ArrayLike,
    response: ArrayLike,
    *,
    shift: int,
    reach: int,
    prominence: float = 1.0,
) -> MatchedPeaks:
    """Find the peaks of two smoothed series, and join those that meet across the shift.

    Parameters
    ----------
    driver, response : array_like of float, shape (n,)
        Smoothed growth on the same periods.
    shift : int
        Periods by which the response is read later; above 0 the driver leads.
    reach : int
        Farthest that two matched peaks may be from the shift, 0 or more.
    prominence : float, default 1
        Standard deviations of its own series by which a peak has to stand out.

    Returns
    -------
    MatchedPeaks

    Raises
    ------
    ValueError
        A series is not one-dimensional and finite, lengths differ, or reach or prominence are
        below 0.

    Notes
    -----
    Prominence is the height of a peak above the higher of the two lowest places between it and a
    higher value on either side (`scipy.signal.find_peaks`). A peak of each series and the other's
    nearest one are matched when each is the other's nearest, the shift counted in, and they are
    within reach. Since peaks are looked for near the shift, that they stand near it is no evidence
    for it: `by_chance` says how easily that comes about.

    Examples
    --------
    >>> t = np.arange(240)
    >>> wave = np.sin(2 * np.pi * t / 60)
    >>> matched_peaks(wave, np.roll(wave, 10), shift=8, reach=6).distance
    array([10, 10, 10, 10])
    """
    from scipy.signal import find_peaks

    x, y = np.asarray(driver, dtype=np.float64), np.asarray(response, dtype=np.float64)
    for name, values in (("driver", x), ("response", y)):
        if values.ndim != 1 or not np.isfinite(values).all():
            raise ValueError(f"{name} must be one-dimensional and finite, but is not")
    if x.size != y.size:
        raise ValueError(f"both must have one length, but got {x.size} and {y.size}")
    if reach < 0 or prominence < 0:
        raise ValueError(f"reach and prominence must be 0 or more, but got {reach}, {prominence}")
    least = float(prominence * x.std()), float(prominence * y.std())
    at_x, at_y = (
        find_peaks(values, prominence=stands)[0].astype(np.int64)
        for values, stands in zip((x, y), least, strict=True)
    )
    pairs = np.empty((0, 2), dtype=np.int64)
    if at_x.size and at_y.size:
        away = at_y - (at_x + shift)[:, None]
        nearest_y, nearest_x = np.abs(away).argmin(axis=1), np.abs(away).argmin(axis=0)
        rows = np.arange(at_x.size)
        mutual = nearest_x[nearest_y] == rows
        near = np.abs(away[rows, nearest_y]) <= reach
        chosen = rows[mutual & near]
        pairs = np.column_stack((at_x[chosen], at_y[nearest_y[chosen]]))
    reached = at_x + shift
    return MatchedPeaks(
        driver=locked(at_x),
        response=locked(at_y),
        pairs=locked(pairs),
        distance=locked(pairs[:, 1] - pairs[:, 0]),
        height=read_only(np.column_stack((x[pairs[:, 0]], y[pairs[:, 1]]))),
        shift=shift,
        reach=reach,
        prominence=least,
        by_chance=_covered(at_y, y.size, reach),
        in_span=int(((reached >= 0) & (reached < y.size)).sum()),
    )


def _covered(places: IntArray, size: int, reach: int) -> float:
    if size == 0:
        return float("nan")
    apart = np.abs(np.arange(size)[:, None] - places)
    return float((apart <= reach).any(axis=1).mean()) if places.size else 0.0
