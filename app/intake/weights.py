"""Files of weights: a row a year and a column a component, or a row a weight.

Weights are read as any table is and kept as annual series named "Weight of ...", so that they have
vintages as prices have.
"""

import re
from collections.abc import Iterable, Sequence
from dataclasses import replace
from pathlib import PurePath

import numpy as np
import pandas as pd

from analytics.series import Series
from analytics.weights import TOTALS, WeightTable
from app.intake.problems import Problem, counted, refusal

PREFIX = "Weight of "
UNIT = "weight"
_HEADER = {  # words of a long header, and what the reader of tables calls them
    "period": ("period", "year", "date", "time", "time_period"),
    "series": ("series", "component", "name", "item", "division", "group", "code"),
    "value": ("weight", "weights", "share"),
}
_CELL = re.compile(r"[^,;\t]+")


def is_weight(series: Series) -> bool:
    """Tell whether a series holds the weights of a component."""
    return series.unit == UNIT and series.name.startswith(PREFIX)


def recognised(file: str, series: Sequence[Series]) -> tuple[Series, ...]:
    """Return the series of a file, as weights where they are weights.

    Weights are at least two annual series in a file with "weight" in its name, or none negative
    and with rows that sum to 1, 100 or 1000.

    Raises
    ------
    IntakeError
        A weight of a file with "weight" in its name is negative; as series of their own, they
        would take the place of the components in view.
    """
    if len(series) < 2 or all(map(is_weight, series)):
        return tuple(series)
    table = _table(series)
    if table is None:
        return tuple(series)
    if "weight" in PurePath(file).stem.lower():
        _refuse_negative(file, series)
        return tuple(_as_weight(one) for one in series)
    sums = _sums(table).to_numpy()
    even = any(np.all(np.abs(sums / total - 1.0) <= 0.002) for total in TOTALS)
    if not even or table.min(axis=None) < 0:
        return tuple(series)
    return tuple(_as_weight(one) for one in series)


def weight_series(
    file: str, series: Sequence[Series], problems: Iterable[Problem] = ()
) -> tuple[Series, ...]:
    """Return the series of a file that is to be weights.

    Raises
    ------
    IntakeError
        They are not annual, one is negative, or a year has none; one sentence.
    """
    for problem in problems:
        if problem.severity == "error":
            raise refusal(
                file,
                f"weights must all be read, but {problem.message}",
                row=problem.row,
                column=problem.column,
            )
    if not series:
        raise refusal(file, "must hold weights, but holds no series")
    for one in series:
        name = one.name.removeprefix(PREFIX)
        if one.frequency != "annual":
            raise refusal(
                file,
                "a row of weights must begin with its year, such as 2024, but the file is"
                f" {one.frequency}",
                column=name,
            )
    _refuse_negative(file, series)
    empty = [year for year, total in _sums(_table(series)).items() if not total > 0]
    if empty:
        raise refusal(
            file,
            "the weights of a year must sum to more than 0, but those of"
            f" {counted(str(empty[0]), len(empty) - 1, 'year')} do not",
        )
    return tuple(_as_weight(one) for one in series)


def weight_table(series: Iterable[Series], source: str = "") -> WeightTable | None:
    """Return the weights among some series as a table; None where there are none.

    Years without any weight between the first and the last are left out.
    """
    table = _table([one for one in series if is_weight(one)])
    if table is None:
        return None
    table = table[table.sum(axis=1) > 0]
    if table.empty:
        return None
    names = tuple(str(name).removeprefix(PREFIX) for name in table.columns)
    return WeightTable(tuple(int(year) for year in table.index), names, table.to_numpy(), source)


def canonical(text: str) -> str:
    r"""Return a long file of weights under the header that the reader of tables knows.

    Year, component and weight become period, series and value; another file stays as it is.

    Examples
    --------
    >>> canonical("Year,Component,Weight\n2024,Food,600\n")
    'period,series,value\n2024,Food,600\n'
    """
    start = 0
    for line in text[:100_000].splitlines(keepends=True)[:20]:
        words = [cell.strip().strip('"').strip().lower() for cell in _CELL.findall(line)]
        known = [next((new for new, old in _HEADER.items() if word in old), None) for word in words]
        if len(known) == 3 and set(known) == set(_HEADER):
            separator = next((sign for sign in ("\t", ";") if sign in line), ",")
            header = separator.join(str(word) for word in known) + "\n"
            return text[:start] + header + text[start + len(line) :]
        start += len(line)
    return text


def _refuse_negative(file: str, series: Sequence[Series]) -> None:
    for one in series:
        low = np.flatnonzero(one.values < 0)
        if low.size:
            raise refusal(
                file,
                f"a weight must not be negative, but that of {one.first.year + int(low[0])} is"
                f" {one.values[low[0]]:g}",
                column=one.name.removeprefix(PREFIX),
            )


def _as_weight(series: Series) -> Series:
    name = series.name if series.name.startswith(PREFIX) else PREFIX + series.name
    return replace(series, name=name, kind="level", unit=UNIT, adjustment="unknown")


def _sums(table: pd.DataFrame) -> pd.Series:
    """Sum of each year that has any weight."""
    return table.dropna(how="all").sum(axis=1)


def _table(series: Sequence[Series]) -> pd.DataFrame | None:
    """Lay annual series side by side by year; None where one is not annual or there is none."""
    if not series or any(one.frequency != "annual" for one in series):
        return None
    firsts = [one.first.year for one in series]
    last = max(first + one.values.size for first, one in zip(firsts, series, strict=True))
    values = np.full((last - min(firsts), len(series)), np.nan)
    for column, (first, one) in enumerate(zip(firsts, series, strict=True)):
        start = first - min(firsts)
        values[start : start + one.values.size, column] = one.values
    return pd.DataFrame(
        values, index=range(min(firsts), last), columns=[one.name for one in series]
    )
