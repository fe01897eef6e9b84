"""From a table of pandas to a `Series`, and contributions as a table."""

from collections.abc import Sequence
from typing import Any

import numpy as np
import pandas as pd

from analytics.breadth import contributions
from analytics.series import Frequency, Series, series_from_periods
from analytics.weights import ChainedBasket

_CALENDAR: dict[Frequency, str] = {"monthly": "M", "quarterly": "Q", "annual": "Y"}


def series_from_pandas(
    column: "pd.Series[Any]", *, frequency: Frequency = "monthly", **attributes: str
) -> Series:
    """Return a column of a table as a `Series`; its index says the periods.

    Parameters
    ----------
    column : pandas.Series
        Numbers, on periods, dates, or texts such as ``2024-03``, ``2024Q1`` or ``2024``; the name
        is kept. Periods that are left out become nan.
    frequency : {"monthly", "quarterly", "annual"}
        Calendar that the index is read in.
    **attributes : str
        `kind`, `unit`, `adjustment`, `source` of the `Series`.

    Raises
    ------
    ValueError
        A period cannot be read, stands twice or out of order, or there is no number.

    Examples
    --------
    >>> table = pd.DataFrame({"Prices": [100.0, 101.0]}, index=["2024-01", "2024-02"])
    >>> series_from_pandas(table["Prices"], unit="2015 = 100")
    Series('Prices', monthly index, Jan 2024 to Feb 2024, 2 values)
    """
    if frequency not in _CALENDAR:
        raise ValueError(
            f"frequency must be one of {', '.join(_CALENDAR)}, but got {str(frequency)!r}"
        )
    try:
        index = column.index
        if isinstance(index, pd.DatetimeIndex):
            periods = index.to_period(_CALENDAR[frequency])
        elif isinstance(index, pd.PeriodIndex):
            periods = index.asfreq(_CALENDAR[frequency])
        else:
            periods = pd.PeriodIndex([str(each) for each in index], freq=_CALENDAR[frequency])
    except ValueError as error:
        raise ValueError(
            f"the index of {str(column.name)!r} must hold {frequency} periods, but {error}"
        ) from error
    values = np.asarray(column, dtype=np.float64)
    return series_from_periods(str(column.name), periods, values, **attributes)


def contribution_frame(
    basket: ChainedBasket,
    span: int,
    *,
    names: Sequence[str] = (),
    periods: pd.PeriodIndex | None = None,
) -> pd.DataFrame:
    """Contributions in percentage points as a table: a row a period, a column a component.

    Parameters
    ----------
    basket : ChainedBasket
        Components and total.
    span : int
        Periods over which the rate is taken.
    names : sequence of str, length K, optional
        Components; counted from 1 where there are none.
    periods : PeriodIndex, shape (n,), optional
        Rows; counted from 0 where there are none.

    Returns
    -------
    DataFrame
        With a last column ``total``, the rate that each row adds up to.

    Raises
    ------
    ValueError
        There are not as many names as components, or not as many periods as rows.
    """
    points = contributions(basket, span)
    columns = list(names) or [f"component {i + 1}" for i in range(points.shape[1])]
    if len(columns) != points.shape[1]:
        raise ValueError(
            f"names must be {points.shape[1]}, a component each, but got {len(columns)}"
        )
    if periods is not None and len(periods) != points.shape[0]:
        raise ValueError(f"periods must be {points.shape[0]}, a row each, but got {len(periods)}")
    frame = pd.DataFrame(points, columns=columns, index=periods)
    frame["total"] = points.sum(axis=1)
    return frame
