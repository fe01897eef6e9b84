"""How often intervals of a rule held, had they been drawn at each past date."""

import numpy as np
from numpy.typing import ArrayLike
from scipy.special import stdtrit

from analytics.backtest import known_spread
from analytics.forecast_tests import Coverage, interval_coverage
from analytics.intervals import LEVELS


def past_coverage(
    errors: ArrayLike, *, levels: tuple[float, ...] = LEVELS
) -> tuple[tuple[Coverage, ...], ...]:
    """Coverage of intervals made at each past date from the errors known at that date.

    Parameters
    ----------
    errors : array_like of float, shape (O, H)
        Outcome less forecast, as of `analytics.path_intervals.relation_errors`: oldest date first,
        horizon h in column h - 1, nan where not known.
    levels : tuple of float
        L nominal levels.

    Returns
    -------
    tuple of tuple of Coverage
        ``[l][h - 1]``, over every h-th date back from the newest, which do not overlap. A date
        that knew fewer than 12 errors has no interval and is left out.

    Raises
    ------
    ValueError
        The errors are not a table, or a level is not between 0 and 1.

    Examples
    --------
    >>> errors = np.random.default_rng(1).standard_normal((500, 1))
    >>> [f"{row[0].hits} of {row[0].n}" for row in past_coverage(errors)]
    ['246 of 488', '393 of 488', '462 of 488']
    """
    missed = np.asarray(errors, dtype=np.float64)
    if missed.ndim != 2:
        raise ValueError(f"errors must be a table of dates by horizons, but got {missed.shape}")
    (scale,), (freedom,) = known_spread(missed[None])
    found = []
    for level in levels:
        half = scale * stdtrit(freedom, 0.5 + level / 2.0)
        row = []
        for place in range(missed.shape[1]):
            judged = ~np.isnan(half[:, place]) & ~np.isnan(missed[:, place])
            inside = np.abs(missed[judged, place]) <= half[judged, place]
            row.append(interval_coverage(inside[:: -(place + 1)][::-1], level))
        found.append(tuple(row))
    return tuple(found)
