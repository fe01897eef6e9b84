"""Pairs of known kind, searched over a small map, for the checks of what a search is worth."""

from dataclasses import replace
from functools import cache

import numpy as np
import pandas as pd

from analytics.series import Series
from app.compute import Bridge
from app.lag.evidence import completed
from app.state import ViewState
from tests.app.economies import LAG, planted, workspace

STATE = ViewState(
    driver="Money", response="Prices", window=3, shift=LAG,
    windows="1:12", shifts="-12:24", surrogates=250,
)  # fmt: skip
SMALL = replace(STATE, windows="1:6", shifts="-6:12")
STEP, EVENT = 120, 90


def rates(driver, response, first="2000-01"):
    """A pair of rates from two arrays."""
    return tuple(
        Series(name, pd.Period(first), values, kind="rate", unit="percent", source=f"{name}.csv")
        for name, values in (("Money", driver), ("Prices", response))
    )


def noise(n=240, seed=5):
    """Two unrelated series of n periods."""
    return np.random.default_rng(seed).standard_normal((2, n))


def hump(n):
    """One event of two years about `EVENT`."""
    return 5.0 * np.exp(-0.5 * ((np.arange(n) - EVENT) / 10.0) ** 2)


def _faint(strength):
    x, y = noise()
    return rates(x, y + strength * np.roll(x, LAG))


def _shifted():
    x, y = noise()
    step = 3.0 * (np.arange(x.size) >= STEP)
    return rates(x + step, y + step)


def _shared_event(n):
    x, y = noise(n)
    return rates(x + hump(n), y + hump(n))


def _copies():
    x, _ = noise(seed=8)
    return rates(x, np.roll(x, LAG))


CASES = {
    "leads": (lambda: planted(lag=9), {"shift": 9}),
    "follows": (lambda: planted(lag=-7), {"shift": -7}),
    "moves with": (lambda: planted(lag=0), {"shift": 0}),
    "opposite": (lambda: rates(noise()[0], -0.5 * np.roll(noise()[0], LAG) + noise()[1]), {}),
    "faint": (lambda: _faint(0.4), {}),
    "chosen elsewhere": (lambda: planted(lag=9), {"shift": -5}),
    "unrelated": (lambda: rates(*noise()), {}),
    "both shifted": (_shifted, {}),
    "one event": (lambda: _shared_event(240), {"window": 12, "shift": 0}),
    "few left": (lambda: _shared_event(110), {"window": 24, "shift": 0, "windows": "1:30"}),
    "exact copy": (_copies, {}),
    "identical": (lambda: rates(noise()[0], noise()[0]), {}),
    "short": (lambda: rates(*noise(50)), {"windows": "1:6", "shifts": "-6:12"}),
    "quarterly": (lambda: planted(160, first="1980Q1"), {"window": 4}),
    "quarterly, follows": (lambda: planted(160, first="1980Q1", lag=-3), {"shift": -3}),
    "annual": (lambda: planted(90, first="1930", lag=2), {"window": 2, "shift": 2,
                                                         "windows": "1:4", "shifts": "-3:5"}),
}  # fmt: skip


@cache
def case(name, **changes):
    """State, bridge and completed evidence of a case."""
    make, own = CASES[name]
    state = replace(STATE, **(own | changes))
    bridge = Bridge(workspace(*make()))
    return state, bridge, completed(state, bridge)


def fresh(*series, **options):
    """A bridge that has computed nothing yet: over a planted pair, or over other series."""
    return Bridge(workspace(*(series or planted(**options))))


def same(ours, theirs):
    """Hold two results against each other, part by part, to the bit."""
    assert type(ours) is type(theirs)
    if hasattr(ours, "__dataclass_fields__"):
        for name in ours.__dataclass_fields__:
            same(getattr(ours, name), getattr(theirs, name))
    elif isinstance(ours, (tuple, list)):
        assert len(ours) == len(theirs)
        for a, b in zip(ours, theirs, strict=True):
            same(a, b)
    elif isinstance(ours, dict):
        assert list(ours) == list(theirs)
        same(list(ours.values()), list(theirs.values()))
    else:
        np.testing.assert_array_equal(ours, theirs)
