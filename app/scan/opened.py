"""A result file that is looked at again: read row by row, and nothing in it believed unread."""

import csv
import hashlib
import math
import re
from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass, fields, replace
from itertools import takewhile
from typing import Any
from urllib.parse import parse_qsl, urlencode

import numpy as np

from analytics.panel import PairScan, PanelScan, panel_result
from app.scan.fields import SETTINGS
from app.scan.result_file import COLUMNS, MOST_BYTES, is_head, read_row
from app.scan.task import ScanError
from app.state import StateError, ViewState

MOST_ROWS = 20_000
_LONGEST = 4000  # signs of a name or a reason
_FURTHEST = 10_000  # periods of a window or a shift
_CONTROL = re.compile(r"[\x00-\x1f\x7f-\x9f]")
_PERIOD = r"\d{4}(-(0[1-9]|1[0-2])|-Q[1-4])?"
_ADJUSTED = ("p_scan", "p_holm")


@dataclass(frozen=True, eq=False)
class Opened:
    """What a result file holds.

    Attributes
    ----------
    name, mark : str
        What the file is called, and the first digits of the SHA-256 of its content.
    version : str
        Pricewake that wrote it.
    asked : ViewState
        The fields of `SETTINGS` as the file has them; the others are usual.
    panel : PanelScan
        Its pairs, with adjusted p-values made anew from theirs.
    finished : bool
        Whether the scan behind it had come to its end.
    cut : bool
        Whether its last line is cut short, and left out.
    """

    name: str
    mark: str
    version: str
    asked: ViewState
    panel: PanelScan
    finished: bool
    cut: bool

    def in_state(self, state: ViewState) -> ViewState:
        """Return a state in which all that was searched is as the file has it."""
        kept = {name: getattr(self.asked, name) for name in SETTINGS}
        return replace(state, drivers="", responses="", **kept)


def read_result(name: str, content: bytes) -> Opened:
    """Read a result file of `pricewake scan`, or the pairs of a scan saved from the page.

    Raises
    ------
    ScanError
        It is too large, no result of a scan, or one row is not as a scan writes it; one sentence.
    """
    if len(content) > MOST_BYTES:
        raise ScanError(f"a result must have at most {MOST_BYTES >> 20} MB, but {name!r} has more")
    try:
        text = content.decode("utf-8-sig")
    except UnicodeDecodeError:
        raise _stranger(name) from None
    lines = re.split(r"\r?\n", text)
    cut = bool(lines.pop())
    top = len(list(takewhile(is_head, lines)))
    said = dict(line[2:].split(": ", 1) for line in lines[:top])
    settings = said.get("question", said.get("settings"))
    if settings is None or "Pricewake" not in said or len(lines) == top:
        raise _stranger(name)
    _check_columns(name, lines[top], said["Pricewake"])
    asked = _asked(name, settings)
    scans, adjusted = [], []
    for number, values in _rows(name, lines[top:], top):
        where = f"line {number} of {name!r}"
        scans.append(_checked(where, values, asked))
        adjusted.append([_number(where, column, values[column]) for column in _ADJUSTED])
        if len(scans) > MOST_ROWS:
            raise ScanError(f"a result must have at most {MOST_ROWS:,} rows, but {name!r} has more")
    if not scans:
        raise ScanError(f"a result must have at least one pair, but {name!r} has none")
    try:
        panel = panel_result(scans)
    except ValueError as error:
        raise ScanError(f"{name!r} cannot be shown: {error}") from error
    return Opened(
        name,
        hashlib.sha256(content).hexdigest()[:16],
        said["Pricewake"][:40],
        asked,
        panel,
        _finished(name, panel, np.array(adjusted)),
        cut,
    )


def _stranger(name: str) -> ScanError:
    return ScanError(
        "a result must be a CSV file that pricewake scan or the Scan page wrote, but"
        f" {name!r} holds something else"
    )


def _check_columns(name: str, line: str, version: str) -> None:
    found = next(csv.reader([line]), [])
    wanted = set(COLUMNS)
    for column in COLUMNS:
        if column not in found:
            raise ScanError(
                f"a result must have the column {column}, but {name!r}, written by Pricewake"
                f" {version[:40]}, has none"
            )
    strange = next((column for column in found if column not in wanted), None)
    if strange is not None or len(found) != len(COLUMNS):
        raise ScanError(
            f"a result must have the columns of this version and each once, but {name!r}, written"
            f" by Pricewake {version[:40]}, has {strange or 'one twice'!r}"
        )


def _asked(name: str, settings: str) -> ViewState:
    kept = [(key, value) for key, value in parse_qsl(settings, True) if key in SETTINGS]
    try:
        return ViewState.from_query(urlencode(kept))
    except StateError as error:
        raise ScanError(f"the settings in {name!r} cannot be followed: {error}") from error


def _rows(name: str, lines: Sequence[str], top: int) -> Iterator[tuple[int, dict[str, str]]]:
    """Give each row with the number of its line; one of another length is refused."""
    reader = csv.reader(lines)
    try:
        columns = next(reader)
        for values in reader:
            number = top + reader.line_num
            if not values:
                continue
            if len(values) != len(columns):
                raise ScanError(
                    f"a row must have {len(columns)} fields, but line {number} of {name!r} has"
                    f" {len(values)}"
                )
            yield number, dict(zip(columns, values, strict=True))
    except csv.Error as error:
        raise ScanError(f"{name!r} cannot be read as CSV: {error}") from error


def _number(where: str, column: str, text: str) -> float:
    try:
        return float(text or "nan")
    except ValueError:
        raise _refusal(where, column, "a number", text) from None


def _refusal(where: str, column: str, rule: str, text: str) -> ScanError:
    return ScanError(f"{column} in {where} must be {rule}, but got {text[:60]!r}")


def _checked(where: str, values: dict[str, str], asked: ViewState) -> PairScan:
    """Read a row, and refuse it where a field is not as a scan writes it."""
    for item in fields(PairScan):
        text = values[item.name]
        match item.default:
            case bool():
                if text not in ("yes", "no"):
                    raise _refusal(where, item.name, "yes or no", text)
            case float():
                _number(where, item.name, text)
            case int() | tuple():
                parts = [text] if isinstance(item.default, int) else text.strip("{}").split()
                if not all(re.fullmatch(r"(-?\d{1,10})?", part) for part in parts):
                    raise _refusal(where, item.name, "whole", text)
    scan = read_row(values)
    for column, (rule, holds) in _RULES.items():
        if (not scan.refused or column in _ALWAYS) and not holds(getattr(scan, column)):
            raise _refusal(where, column, rule, values[column])
    if scan.sign != asked.sign:
        raise _refusal(where, "sign", f"{asked.sign}, as the settings say", scan.sign)
    if scan.refused and not (math.isnan(scan.p_search) and math.isnan(scan.p_one_sided)):
        raise _refusal(where, "p_search", "empty where the pair was refused", values["p_search"])
    return scan


def _finished(name: str, panel: PanelScan, adjusted: np.ndarray) -> bool:
    """Tell a finished scan, and refuse adjusted p-values that do not follow from the rows."""
    if np.isnan(adjusted).all():
        return not np.isfinite(panel.p_scan).any()
    for column, own, given in zip(_ADJUSTED, (panel.p_scan, panel.p_holm), adjusted.T, strict=True):
        off = ~np.isclose(own, given, rtol=1e-9, atol=0.0, equal_nan=True)
        if off.any():
            at = int(np.flatnonzero(off)[0])
            raise ScanError(
                f"{column} of {' / '.join(panel.pairs[at].names)[:200]} in {name!r} must be"
                f" {own[at]:.6g}, which follows from p of all the rows, but got {given[at]:.6g}:"
                " rows are missing or were changed"
            )
    return True


def _text(low: int, high: int = _LONGEST) -> Callable[[Any], bool]:
    return lambda value: low <= len(value) <= high and not _CONTROL.search(value)


def _within(low: float, high: float) -> Callable[[Any], bool]:
    return lambda value: low <= value <= high


def _like(pattern: str) -> Callable[[Any], bool]:
    return lambda value: re.fullmatch(pattern, value) is not None


def _set(value: tuple[int, ...]) -> bool:
    inside = all(-_FURTHEST <= each <= _FURTHEST for each in value)
    return inside and len(set(value)) == len(value)


_RULES: dict[str, tuple[str, Callable[[Any], bool]]] = {
    "economy": ("a name in one line", _text(0)),
    "driver": ("a name in one line", _text(1)),
    "response": ("a name in one line", _text(1)),
    "fingerprint": ("16 hexadecimal digits", _like(r"[0-9a-f]{16}")),
    "first": ("a period such as 1986-12", _like(_PERIOD)),
    "last": ("a period such as 1986-12", _like(_PERIOD)),
    "months": ("a number of periods", _within(1, 10**6)),
    "sign": ("any or positive", _like("any|positive")),
    "window": ("a number of periods", _within(1, _FURTHEST)),
    "shift": ("a number of periods", _within(-_FURTHEST, _FURTHEST)),
    "correlation": ("from -1 to 1", _within(-1.0 - 1e-9, 1.0 + 1e-9)),
    "slope": ("finite", math.isfinite),
    "p_search": ("above 0 and at most 1", lambda value: 0.0 < value <= 1.0),
    "p_one_sided": ("above 0 and at most 1", lambda value: 0.0 < value <= 1.0),
    "p_error": ("from 0 to 1", _within(0.0, 1.0)),
    "shift_set": ("shifts, each once", _set),
    "share": ("finite", math.isfinite),
    "episode": ("two periods such as 1978-03:1983-05", _like(f"{_PERIOD}:{_PERIOD}")),
    "seed": ("a seed from 0 to 2147483647", _within(0, 2**31 - 1)),
    "refused": ("a sentence in one line", _text(0)),
}
_ALWAYS = ("economy", "driver", "response", "sign", "seed", "refused")
