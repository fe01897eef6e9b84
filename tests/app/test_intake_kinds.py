"""What a series is, told from its name and its values."""

from pathlib import Path

import numpy as np
import pytest

from app.intake.kinds import inferred_adjustment, inferred_kind, inferred_unit
from app.intake.reading import (
    read_release,
)

DATA = Path(__file__).parent.parent / "data"
PLAIN = "month,Prices,Money\n2024-01,100.5,1200\n2024-02,101,1234.5\n2024-03,101.25,1300\n"


@pytest.mark.parametrize(
    ("name", "values", "kind", "unit", "adjustment"),
    [
        ("Policy rate", [4.0, 4.25], "rate", "percent", "unknown"),
        ("Growth of output (percent)", [0.5], "rate", "percent", "unknown"),
        ("10-year yield", [3.0], "rate", "percent", "unknown"),
        ("Inflation, %", [3.0], "rate", "percent", "unknown"),
        ("Exchange rate (undrels a crown)", [4.0], "level", "undrels a crown", "unknown"),
        ("Consumer prices", [8.0], "index", "", "unknown"),
        ("CPI, seasonally adjusted", [8.0], "index", "", "yes"),
        ("PPI (not seasonally adjusted)", [8.0], "index", "", "no"),
        ("HICP SA", [8.0], "index", "", "yes"),
        ("Output, NSA", [8.0], "level", "", "no"),
        ("Output (2015 = 100)", [8.0], "index", "2015 = 100", "unknown"),
        ("Output", [90.0, 100.2], "index", "", "unknown"),
        ("Output", [90.0, 110.0], "level", "", "unknown"),
        ("Balance", [-1.5, 2.0], "rate", "percent", "unknown"),
        ("Balance", [-150.0, 2000.0], "level", "", "unknown"),
        ("Broad money [million undrels]", [3850.0], "level", "million undrels", "unknown"),
        ("Corporate separates (2)", [7.0], "level", "", "unknown"),
    ],
)
def test_inferred_attributes(
    name: str, values: list[float], kind: str, unit: str, adjustment: str
) -> None:
    found = inferred_kind(name, np.array(values))
    assert (found, inferred_unit(name, found), inferred_adjustment(name)) == (
        kind,
        unit,
        adjustment,
    )


def test_percent_signs_make_a_rate() -> None:
    release = read_release("a.csv", b"p,A\n2024-01,2.5%\n2024-02,2.6%\n")
    assert release.series[0].kind == "rate" and release.series[0].values.tolist() == [2.5, 2.6]
