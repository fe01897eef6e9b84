"""Server time of the Breadth page for many components: ``python -m tests.bench.breadth``.

Prints milliseconds of wall and processor time for opening the page, for a change that computes
anew (another trim) and for one that only draws anew (another order of the table).
"""

import statistics
import time
from dataclasses import asdict

import numpy as np
import pandas as pd

from analytics.series import Series
from app.intake.reading import Release
from app.intake.weights import PREFIX, UNIT
from app.server import build_app
from app.state import ViewState
from app.workspace import Workspace


def economy(components: int, years: int, seed: int = 5) -> Workspace:
    """Build components with weights of every year, prices rising by about 4 percent a year."""
    rng = np.random.default_rng(seed)
    n = 12 * years + 1
    common = rng.normal(0.003, 0.002, n)
    moves = common[:, None] + rng.normal(0, 0.006, (n, components))
    prices = 100 * np.exp(np.cumsum(moves, axis=0))
    weights = rng.lognormal(0, 1, (years + 1, components))
    weights = np.round(1000 * weights / weights.sum(axis=1, keepdims=True), 4)
    first = pd.Period("1965-12", "M")
    names = [f"{i:03d} Component number {i}" for i in range(components)]
    series = tuple(
        Series(name, first, prices[:, i], kind="index", source="bench.csv")
        for i, name in enumerate(names)
    )
    shares = tuple(
        Series(PREFIX + name, pd.Period("1966", "Y"), weights[:, i], kind="level", unit=UNIT)
        for i, name in enumerate(names)
    )
    return Workspace((Release("bench.csv", series, ()), Release("weights.csv", shares, ())))


class Page:
    """The page's one callback, asked over HTTP as the browser does."""

    def __init__(self, workspace: Workspace) -> None:
        self.client = build_app(workspace).server.test_client()
        (self.call,) = [
            each
            for each in self.client.get("/_dash-dependencies").json
            if "breadth-answer.data" in each["output"] and each["clientside_function"] is None
        ]

    def timed(self, state: ViewState) -> tuple[float, float, int]:
        """Milliseconds of wall and of processor, and the size of the answer in bytes."""
        outputs = [
            dict(zip(("id", "property"), part.split("."), strict=True))
            for part in self.call["output"].strip(".").split("...")
        ]
        values = {"breadth-state": asdict(state)}
        body = {
            "output": self.call["output"],
            "outputs": outputs,
            "inputs": [
                {**each, "value": values.get(each["id"], 0)} for each in self.call["inputs"]
            ],
            "state": [{**each, "value": None} for each in self.call["state"]],
            "changedPropIds": ["breadth-state.data"],
        }
        wall, cpu = time.perf_counter(), time.process_time()
        answer = self.client.post("/_dash-update-component", json=body)
        wall, cpu = time.perf_counter() - wall, time.process_time() - cpu
        message = answer.json["response"]["breadth-message"]["children"]
        assert answer.status_code == 200 and not message, message
        return 1e3 * wall, 1e3 * cpu, len(answer.data)


def main() -> None:
    """Print one line a case."""
    for components, years in ((12, 60), (300, 60)):
        Page(economy(2, 3)).timed(ViewState())  # imports and templates
        page = Page(economy(components, years))
        cases = {
            "opened": [ViewState()],
            "another trim": [ViewState(trim=str(cut)) for cut in range(1, 10)],
            "another order": [
                ViewState(sort=f"{column}-{way}")
                for column in ("rate", "rank", "weight", "name")
                for way in ("up", "down")
            ],
            "all rows, 60 years": [ViewState(rows="all", years=60)],
        }
        for case, states in cases.items():
            found = [page.timed(state) for state in states]
            wall, cpu, size = (statistics.median(column) for column in zip(*found, strict=True))
            print(
                f"{components} components x {years} years, {case}: {wall:.0f} ms wall, {cpu:.0f} ms"
                f" processor, {size / 1000:.0f} kB"
            )


if __name__ == "__main__":
    main()
