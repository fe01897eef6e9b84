"""Statements: what was said of coming periods, kept as it was said, and what came after it.

A statement is added to the workspace and never changed; a later one may say that it supersedes it.
"""

import json
import math
from collections.abc import Mapping
from dataclasses import dataclass, field, fields
from typing import Any

import numpy as np
import pandas as pd

from analytics.intervals import Fan
from analytics.series import FloatArray, read_only
from analytics.surface import locked
from app.intake.problems import plain_text
from app.reading.alerts import OUTLOOK, STATED, bound_name
from app.store import Store, now
from app.workspace_rows import period_of

LONGEST = 4000  # signs of words
NUMBERS, COUNTS = ("centre", "scale", "freedom"), ("ahead", "errors", "judged")
TARGET_OF = {"rate_1m": "single", "rate_12m": "yearly"}  # quantity of a rule -> stated path


class StatementError(ValueError):
    """A statement that cannot be kept; the text is one sentence for the user."""


@dataclass(frozen=True, eq=False)
class Statement:
    """What was said, with all that it was said from.

    Attributes
    ----------
    driver : tuple of str
        One name, or several where their paths were combined.
    response, frequency : str
        What it is about.
    window, shift : int
        The cell.
    compounding : str
        How one-period rates make a yearly one: log, percent, or mean of a rate.
    origin : str
        Last period that was observed, such as ``2026-10``.
    levels : tuple of float
        Of the intervals, such as 0.5, 0.8 and 0.95.
    paths : mapping of str to Fan
        Yearly, window and single, as in `analytics.outlook_target`, in percent.
    words : str
        The user's own.
    sources : tuple of (str, str, str)
        Name, fingerprint and last period of each series that it was made from.
    state : str
        The view as an address carries it.
    method, version : str
        Where the intervals come from; program.
    supersedes : int or None
        Number of the statement that this one takes the place of.
    id, at, day : int, str, str
        Number, moment in UTC and date; given when it is kept.
    """

    driver: tuple[str, ...]
    response: str
    frequency: str
    window: int
    shift: int
    compounding: str
    origin: str
    levels: tuple[float, ...]
    paths: Mapping[str, Fan]
    words: str
    sources: tuple[tuple[str, str, str], ...]
    state: str
    method: str = ""
    version: str = ""
    supersedes: int | None = None
    id: int = 0
    at: str = ""
    day: str = ""

    @property
    def start(self) -> pd.Period:
        """The origin as a period."""
        return period_of(self.frequency, self.origin)

    @property
    def horizon(self) -> int:
        """Periods ahead that it speaks of."""
        return max(fan.centre.size for fan in self.paths.values())

    def interval(self, target: str, level: float, period: pd.Period) -> tuple[float, float]:
        """Return what it says of one period; nan where it says nothing."""
        fan, ahead = self.paths.get(target), period.ordinal - self.start.ordinal
        if fan is None or not 1 <= ahead <= fan.centre.size:
            return math.nan, math.nan
        low, high = fan.band(level)
        return float(low[ahead - 1]), float(high[ahead - 1])


@dataclass(frozen=True, eq=False)
class Kept:
    """The statements of a workspace, oldest first, and a sentence on each that cannot be read."""

    statements: tuple[Statement, ...] = ()
    refused: tuple[str, ...] = ()
    successor: Mapping[int, int] = field(default_factory=dict)  # superseded -> by which


def keep_statement(store: Store, said: Statement, day: str) -> int:
    """Keep a statement from `day`, such as ``2026-11-12``; return its number.

    Raises
    ------
    StatementError
        It has no words or too many, or what it supersedes is not there or is superseded already.
    """
    words = "\n".join(plain_text(line, LONGEST + 1) for line in said.words.splitlines()).strip()
    if not words or len(words) > LONGEST:
        raise StatementError(
            f"a statement must have words, at most {LONGEST} signs of them, but got"
            f" {len(said.words)}"
        )
    content = _content(said) | {"words": words}
    with store.change() as db:
        if said.supersedes is not None:
            later = {}
            for row in db.execute("SELECT id, content FROM statements"):
                later[row["id"]] = _read(row["content"]).get("supersedes")
            if said.supersedes not in later:
                raise StatementError(
                    f"a statement must supersede one that is kept, but there is no number"
                    f" {said.supersedes}"
                )
            for number, earlier in later.items():
                if earlier == said.supersedes:
                    raise StatementError(
                        f"statement {earlier} is superseded by statement {number} already;"
                        " supersede that one"
                    )
        number = db.execute(
            "INSERT INTO statements (at, day, subject, state, content) VALUES (?, ?, ?, ?, ?)",
            (now(), day, f"outlook of {said.response}", said.state, json.dumps(content)),
        ).lastrowid
    return int(number or 0)


def kept_statements(store: Store) -> Kept:
    """Return all statements, superseded ones too."""
    with store.look() as db:
        rows = db.execute("SELECT * FROM statements ORDER BY id").fetchall()
    found, refused = [], []
    for row in rows:
        try:
            found.append(_statement(row))
        except (KeyError, TypeError, ValueError, AttributeError):
            refused.append(f"Statement {row['id']} of {row['day']} cannot be read.")
    successor = {one.supersedes: one.id for one in found if one.supersedes is not None}
    return Kept(tuple(found), tuple(refused), successor)


def stated_bounds(
    kept: Kept, response: str, period: pd.Period, formula: str = "percent"
) -> dict[str, float]:
    """Return the intervals stated for a print, under the names that alert rules look for.

    They are those of the newest statement of the response that was made before the period and
    still stands, in the formula of the reading.
    """
    for said in reversed(kept.statements):
        if said.response != response or said.id in kept.successor:
            continue
        start = said.start
        ahead = period.ordinal - start.ordinal
        if start.freqstr != period.freqstr or ahead < 1 or ahead > said.horizon:
            continue
        bounds = {}
        for quantity in STATED:
            for name in OUTLOOK:
                level = int(name.rpartition("_")[2]) / 100
                ends = said.interval(TARGET_OF[quantity], level, period)
                for side, end in zip(("low", "high"), ends, strict=True):
                    bounds[bound_name(quantity, name, side)] = _as(formula, end, said.compounding)
        return bounds
    return {}


def _as(formula: str, rate: float, compounding: str) -> float:
    """Turn a rate by one formula into the same rate by the other; a mean stays."""
    if compounding == "log" and formula == "percent":
        return 100.0 * math.expm1(rate / 100.0)
    if compounding == "percent" and formula == "log":
        return 100.0 * math.log1p(rate / 100.0) if rate > -100.0 else -math.inf
    return rate


def _content(said: Statement) -> dict[str, Any]:
    given = {"words", "paths", "state", "id", "at", "day"}  # elsewhere, or by the workspace
    plain = {one.name: getattr(said, one.name) for one in fields(said) if one.name not in given}
    paths = {}
    for target, fan in said.paths.items():
        bands = [fan.band(level) for level in said.levels]
        paths[target] = {
            **{part: _listed(getattr(fan, part)) for part in (*COUNTS, *NUMBERS)},
            "measured": [_listed(row) for row in fan.measured],
            "low": [_listed(low) for low, _ in bands],  # for those who read the file without us
            "high": [_listed(high) for _, high in bands],
        }
    return {**plain, "paths": paths}


def _listed(values: FloatArray) -> Any:
    """Return numbers as JSON has them: nothing where one is not finite."""
    return [value if math.isfinite(value) else None for value in values.tolist()]


def _statement(row: Any) -> Statement:
    content = _read(row["content"])
    levels = tuple(float(level) for level in content["levels"])
    paths = {}
    for target, path in content["paths"].items():
        parts = {part: read_only(path[part]) for part in (*NUMBERS, *COUNTS, "measured")}
        whole = {part: locked(parts[part].astype(np.int64)) for part in COUNTS}
        size = len(path["centre"])
        flat = {parts[part].shape for part in (*NUMBERS, *COUNTS)}
        if flat != {(size,)} or parts["measured"].shape != (len(levels), size):
            raise ValueError("a path must have as many scales as points")
        paths[str(target)] = Fan(**{**parts, **whole}, levels=levels)
    said = Statement(
        driver=tuple(str(name) for name in content["driver"]),
        response=str(content["response"]),
        frequency=str(content["frequency"]),
        window=int(content["window"]),
        shift=int(content["shift"]),
        compounding=str(content["compounding"]),
        origin=str(content["origin"]),
        levels=levels,
        paths=paths,
        words=str(content["words"]),
        sources=tuple((str(a), str(b), str(c)) for a, b, c in content["sources"]),
        state=row["state"],
        method=str(content.get("method", "")),
        version=str(content.get("version", "")),
        supersedes=content.get("supersedes"),
        id=row["id"],
        at=row["at"],
        day=row["day"],
    )
    if not (said.paths and said.start):
        raise ValueError("a statement must have a path")
    return said


def _read(text: str) -> dict[str, Any]:
    try:
        content = json.loads(text)
    except ValueError:
        return {}
    return content if isinstance(content, dict) else {}
