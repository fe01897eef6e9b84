"""Small economies with components and weights for the checks of the Breadth page."""

import numpy as np
import pandas as pd

from analytics.series import Series
from app.intake.reading import Release
from app.intake.weights import PREFIX, UNIT
from app.workspace import Workspace

NAMES = ("01 Food", "02 Energy", "03 Rent", "04 Travel")
SHARES = ((400.0, 200.0, 300.0, 100.0), (380.0, 220.0, 290.0, 110.0), (390.0, 200.0, 300.0, 110.0))


def prices_of(n=30, components=4, seed=7):
    """Index values, shape (n, components); December 2019 is the first month."""
    rng = np.random.default_rng(seed)
    return 100 * np.exp(np.cumsum(rng.normal(0.003, 0.01, (n, components)), axis=0))


def series_of(prices, first="2019-12", names=NAMES, **attributes):
    """One series a column."""
    return [
        Series(name, pd.Period(first), prices[:, i], source="basket.csv", **attributes)
        for i, name in enumerate(names)
    ]


def weights_of(shares=SHARES, first=2020, names=NAMES):
    """Weight series as intake gives them; nan where there is none."""
    table = np.array(shares, dtype=float)
    return [
        Series(PREFIX + name, pd.Period(str(first)), table[:, i], kind="level", unit=UNIT)
        for i, name in enumerate(names)
    ]


def basket(series, weights, total=None):
    """A workspace with a file of components, one of weights, and perhaps one of the total."""
    releases = [
        Release("basket.csv", tuple(series), ()),
        Release("weights.csv", tuple(weights), ()),
    ]
    if total is not None:
        releases.append(Release("total.csv", (total,), ()))
    return Workspace(tuple(releases))


def usual(n=30, **options):
    """The usual small economy."""
    return basket(series_of(prices_of(n, **options)), weights_of())
