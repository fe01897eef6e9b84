"""The files of data_samples, read as a stranger would, against the truth they were made from.

Only the first test runs the generator. All others read the files with pandas and use formulas
written out here or in scipy and statsmodels, none of the project's own estimators.
"""

from pathlib import Path

import numpy as np
import pandas as pd
import pytest
import scipy.signal
import scipy.stats
from statsmodels.regression.linear_model import OLS

import data_samples
from analytics.series import Series
from data_samples.generate import write_files

FOLDER = Path(data_samples.__file__).parent
FILES = (
    "economy_monthly.csv",
    "divisions.csv",
    "weights.csv",
    "output_quarterly.csv",
    "series.csv",
    "panel.csv",
    "truth.csv",
)
LAG, SLOPE, BASELINE = 22, 0.55, 0.10
WINDOWS = range(12, 25)


def read(name: str) -> pd.DataFrame:
    table = pd.read_csv(FOLDER / name, index_col=0)
    table.index = table.index.astype(str)
    return table


def growth(values: pd.Series) -> np.ndarray:
    return 100.0 * np.diff(np.log(values.to_numpy()))


def smoothed(values: np.ndarray, window: int) -> np.ndarray:
    return np.array([values[i : i + window].mean() for i in range(values.size - window + 1)])


def cell(driver: np.ndarray, response: np.ndarray, window: int, shift: int):
    """Driver now and response `shift` months later, both averaged."""
    x, y = smoothed(driver, window), smoothed(response, window)
    return x[: x.size - shift], y[shift:]


def correlations(driver: np.ndarray, response: np.ndarray, window: int) -> np.ndarray:
    """At shifts 0, 1, ... 48."""
    x, y = smoothed(driver, window), smoothed(response, window)
    return np.array([np.corrcoef(x[: x.size - s], y[s:])[0, 1] for s in range(49)])


@pytest.fixture(scope="module")
def economy() -> pd.DataFrame:
    return read("economy_monthly.csv")


@pytest.fixture(scope="module")
def money_and_prices(economy) -> tuple[np.ndarray, np.ndarray]:
    return growth(economy["Broad money"]), growth(economy["Consumer prices, adjusted"])


@pytest.fixture(scope="module")
def panel() -> pd.DataFrame:
    return pd.read_csv(FOLDER / "panel.csv")


@pytest.fixture(scope="module")
def panel_growth(panel) -> dict[str, tuple[np.ndarray, np.ndarray]]:
    wide = panel.pivot(index="period", columns=["economy", "series"], values="value")
    return {
        economy: (growth(wide[economy, "Broad money"]), growth(wide[economy, "Consumer prices"]))
        for economy in panel["economy"].unique()
    }


@pytest.fixture(scope="module")
def truth() -> pd.DataFrame:
    return pd.read_csv(FOLDER / "truth.csv", index_col="economy", keep_default_na=False)


# The files themselves


def test_the_seed_rebuilds_every_file_to_the_byte(tmp_path):
    write_files(tmp_path)
    assert sorted(path.name for path in tmp_path.iterdir()) == sorted(FILES)
    for name in FILES:
        assert (tmp_path / name).read_bytes() == (FOLDER / name).read_bytes(), name


def test_files_are_utf8_with_line_feeds_and_small():
    whole = [(FOLDER / name).read_bytes() for name in FILES]
    assert all(b"\r" not in content and content.endswith(b"\n") for content in whole)
    assert sum(len(content) for content in whole) < 6_000_000


@pytest.mark.parametrize(
    ("name", "first", "last", "rows"),
    [
        ("economy_monthly.csv", "1960-01", "2026-10", 802),
        ("divisions.csv", "1960-01", "2026-10", 802),
        ("weights.csv", "1960", "2026", 67),
        ("output_quarterly.csv", "1960-Q1", "2026-Q3", 267),
    ],
)
def test_calendars_have_no_gap(name, first, last, rows):
    table = read(name)
    assert (table.index[0], table.index[-1], len(table)) == (first, last, rows)
    assert table.index.is_unique
    assert table.index.is_monotonic_increasing
    assert table.notna().all(axis=None)


def test_every_series_is_described_in_the_words_of_series(panel):
    described = pd.read_csv(FOLDER / "series.csv", keep_default_na=False)
    for name in ("economy_monthly.csv", "divisions.csv", "output_quarterly.csv"):
        assert described.loc[described["file"] == name, "name"].tolist() == [*read(name).columns]
    in_panel = described.loc[described["file"] == "panel.csv", "name"]
    assert in_panel.tolist() == panel["series"].unique().tolist()
    for row in described.itertuples():
        series = Series(
            row.name,
            pd.Period("2000-01", "M"),
            [1.0],
            kind=row.kind,
            unit=row.unit,
            adjustment=row.adjustment,
            source=row.source,
        )
        assert series.unit
        assert "invented" in series.source


# Money and prices


def test_peak_of_the_wide_windows_is_near_the_planted_lag(money_and_prices):
    for window in WINDOWS:
        peak = correlations(*money_and_prices, window)
        assert abs(int(peak.argmax()) - LAG) <= 3, window
        assert 0.70 <= peak.max() <= 0.86, window


def test_month_to_month_the_relation_is_faint(money_and_prices):
    monthly = correlations(*money_and_prices, 1)
    assert monthly.max() < 0.55
    assert monthly[0] < 0.3


def test_swapped_sides_show_no_such_lead(money_and_prices):
    money, prices = money_and_prices
    assert correlations(prices, money, 18)[5:].max() < 0.4


def test_slope_and_baseline_come_back(money_and_prices):
    for window in WINDOWS:
        driver, response = cell(*money_and_prices, window, LAG)
        fit = scipy.stats.linregress(driver, response)
        assert fit.slope == pytest.approx(SLOPE, abs=0.05), window
        assert fit.intercept == pytest.approx(BASELINE, abs=0.05), window


def test_monthly_price_growth_is_closer_to_laplace_than_to_normal(money_and_prices):
    # Common practice, no source; likelihoods of scipy.stats at its own maximum-likelihood fits.
    prices = money_and_prices[1]
    laplace, normal = (
        law.logpdf(prices, *law.fit(prices)).sum()
        for law in (scipy.stats.laplace, scipy.stats.norm)
    )
    assert laplace > normal + 10


@pytest.mark.parametrize(
    ("money", "prices"),
    [("1967-01/1974-01", "1968-11/1975-11"), ("1980-05/1987-03", "1982-03/1989-01")],
)
def test_great_inflations_follow_the_episodes_of_money(economy, money, prices):
    for name, span, rest in (
        ("Broad money", money, 4.5),
        ("Consumer prices, adjusted", prices, 3.2),
    ):
        first, last = span.split("/")
        inside = growth(economy.loc[first:last, name]).mean() * 12
        assert inside > 1.6 * rest, name
        assert growth(economy.loc["1990-01":"2019-12", name]).mean() * 12 == pytest.approx(
            rest, abs=0.5
        )


def test_late_surge_reaches_prices_about_two_years_later(economy):
    rate = 100.0 * np.log(economy[["Broad money", "Consumer prices, adjusted"]]).diff(12)
    late = rate.loc["2020-01":]
    assert "2021-03" <= late["Broad money"].idxmax() <= "2022-03"
    assert "2022-10" <= late["Consumer prices, adjusted"].idxmax() <= "2024-02"


# Season, break, rates


def seasonal_p(values: pd.Series) -> float:
    """Kruskal-Wallis p of growth by calendar month, the yearly mean taken off."""
    rate = growth(values)[: 12 * 66].reshape(66, 12)
    rate = rate - rate.mean(axis=1, keepdims=True)
    return scipy.stats.kruskal(*rate.T).pvalue


def test_only_unadjusted_series_have_a_season(economy):
    assert seasonal_p(economy["Consumer prices"]) < 1e-9
    assert seasonal_p(economy["Narrow money"]) < 1e-9
    assert seasonal_p(economy["Consumer prices, adjusted"]) > 0.01
    assert seasonal_p(economy["Broad money"]) > 0.01


def test_season_leaves_yearly_rates_alone(economy):
    prices = np.log(economy[["Consumer prices", "Consumer prices, adjusted"]]).diff(12)
    gap = 100.0 * (prices.iloc[:, 0] - prices.iloc[:, 1])
    assert gap.abs().max() < 0.2


def test_narrow_money_breaks_once_in_july_1987(economy):
    rate = pd.Series(growth(economy["Narrow money"]), index=economy.index[1:])
    assert rate.idxmax() == "1987-07"
    assert rate["1987-07"] == pytest.approx(100 * np.log(1.30), abs=2.5)
    assert rate.drop("1987-07").abs().max() < 8


def test_rates_are_plausible_and_move_as_stated(economy):
    policy, unemployment = economy["Policy rate"], economy["Unemployment rate"]
    assert policy.min() >= 0.25
    assert (policy * 4 % 1 == 0).all()
    assert unemployment.between(1.8, 15.0).all()


# Divisions and weights


def test_weights_sum_to_a_thousand():
    tenths = (read("weights.csv") * 10).round().astype(int)
    assert (tenths.sum(axis=1) == 10_000).all()
    assert (tenths > 0).all(axis=None)


def test_divisions_chained_at_december_are_all_items(economy):
    divisions, weights = read("divisions.csv"), read("weights.csv")
    assert [*divisions.columns] == [*weights.columns]
    level, link_level, link = {}, 1.0, divisions.iloc[0]
    for year, weight in weights.iterrows():
        for month, prices in divisions.loc[f"{year}-01" : f"{year}-12"].iterrows():
            level[month] = link_level * float((weight * prices / link).sum()) / 1000.0
        link, link_level = prices, level[month]
    chained = pd.Series(level)
    chained *= 100.0 / chained["2015-01":"2015-12"].mean()
    assert (chained - economy["Consumer prices"]).abs().max() <= 0.0005 + 1e-9


def test_weights_belong_to_the_prices_of_december():
    # A weight is the slowly drifting share of the year before, revalued from that year's mean
    # prices to its December: once each division's straight line is taken off, log weights move
    # one for one with the log of December over mean.
    divisions, weights = read("divisions.csv"), np.log(read("weights.csv").iloc[1:])
    yearly = divisions.groupby(divisions.index.str[:4])
    update = np.log(yearly.last() / yearly.mean()).iloc[:-1]

    def detrended(table: pd.DataFrame) -> np.ndarray:
        within_year = table.to_numpy() - table.mean(axis=1).to_numpy()[:, None]
        return scipy.signal.detrend(within_year, axis=0).ravel()

    fit = scipy.stats.linregress(detrended(update), detrended(weights))
    assert fit.slope == pytest.approx(1.0, abs=0.05)
    assert fit.rvalue > 0.9


def test_base_year_averages_a_hundred(economy):
    for prices in (economy["Consumer prices"], economy["Consumer prices, adjusted"]):
        assert prices["2015-01":"2015-12"].mean() == pytest.approx(100.0, abs=0.0005)
    assert read("divisions.csv")["2015-01":"2015-12"].mean().to_numpy() == pytest.approx(
        np.full(12, 100.0), abs=0.0005
    )
    output = read("output_quarterly.csv")["Real output"]
    assert output["2015-Q1":"2015-Q4"].mean() == pytest.approx(100.0, abs=0.005)


# Panel


def test_panel_is_whole(panel, truth):
    assert panel["economy"].unique().tolist() == truth.index.tolist()
    assert len(truth) == 30
    counts = panel.groupby(["economy", "series"])["period"].agg(["count", "nunique", "min", "max"])
    assert len(counts) == 60
    assert (counts[["count", "nunique"]] == 480).all(axis=None)
    assert set(counts["min"]) == {"1986-11"}
    assert set(counts["max"]) == {"2026-10"}
    assert panel["value"].gt(0).all()


def test_panel_truth_is_both_yes_and_no(truth):
    assert truth["relation"].value_counts().to_dict() == {"yes": 18, "no": 12}
    assert (truth.loc[truth["relation"] == "no", ["lag", "slope"]] == "").all(axis=None)


def test_panel_peaks_where_a_relation_was_planted(panel_growth, truth):
    for economy, row in truth[truth["relation"] == "yes"].iterrows():
        peak = int(correlations(*panel_growth[economy], 12).argmax())
        assert abs(peak - int(row["lag"])) <= 3, economy


def test_panel_slopes_come_back(panel_growth, truth):
    # Outside: statsmodels, heteroskedasticity- and autocorrelation-consistent errors, 12 lags.
    for economy, row in truth[truth["relation"] == "yes"].iterrows():
        money, prices = panel_growth[economy]
        spread, lag = int(row["spread"]), int(row["lag"])
        effect = smoothed(money, spread)[: prices.size - lag - spread // 2 - spread // 2]
        response = prices[lag + spread // 2 :][: effect.size]
        design = np.column_stack((np.ones(effect.size), effect[: response.size]))
        fit = OLS(response, design).fit(cov_type="HAC", cov_kwds={"maxlags": 12})
        for estimate, error, planted in zip(
            fit.params, fit.bse, (row["baseline"], row["slope"]), strict=True
        ):
            assert abs(estimate - float(planted)) < 4 * error, economy


def test_panel_has_no_link_where_none_was_planted(panel_growth, truth):
    # After both sides lose their own autocorrelation, the best of 97 correlations stays below the
    # two-sided normal bound at 1 in 12 x 97 x 20.
    bound = scipy.stats.norm.isf(0.5 / (12 * 97 * 20))

    def whitened(values: np.ndarray) -> np.ndarray:
        centred = values - values.mean()
        return centred[1:] - (centred[1:] @ centred[:-1]) / (centred @ centred) * centred[:-1]

    for economy in truth.index[truth["relation"] == "no"]:
        x, y = (whitened(values) for values in panel_growth[economy])
        for shift in range(-36, 61):
            early, late = (x, y) if shift >= 0 else (y, x)
            n = x.size - abs(shift)
            r = np.corrcoef(early[:n], late[abs(shift) :])[0, 1]
            assert abs(r) * np.sqrt(n) < bound, (economy, shift)


def test_panel_has_one_hyperinflation_and_one_deflation(panel_growth, truth):
    # Cagan (1956): a hyperinflation is a rise of prices above 50 percent in a month.
    cagan = {
        economy: int((prices > 100 * np.log(1.5)).sum())
        for economy, (_, prices) in panel_growth.items()
    }
    assert {economy for economy, months in cagan.items() if months} == {"Istramunde"}
    assert cagan["Istramunde"] >= 12
    assert truth.loc["Istramunde", "trait"] == "hyperinflation"
    falling = {economy for economy, (_, prices) in panel_growth.items() if prices.mean() < 0}
    assert falling == {"Nordruelle"}
    assert truth.loc["Nordruelle", "trait"] == "deflation"
