"""`import analytics` in a notebook: names, a short line a result, tables, the README's lines."""

import ast
import os
import re
import subprocess
import sys
from pathlib import Path

import numpy as np
import pandas as pd
import pytest

import analytics
from analytics.search import lag_search
from analytics.series import Series
from analytics.weights import chained_basket

ROOT = Path(__file__).resolve().parents[2]
RNG = np.random.default_rng(4)
DRIVER = RNG.standard_normal(240)
RESPONSE = np.roll(DRIVER, 6) + RNG.standard_normal(240)
PRICES = Series("Prices", pd.Period("2004-01", "M"), 100 * np.exp(np.cumsum(RESPONSE) / 300))
CELL = {"window": 3, "shift": 6}


def test_importing_it_loads_no_module_of_numbers():
    program = (
        "import sys, analytics\n"
        "print(sorted(name for name in sys.modules if name.startswith('analytics.')))\n"
        "print('numpy' in sys.modules or 'pandas' in sys.modules)\n"
        "analytics.growth_rate\n"
        "print('analytics.rates' in sys.modules, 'analytics.search' in sys.modules)"
    )
    done = subprocess.run(
        [sys.executable, "-c", program], cwd=ROOT, capture_output=True, text=True, check=True
    )
    assert done.stdout.splitlines() == ["[]", "False", "True False"]


@pytest.mark.parametrize("name", analytics.__all__)
def test_every_name_leads_to_something_documented_of_its_own(name):
    found = getattr(analytics, name)
    assert callable(found)
    assert found.__doc__
    assert found.__module__.startswith("analytics.")
    assert name in dir(analytics)
    # A name that is also a module would be one or the other, by what was imported before.
    assert not (ROOT / "analytics" / f"{name}.py").exists()


def test_a_name_that_there_is_not_is_refused():
    with pytest.raises(AttributeError, match="has no attribute 'nothing'"):
        analytics.nothing  # noqa: B018


RESULTS = {
    "lag_surface": lambda: analytics.lag_surface(DRIVER, RESPONSE, windows=[1, 3], shifts=range(9)),
    "lag_cell": lambda: analytics.lag_cell(DRIVER, RESPONSE, **CELL),
    "cell_inference": lambda: analytics.cell_inference(DRIVER, RESPONSE, **CELL),
    "lag_search": lambda: analytics.lag_search(
        DRIVER, RESPONSE, windows=[1, 3], shifts=range(9), surrogates=19
    ),
    "shift_set": lambda: analytics.shift_set(
        DRIVER, RESPONSE, window=3, shifts=range(12), draws=19
    ),
    "episodes": lambda: analytics.episodes(DRIVER, RESPONSE, **CELL),
    "rates_of_print": lambda: analytics.rates_of_print(PRICES),
    "percentile_rank": lambda: analytics.percentile_rank(RESPONSE, 0.3),
    "base_effects": lambda: analytics.base_effects(PRICES),
    "drop_outs": lambda: analytics.drop_outs(PRICES),
    "annual_carry_over": lambda: analytics.annual_carry_over(PRICES),
    "path_if": lambda: analytics.path_if(PRICES, 0.2),
    "distribution_fit": lambda: analytics.distribution_fit(RESPONSE, "laplace"),
    "observed_tail": lambda: analytics.observed_tail(RESPONSE, 1.0),
    "chained_basket": lambda: chained_basket(
        np.array([[1.02, 1.06], [1.05, 1.10], [1.08, 1.09]]), [[0.6, 0.4]], [0]
    ),
    "implied_path": lambda: analytics.implied_path(DRIVER, RESPONSE, **CELL),
    "align": lambda: analytics.align(PRICES, PRICES),
}


@pytest.mark.parametrize("name", list(RESULTS))
def test_a_result_reads_in_a_line_and_has_a_table(name):
    found = RESULTS[name]()
    line = repr(found)
    assert "\n" not in line
    assert len(line) < 420
    assert "array(" not in line
    assert line.startswith(type(found).__name__ + "(")
    frame = found.to_frame()
    assert isinstance(frame, pd.DataFrame)
    assert frame.size > 0


def test_tables_hold_the_numbers_of_the_result():
    cell = RESULTS["lag_cell"]()
    frame = cell.to_frame()
    np.testing.assert_array_equal(frame["driver"], cell.driver)
    np.testing.assert_array_equal(frame["residuals"], cell.residuals)
    chosen = RESULTS["shift_set"]()
    frame = chosen.to_frame()
    assert frame.loc[frame["in_set"], "shift"].tolist() == chosen.shifts.tolist()
    parts = RESULTS["episodes"]()
    frame = parts.to_frame()
    assert len(frame) == len(parts.episodes)
    assert frame["share"].tolist() == [each.share for each in parts.episodes]
    found = RESULTS["lag_search"]()
    frame = found.to_frame()
    best = frame[(frame["window"] == found.best_window) & (frame["shift"] == found.best_shift)]
    assert best["p"].item() == found.p
    assert best["correlation"].item() == found.best_correlation
    rates = RESULTS["rates_of_print"]()
    assert rates.to_frame().loc[0].to_dict() == vars(rates)
    path = RESULTS["path_if"]()
    assert path.to_frame().index.equals(path.periods)


def test_the_verdict_of_a_search_is_made_of_its_numbers():
    found = RESULTS["lag_search"]()
    assert f"window {found.best_window} at shift {found.best_shift:+d}" in found.verdict
    assert f"correlation {found.best_correlation:+.2f}" in found.verdict
    assert f"probability {found.p:.3f}".replace("0.", ".") in found.verdict
    other = lag_search(
        RNG.standard_normal(240), RESPONSE, windows=[2], shifts=range(5), surrogates=19
    )
    assert other.verdict != found.verdict
    assert "windows 2 to 2" in other.verdict


def test_contributions_come_as_a_table_that_adds_up():
    prices = np.array([[1.02, 1.06], [1.05, 1.10], [1.08, 1.09]])
    basket = chained_basket(prices, [[0.6, 0.4]], [0])
    frame = analytics.contribution_frame(basket, 1, names=["Food", "Rent"])
    assert list(frame.columns) == ["Food", "Rent", "total"]
    np.testing.assert_allclose(
        frame["total"].to_numpy()[1:], 100 * (basket.total[1:] / basket.total[:-1] - 1)
    )
    with pytest.raises(ValueError, match="names must be 2"):
        analytics.contribution_frame(basket, 1, names=["Food"])
    with pytest.raises(ValueError, match="periods must be 3"):
        analytics.contribution_frame(basket, 1, periods=pd.period_range("2020", periods=2))


@pytest.mark.parametrize(
    ("index", "frequency", "first"),
    [
        (["2024-01", "2024-02", "2024-04"], "monthly", "2024-01"),
        (["2024Q1", "2024Q2", "2024Q4"], "quarterly", "2024Q1"),
        (["2021", "2022", "2024"], "annual", "2021"),
        (pd.DatetimeIndex(["2024-01-31", "2024-02-29", "2024-04-30"]), "monthly", "2024-01"),
        (pd.PeriodIndex(["2024-01", "2024-02", "2024-04"], freq="M"), "monthly", "2024-01"),
        ([2021, 2022, 2024], "annual", "2021"),
    ],
)
def test_a_column_of_pandas_becomes_a_series(index, frequency, first):
    column = pd.Series([1.0, 2.0, 4.0], index=index, name="x")
    found = analytics.series_from_pandas(column, frequency=frequency, kind="rate")
    assert found.frequency == frequency
    assert str(found.first) == first
    assert found.kind == "rate"
    np.testing.assert_array_equal(found.values, [1.0, 2.0, np.nan, 4.0])


@pytest.mark.parametrize(
    ("index", "frequency", "said"),
    [
        (["2024-01", "x"], "monthly", "must hold monthly periods"),
        (["2024-02", "2024-01"], "monthly", "must increase"),
        (["2024-01", "2024-02"], "weekly", "frequency must be one of"),
    ],
)
def test_a_column_that_is_no_series_is_refused(index, frequency, said):
    with pytest.raises(ValueError, match=re.escape(said)):
        analytics.series_from_pandas(
            pd.Series([1.0, 2.0], index=index, name="x"), frequency=frequency
        )


def test_the_ten_lines_of_the_readme_go_from_a_file_to_a_verdict(capsys, monkeypatch):
    monkeypatch.chdir(ROOT)
    text = (ROOT / "README.md").read_text(encoding="utf-8")
    (program,) = re.findall(r"^```python\n(.*?)^```$", text, re.DOTALL | re.MULTILINE)
    statements = [s for s in ast.parse(program).body if not isinstance(s, ast.Import)]
    assert len(statements) <= 10
    there = {}
    exec(compile(program, "README.md", "exec"), there)
    told = capsys.readouterr().out
    assert there["found"].verdict in told
    window, shift = there["surface"].peak("correlation")
    assert re.search(rf"\b{window}\s+{shift}\b", told)
    assert there["found"].p <= 0.05
    assert abs(there["found"].best_shift - 22) <= 4  # data_samples/README.md plants about two years
    assert os.getcwd() == str(ROOT)
