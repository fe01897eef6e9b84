"""Write every file of this directory anew: ``python -m data_samples.generate [DIRECTORY]``."""

import csv
import sys
from collections.abc import Iterable, Sequence
from pathlib import Path

import numpy as np

from analytics.series import FloatArray, period_code
from data_samples.divisions import DIGITS, NAMES, YEARS, basket
from data_samples.economy import BASE_YEAR, BREAK_MONTH, MONTHS, QUARTERS, uldrevay
from data_samples.panel import PANEL_MONTHS, PlannedEconomy, panel

SEED = 2009

_OFFICE = "Uldrevay Office of Prices and Output (invented)"
_BANK = "Bank of Uldrevay (invented)"
_BASE = f"{BASE_YEAR} = 100"
_BREAK_NOTE = f"definition widened in {BREAK_MONTH}: the level jumps overnight"

# Name, kind, unit, adjustment, source, note and digits of the columns of economy_monthly.csv.
_MONTHLY = (
    ("Consumer prices", "index", _BASE, "no", _OFFICE, "chained from divisions.csv", DIGITS),
    ("Consumer prices, adjusted", "index", _BASE, "yes", _OFFICE, "all items", DIGITS),
    ("Broad money", "level", "million undrels", "yes", _BANK, "end of month", 1),
    ("Narrow money", "level", "million undrels", "no", _BANK, _BREAK_NOTE, 1),
    ("Policy rate", "rate", "percent a year", "no", _BANK, "end of month", 2),
    ("Unemployment rate", "rate", "percent", "yes", _OFFICE, "of the labour force", 1),
)


def write_files(directory: Path) -> None:
    """Make the invented economy and the panel from `SEED` and write them into `directory`."""
    seeds = np.random.SeedSequence(SEED).spawn(3)
    economy = uldrevay(np.random.default_rng(seeds[0]))
    prices = basket(np.random.default_rng(seeds[1]), economy.price_growth)
    months = [period_code(month) for month in MONTHS]
    columns = (
        prices.all_items,
        prices.adjusted,
        economy.broad,
        economy.narrow,
        economy.policy_rate,
        economy.unemployment,
    )
    _write_wide(
        directory / "economy_monthly.csv",
        ["period", *(series[0] for series in _MONTHLY)],
        months,
        columns,
        [series[6] for series in _MONTHLY],
    )
    _write_wide(
        directory / "divisions.csv",
        ["period", *NAMES],
        months,
        prices.indices.T,
        [DIGITS] * len(NAMES),
    )
    _write_wide(
        directory / "weights.csv",
        ["year", *NAMES],
        [str(year) for year in YEARS],
        prices.weights.T,
        [1] * len(NAMES),
    )
    _write_wide(
        directory / "output_quarterly.csv",
        ["period", "Real output"],
        [period_code(quarter) for quarter in QUARTERS],
        [economy.output],
        [2],
    )
    _write(directory / "series.csv", _SERIES_HEADER, _series_rows())
    economies = panel(np.random.default_rng(seeds[2]))
    _write(directory / "panel.csv", _PANEL_HEADER, _panel_rows(economies))
    _write(directory / "truth.csv", _TRUTH_HEADER, _truth_rows(economies))


_PANEL_HEADER = ("economy", "period", "series", "value")
_TRUTH_HEADER = ("economy", "relation", "lag", "slope", "baseline", "spread", "trait")
_SERIES_HEADER = ("file", "name", "kind", "unit", "adjustment", "source", "note")


def _series_rows() -> Iterable[Sequence[str]]:
    """One row for each series of each file: what it is, in the words of `Series`."""
    for name, kind, unit, adjustment, source, note, _ in _MONTHLY:
        yield "economy_monthly.csv", name, kind, unit, adjustment, source, note
    for name in NAMES:
        yield "divisions.csv", name, "index", _BASE, "no", _OFFICE, "weights in weights.csv"
    yield "output_quarterly.csv", "Real output", "index", _BASE, "yes", _OFFICE, "volume"
    source = "statistical offices of thirty invented economies"
    note = "one for each economy"
    yield "panel.csv", "Broad money", "level", "million of currency", "yes", source, note
    yield "panel.csv", "Consumer prices", "index", "1986-11 = 100", "yes", source, note


def _panel_rows(economies: Iterable[PlannedEconomy]) -> Iterable[Sequence[str]]:
    """Long form: economy by economy, series by series, month by month."""
    months = [period_code(month) for month in PANEL_MONTHS]
    for plan, money, prices in economies:
        for month, value in zip(months, money, strict=True):
            yield plan.economy, month, "Broad money", f"{value:.1f}"
        for month, value in zip(months, prices, strict=True):
            yield plan.economy, month, "Consumer prices", f"{value:.3f}"


def _truth_rows(economies: Iterable[PlannedEconomy]) -> Iterable[Sequence[str]]:
    """State what each economy was made from; without a relation lag and slope are empty."""
    for plan, _, _ in economies:
        planted = (str(plan.lag), f"{plan.slope:.2f}", f"{plan.baseline:.2f}", str(plan.spread))
        related = plan.slope != 0.0
        yield (
            plan.economy,
            "yes" if related else "no",
            *(planted if related else ("", "", "", "")),
            plan.trait,
        )


def _write_wide(
    path: Path,
    header: Sequence[str],
    periods: Sequence[str],
    columns: Iterable[FloatArray],
    digits: Sequence[int],
) -> None:
    """Write a table with one row a period and one column a series."""
    texts = [[f"{v:.{d}f}" for v in column] for column, d in zip(columns, digits, strict=True)]
    _write(path, header, zip(periods, *texts, strict=True))


def _write(path: Path, header: Sequence[str], rows: Iterable[Sequence[str]]) -> None:
    """Write a CSV file in UTF-8 with line feeds, whatever the machine."""
    with path.open("w", encoding="utf-8", newline="") as file:
        writer = csv.writer(file, lineterminator="\n")
        writer.writerow(header)
        writer.writerows(rows)


if __name__ == "__main__":
    write_files(Path(sys.argv[1]) if len(sys.argv) > 1 else Path(__file__).parent)
