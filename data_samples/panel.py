"""Thirty invented economies; money leads prices in some, and is unrelated to them in others."""

from typing import Literal, NamedTuple

import numpy as np
import pandas as pd

from analytics.series import FloatArray
from analytics.simulate import (
    garch_noise,
    hump,
    lagged_effect,
    level_shift,
    levels_from_growth,
    planted_pair,
)

PANEL_MONTHS = pd.period_range("1986-11", "2026-10", freq="M")

Trait = Literal["", "level shifts", "humps", "clustered noise", "deflation", "hyperinflation"]


class Plan(NamedTuple):
    """What an economy is made from; growth rates in percent a month.

    `lag` and `spread` are months; a slope of 0 means that there is no relation and `lag` says
    nothing. `driver_ar` and `noise_ar` are autocorrelations at one month, `noise` a standard
    deviation.
    """

    economy: str
    lag: int
    slope: float
    driver_ar: float
    noise: float
    noise_ar: float
    spread: int = 1
    baseline: float = 0.10
    trait: Trait = ""


class PlannedEconomy(NamedTuple):
    """A plan carried out: unrounded levels, shape (n,), for `PANEL_MONTHS`."""

    plan: Plan
    money: FloatArray
    prices: FloatArray


PLANS = (
    Plan("Abrisund", 18, 0.60, 0.7, 0.40, 0.3),
    Plan("Ambrovuld", 24, 0.45, 0.8, 0.35, 0.3, spread=7),
    Plan("Belquoy", 0, 0.0, 0.7, 0.50, 0.6),
    Plan("Brunquesse", 12, 0.80, 0.5, 0.45, 0.2),
    Plan("Celdramoy", 30, 0.70, 0.8, 0.50, 0.5, spread=7),
    Plan("Cormundry", 0, 0.0, 0.9, 0.45, 0.9),
    Plan("Dorquavane", 20, 0.50, 0.8, 0.40, 0.4, spread=5),
    Plan("Drelvany", 22, 0.40, 0.9, 0.35, 0.3, spread=9),
    Plan("Elvundrey", 0, 0.0, 0.8, 0.40, 0.7, trait="level shifts"),
    Plan("Eskmorra", 15, 0.90, 0.6, 0.50, 0.3),
    Plan("Fendrovay", 0, 0.0, 0.5, 0.60, 0.3, trait="clustered noise"),
    Plan("Gastrelune", 26, 0.65, 0.8, 0.45, 0.5, spread=9),
    Plan("Hulmavery", 0, 0.0, 0.9, 0.40, 0.8),
    Plan("Istramunde", 3, 1.00, 0.5, 1.50, 0.3, spread=3, trait="hyperinflation"),
    Plan("Jorvelay", 16, 0.35, 0.7, 0.35, 0.2),
    Plan("Kelmundoy", 0, 0.0, 0.8, 0.45, 0.8, trait="humps"),
    Plan("Lurgavene", 21, 0.75, 0.8, 0.50, 0.6, spread=5),
    Plan("Mesquandy", 28, 0.55, 0.9, 0.40, 0.4, spread=9),
    Plan("Nordruelle", 19, 0.55, 0.8, 0.35, 0.4, baseline=-0.35, trait="deflation"),
    Plan("Orsquivane", 0, 0.0, 0.6, 0.50, 0.5),
    Plan("Pandrevoy", 9, 0.60, 0.6, 0.40, 0.3),
    Plan("Quelmaury", 0, 0.0, 0.9, 0.50, 0.9, trait="level shifts"),
    Plan("Rundavesse", 23, 0.70, 0.7, 0.45, 0.5, spread=3),
    Plan("Sorvundale", 0, 0.0, 0.8, 0.40, 0.8),
    Plan("Tarquoyne", 14, 0.50, 0.8, 0.40, 0.3, spread=5),
    Plan("Ulmaverne", 25, 0.30, 0.8, 0.45, 0.5, spread=7),
    Plan("Vandrelisk", 0, 0.0, 0.7, 0.55, 0.4, trait="clustered noise"),
    Plan("Welquorne", 17, 0.85, 0.7, 0.50, 0.4, spread=3),
    Plan("Yestravine", 0, 0.0, 0.9, 0.35, 0.7),
    Plan("Zundermoy", 0, 0.0, 0.5, 0.50, 0.8, trait="humps"),
)

_DRIVER_MEAN, _DRIVER_SD = 0.50, 0.50


def panel(rng: np.random.Generator) -> list[PlannedEconomy]:
    """Carry out every plan, in order; the same generator state makes the same panel."""
    return [_carried_out(plan, stream) for plan, stream in zip(PLANS, rng.spawn(30), strict=True)]


def _carried_out(plan: Plan, rng: np.random.Generator) -> PlannedEconomy:
    n = PANEL_MONTHS.size - 1
    pair = planted_pair(
        rng,
        n,
        lag=plan.lag,
        slope=plan.slope,
        baseline=plan.baseline + (0.30 if plan.slope == 0.0 else 0.0),
        driver_ar=plan.driver_ar,
        driver_mean=0.10 if plan.trait == "deflation" else _DRIVER_MEAN,
        driver_sd=_DRIVER_SD,
        noise=plan.noise,
        noise_ar=plan.noise_ar,
        law="laplace",
        spread=plan.spread,
    )
    money, prices = np.array(pair.driver), np.array(pair.response)
    match plan.trait:
        case "level shifts":  # both step down by the same amount, years apart
            early, late = rng.integers(100, 180), rng.integers(240, 330)
            money += 0.9 + level_shift(n, at=int(late), size=-0.9)
            prices += 0.9 + level_shift(n, at=int(early), size=-0.9)
        case "humps":  # one episode each, years apart
            money += hump(n, start=int(rng.integers(60, 160)), rise=20, hold=20, fall=20, size=1.2)
            prices += hump(n, start=int(rng.integers(240, 330)), rise=15, hold=25, fall=25, size=1)
        case "clustered noise":
            prices += garch_noise(rng, n, sd=plan.noise, arch=0.15, garch=0.80)
        case "hyperinflation":
            burst = hump(n, start=150, rise=14, hold=8, fall=4, size=62.0)
            money += burst
            prices += plan.slope * np.nan_to_num(
                lagged_effect(burst, lag=plan.lag, spread=plan.spread)
            )
    return PlannedEconomy(
        plan, levels_from_growth(money, start=10_000.0), levels_from_growth(prices, start=100.0)
    )
