"""The components of the Breadth page in order: rows of the table, and the largest parts."""

from dataclasses import dataclass
from typing import Any

import numpy as np

from analytics.series import FloatArray
from app.breadth.bridge import Breadth
from app.breadth.core import short_name
from app.words import signed

TOP_ROWS = 40  # rows of the table before the rest is summed up
TOP_BARS = 14
TOP_PARTS = 6


@dataclass(frozen=True)
class Row:
    """One component at the print; nan where a number does not exist.

    Attributes
    ----------
    name : str
        As loaded.
    weight : float
        Effective weight, percent.
    rate, rate_1m : float
        Percent over the span and over one period.
    rank : float
        Of `rate` in the component's own history, 0 to 100.
    points, points_1m : float
        Contributions in percentage points.
    left_out : bool
        Whether the exclusion measure leaves it out.
    """

    name: str
    weight: float
    rate: float
    rate_1m: float
    rank: float
    points: float
    points_1m: float
    left_out: bool


def rows(shown: Breadth) -> list[Row]:
    """Return every component in the order of the state; what has no number comes last."""
    k = len(shown.names)
    none = np.full(k, np.nan)
    found = shown.weighted
    columns = [
        100.0 * found.effective[-1] if found else none,
        shown.rates[-1],
        shown.rates_1[-1],
        shown.ranks[-1],
        found.points[-1] if found else none,
        found.points_1[-1] if found else none,
    ]
    listed = [
        Row(name, *(float(column[i]) for column in columns), bool(shown.left_out[i]))
        for i, name in enumerate(shown.names)
    ]
    column, _, way = shown.state.sort.rpartition("-")
    if column == "name":
        return sorted(listed, key=lambda row: row.name.casefold(), reverse=way == "down")
    sign = -1.0 if way == "down" else 1.0

    def place(row: Row) -> tuple[bool, float]:
        value: Any = getattr(row, column)
        return bool(np.isnan(value)), 0.0 if np.isnan(value) else sign * value

    return sorted(listed, key=place)


def bars(shown: Breadth) -> tuple[list[str], FloatArray, str]:
    """Return names and points of the bars, and what the components without a bar gave.

    All components, or of many those with the largest points by size, in order.
    """
    assert shown.weighted is not None
    points = np.nan_to_num(shown.weighted.points[-1])
    order = np.argsort(-points, kind="stable").tolist()
    if len(order) > TOP_BARS + 1:
        largest = set(np.argsort(-np.abs(points), kind="stable")[:TOP_BARS].tolist())
        order = [i for i in order if i in largest]
    names = _unique([short_name(shown.names[i]) for i in order], order, shown)
    rest = len(points) - len(order)
    words = ""
    if rest:
        gave = signed(float(points.sum() - points[order].sum()))
        words = f"Bars are the {len(order)} largest; {_others(rest)} give {gave} together."
    return names, points[order], words


def parts(shown: Breadth, values: FloatArray) -> dict[str, FloatArray]:
    """Return the columns of the components that gave most in what is drawn, and the rest summed up.

    `values` has shape (n, K); what is returned is cut to the periods drawn. Every chart takes the
    same components, so that a colour is one component.
    """
    assert shown.weighted is not None
    drawn = np.nan_to_num(values[shown.drawn])
    absent = np.isnan(values[shown.drawn]).all(axis=1)
    size = np.abs(np.nan_to_num(shown.weighted.points[shown.drawn])).mean(axis=0)
    if len(shown.names) <= TOP_PARTS + 1:
        kept = list(range(len(shown.names)))
    else:
        kept = np.argsort(-size, kind="stable")[:TOP_PARTS].tolist()
    names = _unique([short_name(shown.names[i]) for i in kept], kept, shown)
    found = dict(zip(names, drawn[:, kept].T, strict=True))
    if len(kept) < len(shown.names):
        others = np.delete(drawn, kept, axis=1).sum(axis=1)
        found[_others(len(shown.names) - len(kept))] = others
    return {name: np.where(absent, np.nan, column) for name, column in found.items()}


def strip_order(shown: Breadth) -> list[int]:
    """Return the components in the order of the strip: largest contribution, else rate, on top."""
    values = shown.weighted.points[-1] if shown.weighted else shown.rates[-1]
    return np.argsort(-np.nan_to_num(values, nan=-np.inf), kind="stable").tolist()


def _unique(names: list[str], places: list[int], shown: Breadth) -> list[str]:
    """Return short names, or the whole ones where two would be the same."""
    if len(set(names)) == len(names):
        return names
    return [shown.names[i] for i in places]


def _others(count: int) -> str:
    return f"the other {count}"
