"""Which pair a page opens with when the address names none."""

import re
from collections.abc import Mapping

from analytics.series import PERIODS_PER_YEAR, Series
from app.state import ViewState

_MONEY = re.compile(r"money|\bm[0-4]\b", re.IGNORECASE)
_PRICES = re.compile(r"price|\bh?icp\b|\bcpi", re.IGNORECASE)


def opening_state(loaded: Mapping[str, Series]) -> ViewState:
    """Return the view to open with: the usual pair if it is loaded, else the first that fits.

    A name that sounds like prices is preferred as response, one that sounds like money as driver;
    both have the same calendar. Window and shift are one and two years.
    """
    usual = ViewState()
    if (usual.driver in loaded and usual.response in loaded) or not loaded:
        return usual
    names = list(loaded)
    response = next((n for n in names if _PRICES.search(n) and not _MONEY.search(n)), None)
    others = [
        n
        for n in names
        if n != response and (response is None or loaded[n].frequency == loaded[response].frequency)
    ]
    driver = next((n for n in others if _MONEY.search(n)), next(iter(others), names[0]))
    if response is None:
        year_of = loaded[driver].frequency
        response = next(
            (n for n in names if n != driver and loaded[n].frequency == year_of), driver
        )
    year = PERIODS_PER_YEAR[loaded[driver].frequency]
    return ViewState(driver=driver, response=response, window=year, shift=2 * year)
