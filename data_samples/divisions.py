"""Consumer prices in twelve divisions, and the all-items index chained with yearly weights."""

from dataclasses import dataclass

import numpy as np

from analytics.series import FloatArray
from analytics.simulate import white_noise
from data_samples.economy import BASE_YEAR, MONTHS

DIGITS = 3

# Name; weight at the start and at the end, per mille; drift against the all-items index, percent
# a month; standard deviation of the monthly noise, percent.
DIVISIONS = (
    ("01 Food and soft drinks", 340, 165, -0.01, 0.55),
    ("02 Alcohol and tobacco", 75, 45, 0.08, 0.50),
    ("03 Clothing and shoes", 105, 50, -0.12, 0.50),
    ("04 Housing and energy", 150, 215, 0.05, 0.50),
    ("05 Furniture and household goods", 75, 60, -0.07, 0.30),
    ("06 Health", 25, 50, 0.05, 0.30),
    ("07 Transport", 85, 150, 0.02, 0.85),
    ("08 Communication", 10, 30, -0.20, 0.45),
    ("09 Recreation and culture", 55, 95, -0.04, 0.35),
    ("10 Education", 8, 12, 0.14, 0.15),
    ("11 Restaurants and hotels", 42, 95, 0.07, 0.30),
    ("12 Other goods and services", 30, 33, 0.03, 0.30),
)
NAMES = tuple(division[0] for division in DIVISIONS)
YEARS = np.arange(MONTHS[0].year, MONTHS[-1].year + 1)

# Seasonal factors in percent, January to December; a division left out has none.
_SEASON = {
    "01 Food and soft drinks": (0.4, 0.6, 0.5, 0.4, 0.4, 0.2, -0.5, -0.8, -0.7, -0.4, -0.2, 0.1),
    "03 Clothing and shoes": (-3.2, -2.4, 0.8, 1.6, 1.5, 0.4, -3.0, -1.8, 1.3, 2.0, 1.9, 0.9),
    "04 Housing and energy": (0.4, 0.4, 0.2, 0.0, -0.2, -0.3, -0.4, -0.4, -0.2, 0.0, 0.2, 0.3),
    "05 Furniture and household goods": (
        *(-0.6, -0.2, 0.2, 0.3, 0.3, 0.1, -0.4, -0.2, 0.1, 0.2, 0.2, 0.0),
    ),
    "07 Transport": (-0.4, -0.3, -0.1, 0.2, 0.3, 0.4, 0.6, 0.5, 0.0, -0.3, -0.5, -0.4),
    "09 Recreation and culture": (
        *(-0.6, -0.3, -0.2, -0.1, -0.3, 0.2, 0.9, 1.0, 0.1, -0.3, -0.5, 0.1),
    ),
    "11 Restaurants and hotels": (
        *(-0.9, -0.8, -0.5, -0.1, 0.2, 0.6, 1.1, 1.2, 0.4, -0.2, -0.6, -0.4),
    ),
}


@dataclass(frozen=True, eq=False)
class Basket:
    """Consumer prices by division.

    Attributes
    ----------
    indices : ndarray, shape (n, 12)
        Division indices, not seasonally adjusted, base year = 100, rounded as published.
    weights : ndarray, shape (years, 12)
        Per mille, one decimal; a row sums to 1000. The row of year y holds for January to
        December of y and belongs to the prices of December y-1 (1960: of January 1960).
    all_items, adjusted : ndarray, shape (n,)
        Chained from the rounded indices and weights, base year = 100, rounded as published;
        `adjusted` is the same without the season that was put in.
    """

    indices: FloatArray
    weights: FloatArray
    all_items: FloatArray
    adjusted: FloatArray


def basket(rng: np.random.Generator, price_growth: FloatArray) -> Basket:
    """Spread the growth of the adjusted all-items index, in percent a month, over the divisions."""
    target = np.concatenate(([0.0], np.cumsum(price_growth))) / 100.0
    season = np.array([_SEASON.get(name, (0.0,) * 12) for name in NAMES]).T / 100.0
    season = (season - season.mean(axis=0))[MONTHS.month - 1]
    wish = target[:, None] + season + _relative_prices(rng, target.size)
    start, end = (np.array([division[i] for division in DIVISIONS], float) for i in (1, 2))
    variance = np.array([division[4] for division in DIVISIONS]) ** 2

    logs = season[[0]].repeat(target.size, axis=0)
    weights = np.empty((YEARS.size, len(NAMES)))
    headline_season = np.empty(target.size)
    chained, link = np.empty(target.size), 0
    for row, year in enumerate(YEARS):
        progress = row / (YEARS.size - 1)
        shares = start ** (1.0 - progress) * end**progress
        if row > 0:  # the shares of year y-1, at the prices of December y-1
            shares *= np.exp(logs[link] - logs[link - 11 : link + 1].mean(axis=0))
        weights[row] = _per_mille(shares)
        share = weights[row] / 1000.0
        give = share * variance / (share**2 @ variance)
        of_year = np.flatnonzero(MONTHS.year == year)
        headline_season[of_year] = season[of_year] @ share
        goal = target[of_year] + headline_season[of_year]
        if row == 0:
            chained[0] = goal[0]
        for month, aim in zip(of_year, goal, strict=True):
            if month > 0:
                logs[month] = logs[month - 1] + wish[month] - wish[month - 1]
            for _ in range(4):  # noisy divisions give way until the chained index meets its goal
                chained[month] = chained[link] + np.log(share @ np.exp(logs[month] - logs[link]))
                logs[month] += give * (aim - chained[month])
        link = int(of_year[-1])
    indices = np.round(_to_base_year(np.exp(logs)), DIGITS)
    all_items = chained_index(indices, weights)
    adjusted = all_items / np.exp(headline_season)
    return Basket(
        indices=indices,
        weights=weights,
        all_items=np.round(_to_base_year(all_items), DIGITS),
        adjusted=np.round(_to_base_year(adjusted), DIGITS),
    )


def chained_index(indices: FloatArray, weights: FloatArray) -> FloatArray:
    """Chain the divisions at every December; the first month is 1.

    Within year y the index is that of December y-1 times the weighted mean of the division
    indices relative to December y-1.
    """
    chained, link = np.ones(MONTHS.size), 0
    for row, year in enumerate(YEARS):
        of_year = np.flatnonzero(MONTHS.year == year)
        chained[of_year] = chained[link] * ((indices[of_year] / indices[link]) @ weights[row])
        chained[of_year] /= 1000.0
        link = int(of_year[-1])
    return chained


def _relative_prices(rng: np.random.Generator, n: int) -> FloatArray:
    """Log prices of the divisions against the all-items index: drift and Laplace steps."""
    steps = [
        (drift + white_noise(rng, n, sd=sd, law="laplace")) / 100.0
        for _, _, _, drift, sd in DIVISIONS
    ]
    return np.cumsum(np.array(steps).T, axis=0)


def _per_mille(shares: FloatArray) -> FloatArray:
    """Shares in tenths of one per mille that sum to 1000 exactly, by largest remainder."""
    tenths = 10_000.0 * shares / shares.sum()
    whole: FloatArray = np.floor(tenths)
    missing = round(10_000.0 - float(whole.sum()))
    whole[np.argsort(whole - tenths, kind="stable")[:missing]] += 1.0
    return whole / 10.0


def _to_base_year(levels: FloatArray) -> FloatArray:
    """Levels whose mean over the base year is 100."""
    base: FloatArray = levels[MONTHS.year == BASE_YEAR].mean(axis=0)
    return 100.0 * levels / base
