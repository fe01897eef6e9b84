"""The evidence as the command prints it: `pricewake lag --json`."""

import json

import pytest
from click.testing import CliRunner

from app.cli import pricewake
from app.compute import Bridge
from app.demo import demo_releases
from app.lag.evidence import completed
from app.state import ViewState
from app.workspace import Workspace

DESIGN = {
    "cell": "window shift n slope intercept correlation se_naive p_naive se_robust p_robust"
    " effective_months",
    "best": "window shift correlation slope",
    "search": "p p_one_sided p_with_level_shifts level_shifts_removed surrogates seed method",
    "shift_set": "level identified shifts",
}


def lag_json(*flags):
    ran = CliRunner().invoke(
        pricewake,
        ["lag", "--json", "--surrogates", "250", "--windows", "1:24", "--shifts", "-12:36", *flags],
        standalone_mode=False,
    )
    assert ran.exception is None
    assert ran.return_value == 0
    return ran.stdout


def test_the_json_of_the_command_is_the_evidence():
    text = lag_json("--seed", "5")
    found = json.loads(text)
    for part, names in DESIGN.items():
        assert set(names.split()) <= set(found[part])
    for episode in found["episodes"]:
        assert {"first", "last", "share", "slope_without", "p_without"} <= set(episode)
    state = ViewState(windows="1:24", shifts="-12:36", surrogates=250, seed=5)
    bridge = Bridge(Workspace(demo_releases()))
    known, cell = completed(state, bridge), bridge.cell(state)
    assert found["cell"] == {
        "window": 12, "shift": 24, "n": cell.n, "slope": cell.slope, "intercept": cell.intercept,
        "correlation": cell.correlation, "se_naive": cell.se_naive, "p_naive": cell.p_naive,
        "se_robust": known.inference.se_robust, "p_robust": known.inference.p,
        "effective_months": known.inference.effective_months,
    }  # fmt: skip
    assert found["search"]["p"] == known.search.p
    assert found["search"]["p_one_sided"] == known.search.p_one_sided
    assert found["search"]["p_error"] == known.search.p_error
    assert (found["search"]["surrogates"], found["search"]["seed"]) == (250, 5)
    assert found["search"]["method"] == known.search.method
    assert found["best"]["window"] == known.search.best_window
    assert found["best"]["shift"] == known.search.best_shift
    assert found["shift_set"]["shifts"] == known.shift_set.shifts.tolist()
    assert found["shift_set"]["identified"] is known.shift_set.identified
    assert found["fragility"] == known.influence.fragility
    assert [e["share"] for e in found["episodes"]] == [e.share for e in known.influence.episodes]
    assert sum(e["share"] for e in found["episodes"]) == pytest.approx(1.0, abs=1e-9)
    assert (found["search"]["windows"], found["search"]["shifts"]) == ([1, 24], [-12, 36])
    assert lag_json("--seed", "5") == text, "the same seed gives the same answer"


def test_the_json_of_an_unrelated_pair_has_no_shift_set():
    found = json.loads(lag_json("--driver", "Unemployment rate", "--last", "1979-12"))
    assert found["search"]["p"] > 0.05
    assert found["shift_set"] == {"level": 0.95, "identified": False, "shifts": []}


def test_the_json_of_a_refused_search_says_why():
    found = json.loads(
        lag_json("--first", "2022-01", "--windows", "1:6", "--shifts", "-6:12",
                 "--window", "3", "--shift", "3")
    )  # fmt: skip
    assert found["search"]["p"] is None
    assert "at least 60 periods" in found["search"]["refused"]
    assert found["cell"]["p_robust"] is not None
