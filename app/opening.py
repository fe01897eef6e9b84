"""Which pair a page opens with when the address names none."""

import re
from collections import Counter
from collections.abc import Mapping

from analytics.series import PERIODS_PER_YEAR, Series
from app.state import ViewState

_MONEY = re.compile(r"money|\bm[0-4]\b", re.IGNORECASE)
_PRICES = re.compile(r"price|\bh?icp\b|\bcpi", re.IGNORECASE)


def sounds_like(name: str) -> str:
    """Return money or prices where a series' name says so, else nothing."""
    if _MONEY.search(name):
        return "money"
    return "prices" if _PRICES.search(name) else ""


def opening_state(loaded: Mapping[str, Series]) -> ViewState:
    """Return the view to open with: the usual pair if it is loaded, else the first that fits.

    A name that sounds like prices is preferred as response, one that sounds like money as driver;
    both have the same calendar. Window and shift are one and two years.
    """
    usual = ViewState()
    if (usual.driver in loaded and usual.response in loaded) or not loaded:
        return usual
    calendars = {name: series.frequency for name, series in loaded.items()}
    many = Counter(calendars.values())
    paired = [n for n, calendar in calendars.items() if many[calendar] > 1] or list(loaded)
    prices = [n for n in paired if sounds_like(n) == "prices"]
    money = [n for n in paired if sounds_like(n) == "money"]
    if prices:
        response = prices[0]
        partners = _partners(response, loaded) or [n for n in loaded if n != response] or [response]
        driver = next((n for n in partners if n in money), partners[0])
    else:
        driver = (money or paired)[0]
        response = next(iter(_partners(driver, loaded)), driver)
    year = PERIODS_PER_YEAR[loaded[driver].frequency]
    return ViewState(driver=driver, response=response, window=year, shift=2 * year)


def _partners(name: str, loaded: Mapping[str, Series]) -> list[str]:
    """Names of the other series of the same calendar."""
    calendar = loaded[name].frequency
    return [n for n, series in loaded.items() if n != name and series.frequency == calendar]
