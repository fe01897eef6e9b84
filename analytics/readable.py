"""What results share in a notebook: one short line to read, and a table."""

from collections.abc import Mapping
from dataclasses import fields, is_dataclass
from typing import Any

import numpy as np
import pandas as pd

from analytics.series import period_label

LONGEST = 60  # letters of a text that still belongs into the short line


class Readable:
    """A frozen result that shows itself in one line and gives its arrays as a table.

    Examples
    --------
    >>> from dataclasses import dataclass
    >>> @dataclass(frozen=True, eq=False)
    ... class Means(Readable):
    ...     months: np.ndarray
    ...     level: float
    >>> Means(np.array([1.0, 2.0]), 0.95)
    Means(months [2], level 0.95)
    >>> Means(np.array([1.0, 2.0]), 0.95).to_frame()["months"].tolist()
    [1.0, 2.0]
    """

    def __init_subclass__(cls, **options: Any) -> None:
        super().__init_subclass__(**options)
        if "__repr__" not in cls.__dict__:  # or the dataclass would write out every array
            cls.__repr__ = described  # type: ignore[method-assign]

    def to_frame(self) -> pd.DataFrame:
        """Return the arrays that have a value a row, on their periods; else one row of numbers."""
        own = {item.name: getattr(self, item.name) for item in fields(self) if _open(item.name)}  # type: ignore[arg-type]
        index = next((v for v in own.values() if isinstance(v, pd.PeriodIndex)), None)
        columns = {n: v for n, v in own.items() if isinstance(v, np.ndarray) and v.ndim == 1}
        if columns:
            sizes = [v.size for v in columns.values()]
            rows = len(index) if index is not None else max(sizes, key=sizes.count)
            kept = {n: v for n, v in columns.items() if v.size == rows}
            if kept:
                return pd.DataFrame(kept, index=index)
        single = {n: v for n, v in own.items() if isinstance(v, bool | int | float | str)}
        return pd.DataFrame([single])


def described(result: Any) -> str:
    """Return a result as one short line: its numbers, and how large its arrays are."""
    parts = [
        f"{item.name} {text}"
        for item in fields(result)
        if _open(item.name) and (text := _text(getattr(result, item.name)))
    ]
    return f"{type(result).__name__}({', '.join(parts)})"


def _open(name: str) -> bool:
    return not name.startswith("_")


def _text(value: Any) -> str:
    match value:
        case None:
            return ""
        case bool() | int() | np.integer():
            return str(value)
        case float() | np.floating():
            return f"{float(value):.4g}"
        case str():
            return value if len(value) <= LONGEST else ""
        case np.ndarray():
            return f"[{' x '.join(str(size) for size in value.shape)}]"
        case pd.Period():
            return period_label(value)
        case pd.PeriodIndex():
            return f"{period_label(value[0])} to {period_label(value[-1])}" if len(value) else ""
        case tuple() | list() if not hasattr(value, "_fields"):
            return f"({len(value)})"
        case tuple():
            return f"({', '.join(_text(each) for each in value)})"
        case Mapping():
            return f"({', '.join(str(key) for key in list(value)[:4])})"
        case _:
            return type(value).__name__ if is_dataclass(value) else ""
