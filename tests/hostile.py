"""Names that files may carry and that must never do anything, and a workspace full of them."""

import numpy as np
import pandas as pd

from analytics.series import Series
from app.intake.reading import Release, read_release
from app.intake.weights import PREFIX, UNIT
from app.workspace import Workspace

MARKUP = "<img src=x onerror=window.hostile=1>"
SCRIPT = "\"><script>window.hostile=2</script><svg onload='window.hostile=3'>"
FORMULA = "=cmd|'/C calc'!A0"
LINK = "@SUM(1+1) <a href=javascript:window.hostile=4>x</a>"
TURNED = "evil\u202etxt.exe\u202c &amp; <b>bold</b>"
LONG = "W" * 10_000
ECONOMY = (f"{MARKUP}: Broad money", f"{MARKUP}: Consumer prices")
NAMES = (MARKUP, SCRIPT, FORMULA, LINK, TURNED, LONG, *ECONOMY)
WEIGHED = 5  # the first of them are components of a basket
MONTHS = 132


def columns() -> str:
    """Return a text file of monthly prices, one hostile name a column."""
    rng = np.random.default_rng(5)
    values = 100 * np.exp(np.cumsum(rng.normal(0.003, 0.008, (MONTHS, len(NAMES))), axis=0))
    quoted = ['"' + name.replace('"', '""') + '"' for name in NAMES]
    lines = [",".join(["period", *quoted])]
    for month, row in zip(
        pd.period_range("2015-01", periods=MONTHS, freq="M"), values, strict=True
    ):
        lines.append(",".join([str(month), *[repr(float(value)) for value in row]]))
    return "\n".join(lines)


def workspace() -> Workspace:
    """Return a workspace whose series, units, sources and files all have hostile names."""
    prices = read_release(f"{MARKUP}.csv", columns().encode())
    named = [series.name for series in prices.series]
    shares = np.full(11, 1000 / WEIGHED)
    weights = [
        Series(PREFIX + name, pd.Period("2015"), shares, kind="level", unit=UNIT)
        for name in named[:WEIGHED]
    ]
    index = [
        Series(
            series.name,
            series.first,
            series.values,
            kind="index",
            unit=MARKUP,
            source=f"{SCRIPT} {FORMULA}",
        )
        for series in prices.series
    ]
    return Workspace(
        (
            Release(prices.name, tuple(index), prices.problems),
            Release("weights.csv", tuple(weights), ()),
        )
    )
