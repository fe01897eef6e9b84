"""What a brief shows from the workspace besides its series: statements, marked breaks, alert rules.

The recipe carries them, so that the same bytes come back where there is no such workspace; where
there is one, it is the one that counts, and what differs is told. Earlier vintages, which a
backtest uses, are only named by a fingerprint.
"""

import hashlib
from collections.abc import Collection, Iterable, Mapping
from dataclasses import dataclass, fields
from typing import Any

from app.brief.parts import Draft
from app.compute import Bridge
from app.kept_rules import rule_lines
from app.marks import Mark
from app.workspace import Workspace

SAYING = ("outlook", "reading")  # pages that show statements, or alerts by what they state


@dataclass(frozen=True)
class Said:
    """A statement as the workspace has it; `content` is JSON."""

    id: int
    at: str
    day: str
    subject: str
    state: str
    content: str

    @property
    def fingerprint(self) -> str:
        """Equal for equal statements."""
        parts = "\n".join((self.at, self.day, self.subject, self.state, self.content))
        return hashlib.sha256(parts.encode("utf-8", "surrogatepass")).hexdigest()[:16]


@dataclass(frozen=True)
class Past:
    """How many vintages a series has, and a fingerprint of their days and values."""

    series: str
    vintages: int
    fingerprint: str


@dataclass(frozen=True)
class Remembered:
    """What the brief shows from the workspace.

    Attributes
    ----------
    statements : tuple of Said
        Oldest first.
    marks : tuple of Mark
        Breaks of the series that are used.
    rules : tuple of str
        Alert rules, as they are written.
    past : tuple of Past
        Of the series of an outlook that have more than one vintage.
    """

    statements: tuple[Said, ...] = ()
    marks: tuple[Mark, ...] = ()
    rules: tuple[str, ...] = ()
    past: tuple[Past, ...] = ()


def remembered(draft: Draft, used: Collection[str], bridge: Bridge) -> Remembered:
    """Return what a draft shows from the workspace; `used` names its series."""
    pages = {part.page for part in draft.parts if part.kind != "words"}
    desk, said, rules = bridge.workspace, (), ()
    if pages & set(SAYING):
        with desk.statement_store.look() as db:
            rows = db.execute("SELECT * FROM statements ORDER BY id").fetchall()
        said = tuple(Said(*(row[item.name] for item in fields(Said))) for row in rows)
    if "reading" in pages:
        rules = rule_lines(desk.store)
    marks = tuple(mark for mark in desk.as_of().marks if mark.series in used)
    past = [_past(name, desk) for name in sorted(used)] if "outlook" in pages else []
    return Remembered(said, marks, rules, tuple(one for one in past if one.vintages > 1))


def _past(name: str, desk: Workspace) -> Past:
    found = desk.vintages(name)
    lines = "\n".join(f"{one.day}:{one.series.fingerprint}" for one in found)
    return Past(name, len(found), hashlib.sha256(lines.encode()).hexdigest()[:16])


def restore(before: Remembered, desk: Workspace) -> tuple[str, ...]:
    """Put what a recipe carries into a desk that is forgotten with the program.

    Returns a sentence on each thing that cannot be put there, such as a break of a series that the
    files lack.
    """
    refused = []
    with desk.statement_store.change() as db:
        there = {row["id"] for row in db.execute("SELECT id FROM statements")}
        db.executemany(
            "INSERT INTO statements (id, at, day, subject, state, content)"
            " VALUES (:id, :at, :day, :subject, :state, :content)",
            [vars(one) for one in before.statements if one.id not in there],
        )
    for mark in before.marks:
        try:
            desk.mark(mark.series, mark.period, mark.treatment, mark.note)
        except ValueError as error:
            refused.append(f"the break of {mark.series} at {mark.period} is not marked: {error}")
    usual = rule_lines(desk.store)
    with desk.store.change() as db:
        for line in dict.fromkeys((*usual, *before.rules)):
            db.execute(
                "INSERT INTO rules (rule, kept, at) VALUES (?, ?, '') ON CONFLICT (rule)"
                " DO UPDATE SET kept = excluded.kept",
                (line, int(line in before.rules)),
            )
    return tuple(refused)


def written(kept: Remembered) -> dict[str, Any]:
    """Return what a recipe carries, as TOML takes it."""
    return {
        "rules": list(kept.rules),
        "mark": [vars(mark) for mark in kept.marks],
        "past": [vars(one) for one in kept.past],
        "statement": [vars(one) for one in kept.statements],
    }


def read_remembered(found: Mapping[str, Any]) -> Remembered:
    """Read it back.

    Raises
    ------
    KeyError or TypeError
        A part lacks a field, or one is of another type.
    """
    rules = found["rules"]
    if not all(isinstance(line, str) for line in rules):
        raise TypeError("rules")
    return Remembered(
        tuple(Said(**_of(Said, one)) for one in found["statement"]),
        tuple(Mark(**_of(Mark, one)) for one in found["mark"]),
        tuple(rules),
        tuple(Past(**_of(Past, one)) for one in found["past"]),
    )


def _of(kind: type, values: Mapping[str, Any]) -> dict[str, Any]:
    taken = {name: values[name] for name in kind.__annotations__}
    for name, declared in kind.__annotations__.items():
        if type(taken[name]) is not declared or (declared is int and not 0 < taken[name] < 2**63):
            raise TypeError(name)
    return taken


def differences(before: Remembered, now: Remembered) -> list[str]:
    """Say what of the workspace differs from last time."""
    was = {one.id: one for one in before.statements}
    are = {one.id: one for one in now.statements}
    said = []
    for number in sorted(was.keys() | are.keys()):
        old, new = was.get(number), are.get(number)
        if new is None and old is not None:
            said.append(
                f"statement {number} of {old.day}: not in this workspace (fingerprint"
                f" {old.fingerprint})"
            )
        elif old is None and new is not None:
            said.append(f"statement {number} of {new.day}: new")
        elif old is not None and new is not None and old.fingerprint != new.fingerprint:
            said.append(
                f"statement {number}: another one in this workspace (fingerprint"
                f" {old.fingerprint} before, {new.fingerprint} now)"
            )
    came, went = ({one.series: one for one in each.past} for each in (now, before))
    said += [
        f"vintages of {name}, which the backtest uses: {_many(went.get(name))} before,"
        f" {_many(came.get(name))} now"
        for name in sorted(went.keys() | came.keys())
        if went.get(name) != came.get(name)
    ]
    said += _listed(_breaks(before.marks), _breaks(now.marks), "marked")
    return said + _listed(
        [f"alert rule {line}" for line in before.rules],
        [f"alert rule {line}" for line in now.rules],
        "kept",
    )


def _many(past: Past | None) -> str:
    return f"{past.vintages} (fingerprint {past.fingerprint})" if past else "the newest alone"


def _breaks(marks: Iterable[Mark]) -> list[str]:
    return [f"break of {one.series} at {one.period} ({one.treatment})" for one in marks]


def _listed(before: list[str], now: list[str], how: str) -> list[str]:
    return [
        *(f"{one}: no longer {how}" for one in before if one not in now),
        *(f"{one}: {how} since" for one in now if one not in before),
    ]
