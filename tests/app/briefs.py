"""Small desks for the checks of the brief: money, prices, components and weights in three files."""

import numpy as np
import pandas as pd

from app.brief.building import Building
from app.brief.pictures import Pictures
from app.commands.parts import workspace_of
from app.compute import Bridge
from app.state import ViewState

NAMES = ("01 Food", "02 Energy", "03 Rent", "04 Travel")
QUICK = {"surrogates": 99, "draws": 99}


def write_files(folder, *, months=150, seed=3, money="Broad money", prices="Consumer prices"):
    """Write the files of a small economy, in which money leads prices by nine months."""
    rng = np.random.default_rng(seed)
    when = pd.period_range("2010-01", periods=months, freq="M")
    growth = rng.normal(0.5, 0.6, months + 200)
    for t in range(1, growth.size):
        growth[t] = 0.2 + 0.6 * growth[t - 1] + 0.8 * (growth[t] - 0.5)
    follow = 0.1 + 0.5 * growth[91 : 91 + months] + 0.1 * rng.normal(size=months)
    table = pd.DataFrame(
        {
            money: 1000 * np.exp(np.cumsum(growth[100 : 100 + months]) / 100),
            prices: 100 * np.exp(np.cumsum(follow) / 100),
        },
        index=when,
    ).round(4)
    parts = pd.DataFrame(
        100 * np.exp(np.cumsum(follow[:, None] / 100 + rng.normal(0, 0.01, (months, 4)), axis=0)),
        index=when,
        columns=NAMES,
    ).round(4)
    years = range(2010, 2010 + months // 12 + 1)
    weights = pd.DataFrame(
        [[400.0, 200.0, 300.0, 100.0 + 0 * year] for year in years], index=years, columns=NAMES
    )
    folder.mkdir(parents=True, exist_ok=True)
    found = []
    for name, content in (("economy", table), ("parts", parts), ("weights", weights)):
        path = folder / f"{name}.csv"
        content.to_csv(path, index_label="year" if name == "weights" else "period")
        found.append(path)
    return tuple(found)


def desk(files):
    """A bridge over files."""
    return Bridge(workspace_of(tuple(files)))


def quick(state):
    """A state whose long work is short."""
    return ViewState(**{**vars(state), **QUICK})


def built(draft, bridge, **options):
    """A brief made to its end, without pictures unless they are asked for."""
    building = Building(draft, bridge, Pictures(), **{"images": False, **options})
    building.finish()
    return building
