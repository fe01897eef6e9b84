"""Small workspaces for the checks of the app: planted pairs on any calendar."""

import numpy as np
import pandas as pd

from analytics.series import Series
from app.intake.reading import Release
from app.workspace import Workspace

LAG, SLOPE = 6, 0.5


def planted(n=240, *, first="2000-01", lag=LAG, seed=11):
    """Driver and response as rates, n periods; the response follows `lag` periods later."""
    rng = np.random.default_rng(seed)
    driver = rng.standard_normal(n + abs(lag))
    response = SLOPE * driver + 0.1 * rng.standard_normal(n + abs(lag))
    start = max(0, lag)
    driver_values = driver[start : start + n]
    response_values = response[start - lag : start - lag + n]
    period = pd.Period(first)
    return (
        Series("Money", period, driver_values, kind="rate", unit="percent", source="a.csv"),
        Series("Prices", period, response_values, kind="rate", unit="percent", source="b.csv"),
    )


def workspace(*series, name="planted.csv"):
    """A workspace that holds these series, as one file."""
    return Workspace((Release(name, tuple(series), ()),))


def levels(rate, name=None, base=100.0):
    """The index whose log growth rate is `rate`, one period longer."""
    values = base * np.exp(np.concatenate([[0.0], np.cumsum(rate.values)]) / 100.0)
    return Series(name or rate.name, rate.first - 1, values, kind="index", source=rate.source)
