"""Pages under hundreds of series: ``python -m tests.bench.many [--turns 5]``.

Prints seconds from the address to a page that can be used (its lists filled, its answer shown, no
answer under way), the quickest of some turns, for 60, 300 and 1,000 series; and the ratio to 60,
which carries over to other machines. Turns take sizes in turn, so that a busy machine meets all.
"""

import argparse
import time
from contextlib import ExitStack

import numpy as np
import pandas as pd

from analytics.series import Series
from app.intake.reading import Release
from app.workspace import Workspace
from tests.bench.breadth import economy
from tests.browser.driving import READY, chromium, served, until

SIZES = (60, 300, 1000)
LISTED = "document.querySelectorAll('#data-series tbody tr select').length > 100"
PLAIN = (
    "window.pricewake && pricewake.plain?.data && !pricewake.plain.timer"
    " && !pricewake.plain.waiting"
)
USABLE = {
    "data": f"{PLAIN} && {LISTED}",
    "reading": f"{PLAIN} && document.querySelector('#field-series option')",
    "breadth": f"{PLAIN} && document.querySelector('#breadth-table tbody tr')",
    "lag": f"{READY} && document.querySelector('#field-driver option')",
    "outlook": f"{PLAIN} && document.querySelector('#field-driver option')",
}


def desk(count: int, months: int = 240) -> Workspace:
    """Return a workspace of `count` indices that walk at random."""
    rng = np.random.default_rng(3)
    first = pd.Period("2000-01", "M")
    walks = 100 * np.exp(np.cumsum(rng.normal(0.003, 0.006, (count, months)), axis=1))
    series = tuple(
        Series(f"{place:04d} Series of the desk", first, walk, kind="index", source="many.csv")
        for place, walk in enumerate(walks)
    )
    return Workspace((Release("many.csv", series, ()),))


def main() -> None:
    """Print one line a page."""
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("--turns", type=int, default=5)
    turns = parser.parse_args().turns
    for page, usable in USABLE.items():
        took: dict[int, list[float]] = {size: [] for size in SIZES}
        with ExitStack() as open_now:
            address = {
                size: open_now.enter_context(
                    served(economy(size, 30) if page == "breadth" else desk(size))
                )
                for size in SIZES
            }
            browser = open_now.enter_context(chromium())
            for _ in range(turns):
                for size in SIZES:
                    browser.get("about:blank")
                    start = time.perf_counter()
                    browser.get(f"{address[size]}/{page}")
                    until(browser, usable, 120)
                    took[size].append(time.perf_counter() - start)
            browser.get("about:blank")
            time.sleep(2)  # answers that are under way come to their end
        best = {size: min(found) for size, found in took.items()}
        print(
            f"{page}: "
            + ", ".join(f"{size} series {best[size]:.1f} s" for size in SIZES)
            + f"; 1,000 over 60: {best[1000] / best[60]:.2f}",
            flush=True,
        )


if __name__ == "__main__":
    main()
