"""Small workspaces for the checks of the Outlook page: releases that follow each other."""

import numpy as np
import pandas as pd

from analytics.series import Series
from app.intake.reading import Release
from app.workspace import Workspace

LAG, SLOPE = 6, 0.5
QUICK = "window=3&shift=6&windows=1%3A6&shifts=1%3A12&cells=kept"


def economy(n=150, *, seed=3, first="2008-01"):
    """Money and prices as index levels; prices follow `LAG` months later."""
    rng = np.random.default_rng(seed)
    noise = rng.standard_normal(n + LAG)
    money = 0.5 + np.convolve(noise, np.ones(4) / 2, mode="same")
    growth = 0.2 + SLOPE * (money[:-LAG] - 0.5) + 0.15 * rng.standard_normal(n)
    level = [100 * np.exp(np.cumsum(rates) / 100) for rates in (money[LAG:], growth)]
    start = pd.Period(first, "M")
    return (
        Series("Money", start, level[0], "level", "millions", source="bank.csv"),
        Series("Prices", start, level[1], "index", "2015 = 100", source="office.csv"),
    )


def release(n, *, of=150, revised=0.0, name="release.csv"):
    """The economy as a file of its first `n` months; `revised` moves all of them a little."""
    money, prices = economy(of)
    shaken = prices.values[:n] * (1 + revised * np.cos(np.arange(n)))
    return Release(
        name,
        (
            Series("Money", money.first, money.values[:n], "level", "millions", source="bank.csv"),
            Series("Prices", prices.first, shaken, "index", "2015 = 100", source="office.csv"),
        ),
        (),
    )


def released(*lengths):
    """A workspace into which a release came each month: one file name, the newest in view."""
    desk = Workspace()
    for place, n in enumerate(lengths):
        desk.add(release(n), f"2020-{place + 1:02d}-15")
    return desk
