"""Small panels for the checks of the scan: economies whose relation is known."""

import csv

import numpy as np
import pandas as pd

from analytics.panel import PanelPair
from analytics.series import Series, align
from app.intake.reading import Release
from app.workspace import Workspace

MONTHS, LAG = 120, 5
SMALL = {"windows": "1:4", "shifts": "-2:8", "surrogates": 99}  # fields of the state
DRAWS = {"surrogates": 99, "seed": 1, "sign": "any"}


def rates(economy, *, months=MONTHS, slope=1.0, seed=0):
    """Growth of money and prices of one economy; prices follow `LAG` months later."""
    rng = np.random.default_rng([seed, *economy.encode()])
    money = rng.standard_normal(months + LAG)
    prices = slope * money[:-LAG] + 0.5 * rng.standard_normal(months)
    return money[LAG:], prices


def panel_pairs(slopes, *, months=MONTHS, seed=0):
    """One pair an economy, ready to be searched; `slopes` maps economies to slopes."""
    month = pd.Period("2001-02", "M")
    pairs = []
    for economy, slope in slopes.items():
        money, prices = rates(economy, months=months, slope=slope, seed=seed)
        both = align(Series("money", month, money, "rate"), Series("prices", month, prices, "rate"))
        pairs.append(
            PanelPair(economy, "Broad money", "Consumer prices", both, range(1, 5), range(-2, 9))
        )
    return pairs


def panel_series(slopes, *, months=MONTHS):
    """The same economies as levels, named as a long file names them."""
    made = []
    for economy, slope in slopes.items():
        for name, rate in zip(
            ("Broad money", "Consumer prices"),
            rates(economy, months=months, slope=slope),
            strict=True,
        ):
            level = 100.0 * np.exp(np.concatenate([[0.0], np.cumsum(rate)]) / 100.0)
            period = pd.Period("2001-01", "M")
            made.append(Series(f"{economy}: {name}", period, level, kind="index", source="p.csv"))
    return tuple(made)


def panel_workspace(slopes, **options):
    """A workspace that holds them as one file."""
    return Workspace((Release("panel.csv", panel_series(slopes, **options), ()),))


def panel_file(path, slopes, **options):
    """Write them as a long file with an economy column."""
    with path.open("w", newline="") as file:
        table = csv.writer(file)
        table.writerow(["economy", "period", "series", "value"])
        for series in panel_series(slopes, **options):
            economy, name = series.name.split(": ")
            for period, value in zip(series.periods, series.values, strict=True):
                table.writerow([economy, period, name, repr(float(value))])
    return path
