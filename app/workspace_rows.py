"""Series as rows of a workspace, there and back without losing a bit."""

import re
import sqlite3
from collections.abc import Mapping
from typing import Any

import numpy as np
import pandas as pd

from analytics.series import Series, period_code
from app.intake.problems import quoted
from app.store import WorkspaceError

_CODE = re.compile(r"([0-9]{4,})(?:-(0[1-9]|1[0-2])|-Q([1-4]))?")


def period_of(frequency: str, code: str) -> pd.Period:
    """Read a period as `analytics.series.period_code` writes it.

    Raises
    ------
    ValueError
        The code is none, or is of another frequency.
    """
    match = _CODE.fullmatch(code)
    if match is not None:
        year, month, quarter = (int(part) if part else None for part in match.groups())
        if frequency == "monthly" and month:
            return pd.Period(year=year, month=month, freq="M")
        if frequency == "quarterly" and quarter:
            return pd.Period(year=year, quarter=quarter, freq="Q-DEC")
        if frequency == "annual" and not month and not quarter:
            return pd.Period(year=year, freq="Y-DEC")
    raise ValueError(f"a period must be {frequency}, but got {quoted(code)}")


def content_of(series: Series) -> bytes:
    """Return the values of a series as they are stored: little-endian 64-bit floats, one nan."""
    return np.where(np.isnan(series.values), np.nan, series.values).astype("<f8").tobytes()


def add_member(db: sqlite3.Connection, load: int | None, place: int, series: Series) -> None:
    """Write a series of a load; a content that is there already is not written again."""
    key = (series.name, series.fingerprint)
    db.execute(
        "INSERT INTO vintages (series, fingerprint, frequency, kind, first, content)"
        " VALUES (?, ?, ?, ?, ?, ?) ON CONFLICT (series, fingerprint) DO NOTHING",
        (*key, series.frequency, series.kind, period_code(series.first), content_of(series)),
    )
    db.execute(
        "INSERT INTO members SELECT ?, ?, id, ?, ?, ? FROM vintages"
        " WHERE series = ? AND fingerprint = ?",
        (load, place, series.unit, series.adjustment, series.source, *key),
    )


def read_series(row: Mapping[str, Any] | sqlite3.Row, said: Mapping[str, Any]) -> Series:
    """Return the series of a row; `said` gives its kind, unit and adjustment.

    Raises
    ------
    WorkspaceError
        The row holds no series.
    """
    try:
        return Series(
            row["series"],
            period_of(row["frequency"], row["first"]),
            np.frombuffer(row["content"], dtype="<f8"),
            source=row["source"],
            **said,
        )
    except ValueError as error:
        raise WorkspaceError(
            f"the vintage of {row['series']!r} in the workspace is damaged: {error}"
        ) from error
