"""Kinds of fields that a state has: how each is labelled, read from text and checked."""

import datetime
import re
from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

NAME = r"(?=\S)[^\x00-\x1f\x7f-\x9f\ud800-\udfff]{1,200}(?<=\S)"
ONE_PERIOD = r"(?!0000)[0-9]{4}(-(0[1-9]|1[0-2])|-Q[1-4])?"
PERIOD = rf"({ONE_PERIOD})?"
RANGE = r"(-?[0-9]{1,3}:-?[0-9]{1,3})?"
SPAN = rf"({ONE_PERIOD}:{ONE_PERIOD})?"
SPANS = rf"({ONE_PERIOD}:{ONE_PERIOD}(,{ONE_PERIOD}:{ONE_PERIOD}){{0,9}})?"
CELL = r"([1-9][0-9]?:-?[0-9]{1,2})?"
NAMES = r"((?=\S)[^\x00-\x1f\x7f-\x9f\ud800-\udfff]{1,4000}(?<=\S))?"


class StateError(ValueError):
    """A value that a field of the state refuses; the text is one sentence for the user."""


@dataclass(frozen=True, kw_only=True)
class FieldKind:
    """How one field is labelled, read from text and checked."""

    label: str
    help: str
    display: bool = False

    def read(self, text: str) -> Any:
        """Turn the text of an address or a flag into the field's value."""
        return text.strip()

    def write(self, value: Any) -> str:
        """Turn the value into the text of an address; equal values give equal texts."""
        return str(value)

    def check(self, value: Any) -> None:
        """Raise StateError unless the value is allowed."""
        raise NotImplementedError


@dataclass(frozen=True, kw_only=True)
class Whole(FieldKind):
    """A whole number of periods between two bounds, both included."""

    low: int
    high: int

    def read(self, text: str) -> Any:
        """Read an integer; anything else is handed on for `check` to refuse."""
        return int(text) if re.fullmatch(r"[+-]?[0-9]{1,18}", text.strip()) else text

    def check(self, value: Any) -> None:
        """Raise StateError unless the value is an integer within the bounds."""
        whole = isinstance(value, int) and not isinstance(value, bool)
        if not whole or not self.low <= value <= self.high:
            raise StateError(
                f"{self.label} must be a whole number from {self.low} to {self.high},"
                f" but got {_shown(value)}"
            )


@dataclass(frozen=True, kw_only=True)
class Choice(FieldKind):
    """One of a few named options; `options` maps the value to the words on screen."""

    options: Mapping[str, str]

    def check(self, value: Any) -> None:
        """Raise StateError unless the value is one of the options."""
        if not isinstance(value, str) or value not in self.options:
            raise StateError(
                f"{self.label} must be one of {', '.join(self.options)}, but got {_shown(value)}"
            )


@dataclass(frozen=True, kw_only=True)
class Text(FieldKind):
    """Free text that has to match a pattern; `shape` says in words what is expected."""

    pattern: str
    shape: str

    def check(self, value: Any) -> None:
        """Raise StateError unless the value has the expected shape."""
        if not isinstance(value, str) or not re.fullmatch(self.pattern, value, re.DOTALL):
            raise StateError(f"{self.label} must be {self.shape}, but got {_shown(value)}")


@dataclass(frozen=True, kw_only=True)
class Day(FieldKind):
    """A date of the calendar such as 2024-03-12, or empty."""

    def check(self, value: Any) -> None:
        """Raise StateError unless the value is a date that exists, or empty."""
        good = isinstance(value, str) and bool(
            re.fullmatch(r"([0-9]{4}-[0-9]{2}-[0-9]{2})?", value)
        )
        try:
            if good and value:
                datetime.date.fromisoformat(value)
        except ValueError:
            good = False
        if not good:
            raise StateError(
                f"{self.label} must be a date such as 2024-03-12, or empty, but got {_shown(value)}"
            )


def _shown(value: Any) -> str:
    """Quote a refused value in at most 60 signs; `repr` writes what cannot be seen as a code."""
    text = repr(value)
    return text if len(text) <= 60 else f"{text[:57]}..."
