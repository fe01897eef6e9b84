"""A test for a season in growth rates, for series that are said to be adjusted."""

from dataclasses import dataclass

import numpy as np
from scipy.special import chdtrc

from analytics.series import PERIODS_PER_YEAR, FloatArray, Series


def log_growth(series: Series) -> FloatArray | None:
    """Log growth in percent; None for a rate, or where a value is not positive."""
    known = series.values[np.isfinite(series.values)]
    if series.kind == "rate" or (known <= 0).any() or series.values.size < 2:
        return None
    return 100.0 * np.diff(np.log(series.values))


@dataclass(frozen=True)
class SeasonTest:
    """Friedman's statistic for a stable season.

    Attributes
    ----------
    statistic, pvalue : float
        The p-value is that of a chi-square with `places` - 1 degrees of freedom.
    years, places : int
        Blocks of twelve months or four quarters, and periods in each.
    """

    statistic: float
    pvalue: float
    years: int
    places: int


def season_test(series: Series) -> SeasonTest:
    """Test growth rates for a season that stays the same from year to year.

    Parameters
    ----------
    series : Series
        Monthly or quarterly, without a gap in the years used. Of an index or level the log growth
        is tested, of a rate the rate.

    Returns
    -------
    SeasonTest
        The p-value is that of a chi-square with `places` - 1 degrees of freedom.

    Raises
    ------
    ValueError
        The series is annual, has a value that has no log, or has fewer than five whole years.

    Notes
    -----
    The centred 2 x 12 mean (2 x 4 for quarters) is taken out first, as the trend is in the X-11
    method; then Friedman's (1937) two-way analysis of variance by ranks, years as blocks. As tests
    for stable seasonality such rank tests are in use since Lothian and Morry (1978), there with
    Kruskal and Wallis's, which does not take out what years have in common.
    """
    per_year = PERIODS_PER_YEAR[series.frequency]
    rate = series.values if series.kind == "rate" else log_growth(series)
    if per_year == 1 or rate is None:
        raise ValueError(
            f"a season must be looked for in positive months or quarters, but {series.name!r}"
            f" is {series.frequency} or has a value of zero or below"
        )
    half = per_year // 2
    weights = np.r_[0.5, np.ones(per_year - 1), 0.5] / per_year
    years = 0
    if rate.size > 2 * half:
        windows = np.lib.stride_tricks.sliding_window_view(rate, per_year + 1)
        detrended = rate[half:-half] - windows @ weights
        years = detrended.size // per_year
    if years > 0:
        table = detrended[: years * per_year].reshape(years, per_year)
        table = table[np.isfinite(table).all(axis=1)]
        years = table.shape[0]
    if years < 5:
        raise ValueError(
            f"a season must be looked for in at least 5 whole years, but {series.name!r} leaves"
            f" {max(years, 0)}"
        )
    statistic = _friedman(table)
    return SeasonTest(statistic, float(chdtrc(per_year - 1, statistic)), years, per_year)


def _friedman(table: FloatArray) -> float:
    """Friedman's statistic of a table, rows as blocks, with the correction for ties."""
    less = (table[:, :, None] > table[:, None, :]).sum(axis=2)
    equal = (table[:, :, None] == table[:, None, :]).sum(axis=2)
    ranks = less + (equal + 1) / 2.0
    blocks, places = table.shape
    between = blocks * ((ranks.mean(axis=0) - (places + 1) / 2.0) ** 2).sum()
    within = ((ranks - (places + 1) / 2.0) ** 2).sum() / (blocks * (places - 1))
    return float(between / within) if within else 0.0
