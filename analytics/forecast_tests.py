"""How good forecasts were, and whether that could be chance."""

from dataclasses import dataclass
from typing import Literal

import numpy as np
from numpy.typing import ArrayLike
from scipy.special import chdtrc, chdtri, stdtr, xlogy

from analytics.series import FloatArray

Kernel = Literal["rectangular", "bartlett"]


@dataclass(frozen=True, eq=False)
class DieboldMariano:
    """Result of `diebold_mariano`.

    Attributes
    ----------
    statistic : float
        Below 0 where the first forecast was the better one; with the small-sample factor.
    p : float
        Two-sided, on Student's t with n - 1 degrees of freedom.
    p_better : float
        One-sided: of a statistic this low if the first forecast were no better.
    factor : float
        Small-sample factor of Harvey, Leybourne and Newbold that is in the statistic.
    n : int
        Pairs of errors.
    kernel : {"rectangular", "bartlett"}
        That of the long-run variance; Bartlett's where the rectangular one gave none.
    """

    statistic: float
    p: float
    p_better: float
    factor: float
    n: int
    kernel: Kernel


@dataclass(frozen=True, eq=False)
class Coverage:
    """Result of `interval_coverage`: how often outcomes fell inside, and two tests of it.

    Attributes
    ----------
    n, hits : int
        Outcomes, and those inside.
    share : float
        hits / n; nan without outcomes.
    low, high : float
        Wilson's 95 % interval of the share, as if hits were independent.
    kupiec, p_kupiec : float
        Likelihood ratio of the nominal rate of misses, and its p on chi-square(1).
    christoffersen, p_christoffersen : float
        Likelihood ratio of independent misses against a first-order chain, and its p.
    p_both : float
        p of the two together on chi-square(2).
    """

    n: int
    hits: int
    share: float
    low: float
    high: float
    kupiec: float
    p_kupiec: float
    christoffersen: float
    p_christoffersen: float
    p_both: float


def small_sample_factor(n: int, horizon: int) -> float:
    """Factor of Harvey, Leybourne and Newbold (1997) for n forecasts `horizon` periods ahead."""
    inner = (n + 1 - 2 * horizon + horizon * (horizon - 1) / n) / n
    return float(np.sqrt(max(0.0, inner)))


def diebold_mariano(
    loss: ArrayLike,
    benchmark_loss: ArrayLike,
    *,
    horizon: int = 1,
    lags: int | None = None,
    kernel: Kernel = "rectangular",
) -> DieboldMariano:
    """Test equal accuracy of two forecasts by the mean of their loss difference.

    Parameters
    ----------
    loss, benchmark_loss : array_like of float, shape (n,)
        For example squared errors, in the order of time.
    horizon : int, default 1
        Periods ahead.
    lags : int, optional
        Autocovariances in the variance of the mean; by default horizon - 1.
    kernel : {"rectangular", "bartlett"}, default "rectangular"
        Their weights: 1, or 1 - k / (lags + 1).

    Returns
    -------
    DieboldMariano
        All nan where fewer than 2 losses are left, or no fewer than `horizon` allows, or the two
        never differ.

    Raises
    ------
    ValueError
        Lengths differ, a loss is not finite, or horizon or lags are too small.

    Notes
    -----
    Diebold and Mariano (1995), Journal of Business and Economic Statistics 13, with the factor of
    Harvey, Leybourne and Newbold (1997), International Journal of Forecasting 13. Errors of
    forecasts h periods ahead overlap in h - 1 periods, hence the lags. The rectangular variance can
    come out negative; Bartlett's, which cannot, then takes its place. Of pairs equally good, 1,000
    a case, p is at most .05 in 5 to 6 % at 600 errors and up to 24 periods ahead, in 7 to 10 % at
    300 and 12 to 36 ahead, in 8 to 13 % at 120 (tests/bench/calibration_outlook.py): over long
    horizons and short records it finds too much.
    """
    a, b = np.asarray(loss, dtype=np.float64), np.asarray(benchmark_loss, dtype=np.float64)
    if a.shape != b.shape or a.ndim != 1:
        raise ValueError(f"losses must have one length, but got {a.shape} and {b.shape}")
    if not (np.isfinite(a).all() and np.isfinite(b).all()):
        raise ValueError("losses must be finite, but got a gap")
    reach = horizon - 1 if lags is None else lags
    if horizon < 1 or reach < 0:
        raise ValueError(f"horizon must be 1 and lags 0 or more, but got {horizon} and {reach}")
    n = a.size
    nothing = DieboldMariano(np.nan, np.nan, np.nan, np.nan, n, kernel)
    if n < 2 or n <= reach:
        return nothing
    factor = small_sample_factor(n, horizon)
    difference = a - b
    mean = float(difference.mean())
    away = difference - mean
    covariances = np.array([away[k:] @ away[: n - k] for k in range(reach + 1)]) / n
    falling = 1.0 - np.arange(reach + 1) / (reach + 1)
    weights = falling if kernel == "bartlett" else np.ones(reach + 1)
    variance = float(2.0 * weights @ covariances - covariances[0])
    used = kernel
    if variance <= 1e-12 * covariances[0]:
        variance = float(2.0 * falling @ covariances - covariances[0])
        used = "bartlett"
    if variance <= 0.0 or factor == 0.0:
        return nothing
    statistic = factor * mean / np.sqrt(variance / n)
    return DieboldMariano(
        statistic=float(statistic),
        p=float(2.0 * stdtr(n - 1, -abs(statistic))),
        p_better=float(stdtr(n - 1, statistic)),
        factor=factor,
        n=n,
        kernel=used,
    )


def theil_u2(forecast: ArrayLike, actual: ArrayLike, previous: ArrayLike) -> float:
    """Theil's U2: 0 for perfect forecasts, 1 for those that repeat the last value.

    Parameters
    ----------
    forecast, actual, previous : array_like of float, shape (n,)
        What was forecast, what came, and the value last seen when it was forecast.

    Returns
    -------
    float
        ``sqrt(sum(((f - y) / p)^2) / sum(((y - p) / p)^2))`` (Theil 1966; from memory); nan where a
        previous value is zero or nothing ever changed. Values near zero weigh enormously.
    """
    f, y, p = (np.asarray(v, dtype=np.float64) for v in (forecast, actual, previous))
    if f.size == 0 or (p == 0.0).any():
        return np.nan
    change = float((((y - p) / p) ** 2).sum())
    return float(np.sqrt((((f - y) / p) ** 2).sum() / change)) if change > 0.0 else np.nan


def kupiec(misses: int, n: int, rate: float) -> tuple[float, float]:
    """Likelihood ratio of a rate of misses against the share seen, and its p on chi-square(1).

    Kupiec (1995), Journal of Derivatives 3, proportion of failures.
    """
    if not 0 <= misses <= n or not 0.0 < rate < 1.0:
        raise ValueError(f"misses must be from 0 to n and the rate inside 0 and 1, got {misses}")
    if n == 0:
        return np.nan, np.nan
    share = misses / n
    seen = float(xlogy(misses, share) + xlogy(n - misses, 1.0 - share))
    asked = float(xlogy(misses, rate) + xlogy(n - misses, 1.0 - rate))
    ratio = max(0.0, 2.0 * (seen - asked))
    return ratio, float(chdtrc(1, ratio))


def christoffersen(counts: ArrayLike) -> tuple[float, float]:
    """Likelihood ratio of independence in a table of transitions, and its p on chi-square(1).

    Parameters
    ----------
    counts : array_like of int, shape (2, 2)
        Row: inside or missed; column: the next one inside or missed.

    Notes
    -----
    Christoffersen (1998), International Economic Review 39. Without any miss the ratio is 0.
    """
    table = np.asarray(counts, dtype=np.float64)
    if table.shape != (2, 2) or (table < 0).any():
        raise ValueError(f"counts must be a table of 2 by 2, but got shape {table.shape}")
    rows, columns, total = table.sum(axis=1), table.sum(axis=0), table.sum()
    if total == 0:
        return np.nan, np.nan
    free = float(xlogy(table, table).sum() - xlogy(rows, rows).sum())
    tied = float(xlogy(columns, columns).sum() - xlogy(total, total))
    ratio = max(0.0, 2.0 * (free - tied))
    return ratio, float(chdtrc(1, ratio))


def wilson(hits: int, n: int, level: float = 0.95) -> tuple[float, float]:
    """Wilson's (1927) interval of a share; (nan, nan) without trials."""
    if n == 0:
        return np.nan, np.nan
    z2 = float(chdtri(1, 1.0 - level))
    share = hits / n
    centre = (share + z2 / (2 * n)) / (1 + z2 / n)
    half = np.sqrt(z2 * (share * (1 - share) / n + z2 / (4 * n * n))) / (1 + z2 / n)
    return max(0.0, float(centre - half)), min(1.0, float(centre + half))


def interval_coverage(inside: ArrayLike, level: float) -> Coverage:
    """Share of outcomes inside intervals of a level, with the tests of Kupiec and Christoffersen.

    Parameters
    ----------
    inside : array_like of bool, shape (n,)
        In the order of time, and not overlapping: give every h-th forecast at horizon h.
    level : float
        Nominal share inside, above 0 and below 1.

    Returns
    -------
    Coverage

    Raises
    ------
    ValueError
        The level is not between 0 and 1.
    """
    if not 0.0 < level < 1.0:
        raise ValueError(f"level must be above 0 and below 1, but got {level}")
    hit = np.asarray(inside, dtype=bool)
    n, hits = int(hit.size), int(hit.sum())
    ratio, p = kupiec(n - hits, n, 1.0 - level)
    missed = (~hit).astype(np.int64)
    table = np.bincount(2 * missed[:-1] + missed[1:], minlength=4).reshape(2, 2)
    chain, p_chain = christoffersen(table)
    both = float(chdtrc(2, ratio + chain)) if n > 1 else np.nan
    low, high = wilson(hits, n)
    return Coverage(
        n=n,
        hits=hits,
        share=hits / n if n else np.nan,
        low=low,
        high=high,
        kupiec=ratio,
        p_kupiec=p,
        christoffersen=chain,
        p_christoffersen=p_chain,
        p_both=both,
    )


def root_mean_square(errors: FloatArray) -> float:
    """Root of the mean square of the errors that are not nan; nan where there are none."""
    known = errors[~np.isnan(errors)]
    return float(np.sqrt(np.mean(known**2))) if known.size else np.nan
