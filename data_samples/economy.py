"""Uldrevay, month by month: money, prices, interest, work and output, from a planted relation."""

from dataclasses import dataclass

import numpy as np
import pandas as pd

from analytics.series import FloatArray
from analytics.simulate import (
    ar_process,
    hump,
    lagged_effect,
    level_shift,
    levels_from_growth,
    white_noise,
)

LAG, SLOPE, BASELINE, SPREAD = 22, 0.55, 0.10, 9
MONTHS = pd.period_range("1960-01", "2026-10", freq="M")
QUARTERS = pd.period_range("1960Q1", "2026Q3", freq="Q")
BASE_YEAR = 2015
BREAK_MONTH, BREAK_SIZE = pd.Period("1987-07", "M"), 1.30

# Months of money that the first prices need: the planted lag, its spread and some to spare.
_LEAD_IN = 48
# Broad money's episodes: first month, months of rise, top and fall, height in percent a month.
EPISODES = (
    ("1967-01", 26, 18, 40, 1.00),
    ("1980-05", 18, 30, 34, 1.25),
    ("2020-03", 5, 15, 6, 1.45),
)
# Seasonal factors of narrow money in percent, January to December.
_NARROW_SEASON = np.array([0.6, -1.2, -1.0, -0.4, -0.3, 0.2, 0.6, 0.2, -0.5, -0.4, 0.2, 2.0])


@dataclass(frozen=True, eq=False)
class Economy:
    """Unrounded monthly series, shape (n,), from `MONTHS`; output is quarterly.

    Attributes
    ----------
    price_growth : ndarray
        Of the seasonally adjusted index, percent a month; the first entry belongs to the
        second month.
    broad, narrow : ndarray
        Millions of undrels.
    policy_rate, unemployment : ndarray
        Percent.
    output : ndarray
        Index, one value for each of `QUARTERS`.
    """

    price_growth: FloatArray
    broad: FloatArray
    narrow: FloatArray
    policy_rate: FloatArray
    unemployment: FloatArray
    output: FloatArray


def uldrevay(rng: np.random.Generator) -> Economy:
    """Make the economy; the same generator state makes the same economy."""
    n = MONTHS.size
    money = _money_growth(rng, _LEAD_IN + n)
    core = BASELINE + SLOPE * lagged_effect(money, lag=LAG, spread=SPREAD)[_LEAD_IN:]
    prices = core + ar_process(rng, n, ar=0.94, sd=0.19, law="laplace")
    prices += white_noise(rng, n, sd=1.0, law="laplace") * (0.08 + 0.40 * np.maximum(core, 0.0))
    policy = _policy_rate(prices)
    unemployment = _unemployment(rng, prices, policy)
    return Economy(
        price_growth=prices[1:],
        broad=levels_from_growth(money[_LEAD_IN + 1 :], start=3_850.0),
        narrow=_narrow_money(rng, money[_LEAD_IN:]),
        policy_rate=policy,
        unemployment=unemployment,
        output=_output(rng, unemployment),
    )


def _money_growth(rng: np.random.Generator, n: int) -> FloatArray:
    """Growth of broad money in percent a month, the last of them for the last month."""
    growth = 0.32 + ar_process(rng, n, ar=0.80, sd=0.16, law="laplace")
    growth += white_noise(rng, n, sd=0.26, law="laplace")
    for first, rise, hold, fall, size in EPISODES:
        start = _LEAD_IN + (pd.Period(first, "M") - MONTHS[0]).n
        growth += hump(n, start=start, rise=rise, hold=hold, fall=fall, size=size)
    return growth


def _narrow_money(rng: np.random.Generator, money: FloatArray) -> FloatArray:
    """Narrow money: half of broad money's growth, its own noise, a season and one break."""
    n = money.size
    growth = 0.14 + 0.5 * money + ar_process(rng, n, ar=0.6, sd=0.35, law="laplace")
    level = levels_from_growth(growth[1:], start=1_420.0)
    season = np.exp(_NARROW_SEASON[MONTHS.month - 1] / 100.0)
    step = level_shift(n, at=(BREAK_MONTH - MONTHS[0]).n, size=float(np.log(BREAK_SIZE)))
    return level * season * np.exp(step)


def _policy_rate(prices: FloatArray) -> FloatArray:
    """Rate that leans against inflation, moved in quarter points, never below 0.25."""
    rate, rates = 4.0, np.empty(prices.size)
    for month in range(prices.size):
        inflation = 12.0 * float(prices[max(0, month - 11) : month + 1].mean())
        target = 1.4 + inflation + 0.35 * (inflation - 3.0)
        rate = max(0.25, rate + 0.10 * (target - rate))
        rates[month] = np.round(4.0 * rate) / 4.0
    return rates


def _unemployment(rng: np.random.Generator, prices: FloatArray, policy: FloatArray) -> FloatArray:
    """Rate around 5.5 percent, higher a year after a high real policy rate."""
    inflation = np.convolve(prices, np.ones(12), mode="full")[: prices.size]
    inflation[:11] = 12.0 * prices[:11].mean()
    real = policy - inflation
    real = np.concatenate((np.full(12, real[0]), real[:-12]))
    smooth = np.convolve(np.concatenate((np.full(17, real[0]), real)), np.ones(18) / 18.0, "valid")
    return np.maximum(1.8, 5.2 + 0.45 * smooth + ar_process(rng, prices.size, ar=0.985, sd=1.1))


def _output(rng: np.random.Generator, unemployment: FloatArray) -> FloatArray:
    """Real output, which falls behind its trend while unemployment rises."""
    quarterly = unemployment[: 3 * QUARTERS.size].reshape(-1, 3).mean(axis=1)
    trend = np.linspace(0.95, 0.45, QUARTERS.size - 1)
    growth = trend - 0.9 * np.diff(quarterly)
    growth += white_noise(rng, growth.size, sd=0.45, law="laplace")
    level = levels_from_growth(growth)
    return level * (100.0 / float(level[QUARTERS.year == BASE_YEAR].mean()))
