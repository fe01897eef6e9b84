"""`pricewake outlook`: its numbers, files, dates, refusals, and statements that it keeps."""

import json

import numpy as np
import pytest
from statsmodels.datasets import macrodata

from analytics.backtest import backtest
from analytics.backtest_scores import backtest_scores
from analytics.forecasts import RELATION
from analytics.outlook import implied_path
from analytics.outlook_target import outlook_target
from analytics.path_intervals import path_fan
from app.workspace import Workspace
from tests.app.outlooks import economy, release
from tests.exported import rows_of


@pytest.fixture(scope="module")
def macro(tmp_path_factory):
    """US quarterly M1 and consumer prices, 1959 Q1 to 2009 Q3, of statsmodels' macrodata."""
    data = macrodata.load_pandas().data
    lines = [
        f"{int(year)}-Q{int(quarter)},{m1!r},{cpi!r}"
        for year, quarter, m1, cpi in data[["year", "quarter", "m1", "cpi"]].itertuples(index=False)
    ]
    path = tmp_path_factory.mktemp("macro") / "macro.csv"
    path.write_text("\n".join(["period,M1,CPI", *lines]) + "\n")
    return path


def test_the_command_on_quarters_agrees_with_the_analytics(macro, run):
    flags = ["--driver", "M1", "--response", "CPI", "--window", "4", "--shift", "8"]
    code, out, _ = run("outlook", macro, *flags, "--cells", "kept", "--json")
    answer = json.loads(out)
    assert code == 0
    assert answer["frequency"] == "quarterly"
    data = macrodata.load_pandas().data
    x, y = (100 * np.diff(np.log(data[name].to_numpy())) for name in ("m1", "cpi"))
    rules = {"window": 4, "shift": 8}
    path = implied_path(x, y, **rules, compounding="log", periods_per_year=4)
    assert [row["period"] for row in answer["path"]][::7] == ["2009-Q4", "2011-Q3"]
    np.testing.assert_allclose([r["mean"] for r in answer["path"]], path.window_mean, atol=1e-9)
    np.testing.assert_allclose([r["rate_12m"] for r in answer["path"]], path.yearly, atol=1e-9)
    means = path_fan(x, y, **rules, target=outlook_target("window", window=4, periods_per_year=4))
    low, high = means.band(answer["level"])
    np.testing.assert_allclose([r["low"] for r in answer["path"]], low, atol=1e-9)
    np.testing.assert_allclose([r["high"] for r in answer["path"]], high, atol=1e-9)
    target = outlook_target("yearly", window=4, periods_per_year=4)
    scores = backtest_scores(backtest(x, y, **rules, target=target, periods_per_year=4), RELATION)
    year = answer["backtest"]
    best = int(np.argmin(scores.benchmark_rmse[:, 3]))
    assert year["benchmark"] == scores.benchmarks[best]
    assert year["rmse"] == pytest.approx(scores.rmse[3], abs=1e-9)
    assert year["rmse_benchmark"] == pytest.approx(scores.benchmark_rmse[best, 3], abs=1e-9)
    assert year["dm_p"] == pytest.approx(scores.dm[best][3].p, abs=1e-9)
    assert year["coverage"] == pytest.approx(scores.coverage[1][3].share)
    assert year["rmse"] > year["rmse_benchmark"]  # narrow money says little of these prices
    assert "beat its best benchmark at" in answer["verdict"][0]


def test_the_command_writes_a_view_and_says_what_the_page_says(macro, tmp_path, run):
    target = tmp_path / "gap.csv"
    flags = ["--driver", "M1", "--response", "CPI", "--cells", "kept", "--last", "1985-Q4"]
    code, out, _ = run("outlook", macro, *flags, "--csv", target, "--view", "gap")
    assert code == 0
    assert out.startswith("M1, 4-quarter window, leading CPI by 8 quarters")
    assert "not a cause" in out
    assert rows_of(target.read_text())[-1][0] == "1985-Q4"


def test_as_of_a_period_uses_nothing_after_it(macro, run):
    flags = ["--driver", "M1", "--response", "CPI", "--cells", "kept", "--json"]
    code, out, _ = run("outlook", macro, *flags, "--as-of", "1990-Q2")
    answer = json.loads(out)
    assert (code, answer["origin"], answer["path"][0]["period"]) == (0, "1990-Q2", "1990-Q3")


def test_as_of_a_date_uses_the_vintages_of_that_date(tmp_path, run):
    kept = str(tmp_path / "w.sqlite")
    desk = Workspace(path=kept)
    desk.add(release(140, revised=0.01), "2020-01-15")
    desk.add(release(144), "2020-02-15")
    desk.close()
    flags = ["--driver", "Money", "--response", "Prices", "--window", "3", "--shift", "6"]
    flags += ["--cells", "kept", "--json", "--workspace", kept]
    now = json.loads(run("outlook", *flags)[1])
    then = json.loads(run("outlook", *flags, "--as-of", "2020-01-31")[1])
    assert (then["origin"], now["origin"]) == ("2019-08", "2019-12")
    assert (then["backtest"]["dates_from_vintages"], now["backtest"]["dates_from_vintages"]) == (
        0,
        5,
    )
    x, y = (100 * np.diff(np.log(series.values)) for series in release(140, revised=0.01).series)
    path = implied_path(x, y, window=3, shift=6)
    np.testing.assert_allclose([r["rate_1m"] for r in then["path"]], path.single, atol=1e-9)


def test_the_command_needs_no_files_and_refuses_in_one_sentence(run):
    short = ["--first", "2012-01", "--cells", "kept", "--window", "6", "--shift", "12"]
    code, out, err = run("outlook", *short, "--json")
    answer = json.loads(out)
    assert code == 0
    assert len(answer["path"]) == 12
    assert answer["backtest"]["dates"] > 24
    for arguments, words in (
        (["--driver", "Wages"], "no loaded series is named 'Wages'"),
        (["--scheme", "both"], "must be one of expanding, rolling"),
        (["--say", "up"], "name one with --workspace"),
        (["--supersedes", "1"], "goes with --say"),
    ):
        code, out, err = run("outlook", *arguments)
        assert code == 2
        assert words in err
        assert err.count("\n") == 1


def test_the_command_keeps_a_statement_and_scores_it_when_prints_arrive(tmp_path, run):
    kept = str(tmp_path / "w.sqlite")
    money, prices = economy(150)

    def file(n):
        path = tmp_path / "release.csv"
        rows = [
            f"{month},{float(m)!r},{float(p)!r}"
            for month, m, p in zip(
                money.periods[:n], money.values[:n], prices.values[:n], strict=True
            )
        ]
        path.write_text("\n".join(["period,Money,Prices", *rows]) + "\n")
        return str(path)

    flags = ["--driver", "Money", "--response", "Prices", "--window", "3", "--shift", "6"]
    flags += ["--cells", "kept", "--workspace", kept, "--json"]
    out = run("outlook", file(140), *flags, "--say", "Prices ease.")[1]
    first = json.loads(out)
    assert [one["outcomes"] for one in first["statements"]] == [0]
    out = run("outlook", file(144), *flags)[1]
    (one,) = json.loads(out)["statements"]
    assert (one["words"], one["origin"], one["outcomes"]) == ("Prices ease.", "2019-08", 4)
    growth = 100 * np.log(prices.values[12:] / prices.values[:-12])
    for h, row in enumerate(one["horizons"][:4], start=1):
        assert row["stated"] == pytest.approx(first["path"][h - 1]["rate_12m"], abs=1e-12)
        assert row["outcome"] == pytest.approx(growth[140 - 13 + h], abs=1e-9)
        low, high = first["path"][h - 1]["rate_12m_low"], first["path"][h - 1]["rate_12m_high"]
        assert row["inside"]["0.8"] == (low <= row["outcome"] <= high)
        assert (row["rank"] > 50) == (row["outcome"] > row["stated"])
    coverage = json.loads(out)["running_coverage"]["Prices"]
    assert [level["outcomes"] for level in coverage] == [4, 4, 4]
    inside = sum(row["inside"]["0.8"] for row in one["horizons"][:4])
    assert coverage[1]["inside"] == inside
    code, out, err = run("outlook", file(144), *flags, "--say", "No.", "--supersedes", "7")
    assert code == 2
    assert "there is no number 7" in err
