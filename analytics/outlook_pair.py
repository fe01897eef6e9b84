"""Driver and response on one calendar, each up to its own last period."""

from dataclasses import dataclass

import pandas as pd

from analytics.series import PERIOD_NOUN, Series, align, period_label


@dataclass(frozen=True, eq=False)
class OutlookPair:
    """Result of `outlook_pair`.

    Attributes
    ----------
    driver, response : Series
        Same calendar and first period, no gaps; each ends where it ends.
    """

    driver: Series
    response: Series

    @property
    def lead(self) -> int:
        """Periods by which the driver is known beyond the response; below 0 where it ends first."""
        return int(self.driver.last.ordinal - self.response.last.ordinal)

    @property
    def origin(self) -> pd.Period:
        """Last period of the response: the path starts after it."""
        return self.response.last

    def ahead(self, count: int) -> pd.PeriodIndex:
        """Return the `count` periods after the last one of the response."""
        return pd.period_range(self.origin + 1, periods=count)

    @property
    def note(self) -> str:
        """Say that the driver ends before the response, or nothing."""
        if self.lead >= 0:
            return ""
        noun = PERIOD_NOUN[self.driver.frequency]
        late = f"{-self.lead} {noun}{'s' if self.lead < -1 else ''}"
        return (
            f"{self.driver.name!r} ends in {period_label(self.driver.last)}, {late} before"
            f" {self.response.name!r}, so the path is {late} shorter than the shift"
        )


def outlook_pair(driver: Series, response: Series) -> OutlookPair:
    """Let two series begin in the same period and keep each one's own end.

    Parameters
    ----------
    driver, response : Series
        Growth rates or rates, of one frequency.

    Raises
    ------
    ValueError
        The calendars differ, the series do not overlap, or one has a gap after the common start.

    Examples
    --------
    >>> money = Series("Money", pd.Period("2024-01", "M"), [1.0, 2.0, 3.0])
    >>> prices = Series("Prices", pd.Period("2023-12", "M"), [5.0, 6.0, 7.0])
    >>> outlook_pair(money, prices).lead
    1
    """
    common = align(driver, response)
    sides = []
    for series in (driver, response):
        part = series.between(common.driver.first, None)
        if part.gaps.size:
            noun = PERIOD_NOUN[series.frequency]
            raise ValueError(
                f"{series.name!r} must have a value in every {noun} to its end, but"
                f" {period_label(part.gaps[0])} is missing"
            )
        sides.append(part)
    return OutlookPair(*sides)


def break_in_path(
    pair: OutlookPair, *, window: int, shift: int, breaks: list[pd.Period]
) -> pd.Period | None:
    """Return the newest break of the driver inside the periods that the path rests on, if any.

    Parameters
    ----------
    pair : OutlookPair
        Driver and response.
    window, shift : int
        The cell.
    breaks : list of pandas.Period
        First periods of new definitions of the driver.

    Returns
    -------
    pandas.Period or None
        The path's windows begin ``shift + window - 2`` periods before the response's last one.
    """
    first = pair.origin - (shift + window - 2)
    inside = [period for period in breaks if first <= period <= pair.driver.last]
    return max(inside, default=None)
