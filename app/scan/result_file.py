"""The result of a scan as a CSV file that grows pair by pair and is gone on from.

Each row is written whole by one write and is on the disk before the next pair counts, so that a
program killed half way leaves whole rows. When all pairs are there, the file is written anew, in
the order of the pairs and with the adjusted p-values, and takes the old one's place at once.
"""

import contextlib
import csv
import io
import os
from collections.abc import Mapping
from dataclasses import fields
from itertools import takewhile
from pathlib import Path
from typing import Any

from analytics.panel import PairScan, PanelScan
from app.exports import csv_text
from app.places import software_version
from app.scan.task import ScanError

COLUMNS = (*(item.name for item in fields(PairScan)), "p_scan", "p_holm")
MOST_BYTES = 32 * 2**20
_MARK = "every pair in the files"
_LINE_END = "\r\n"


def head(settings: str) -> list[tuple[str, str]]:
    """Name what the file holds."""
    return [
        ("Pricewake", software_version()),
        ("view", _MARK),
        ("question", settings),
        ("note", "p_scan by Benjamini-Hochberg; p_holm by Holm; empty until all pairs are done"),
        ("note", "an association in past data; not a cause and not advice"),
    ]


def row(scan: PairScan, p_scan: float | None = None, p_holm: float | None = None) -> list[Any]:
    """Return the fields of one pair, in the order of `COLUMNS`."""
    values = [getattr(scan, item.name) for item in fields(PairScan)]
    return [*(_written(value) for value in values), p_scan, p_holm]


def panel_text(panel: PanelScan, settings: str) -> str:
    """Return the whole result as CSV text, every digit kept."""
    adjusted = zip(panel.pairs, panel.p_scan.tolist(), panel.p_holm.tolist(), strict=True)
    rows = (row(scan, p_scan, p_holm) for scan, p_scan, p_holm in adjusted)
    return csv_text(head(settings), [COLUMNS, *rows])


class ResultFile:
    """A result file of one question: what it held, and where fresh pairs are put down.

    Raises
    ------
    ScanError
        The file is no result of a scan, is one of another question or of other data, or cannot
        be read or written; nothing in it is changed.
    """

    def __init__(self, path: Path, settings: str, wanted: Mapping[Any, str]) -> None:
        self.path = path
        self._settings = settings
        self.known: tuple[PairScan, ...] = ()
        text = self._read()
        if text:
            self.known = self._rows(text, wanted)
        if not text or len(self.known) < len(wanted):  # adjusted p-values count when all are there
            self._replace(csv_text(head(settings), [COLUMNS, *map(row, self.known)]))

    def add(self, scan: PairScan) -> None:
        """Put one pair down, whole or not at all.

        Raises
        ------
        ScanError
            The disk is full or the file is gone; the rows before it stay.
        """
        line = csv_text([], [row(scan)]).encode("utf-8")
        try:
            place = os.open(self.path, os.O_WRONLY | os.O_APPEND)
            try:
                size = os.fstat(place).st_size
                try:
                    if os.write(place, line) != len(line):
                        raise OSError(28, "no space left")
                    os.fsync(place)
                except OSError:
                    os.ftruncate(place, size)
                    raise
            finally:
                os.close(place)
        except OSError as error:
            raise self._refusal(error) from error

    def finish(self, panel: PanelScan) -> None:
        """Write the whole result, with adjusted p-values, in place of the growing one."""
        self._replace(panel_text(panel, self._settings))

    def _read(self) -> str:
        try:
            if not self.path.exists():
                return ""
            if not self.path.is_file() and not self.path.is_dir():  # a device never ends
                raise self._stranger()
            with self.path.open("rb") as file:
                content = file.read(MOST_BYTES + 1)
            if len(content) > MOST_BYTES:
                raise self._stranger()
            return content.decode("utf-8")
        except UnicodeDecodeError:
            raise self._stranger() from None
        except OSError as error:
            raise self._refusal(error) from error

    def _rows(self, text: str, wanted: Mapping[Any, str]) -> tuple[PairScan, ...]:
        """Return the pairs that the file holds; the last line counts only if it is whole."""
        lines = text.split(_LINE_END)[:-1]
        top = len(list(takewhile(is_head, lines)))
        said = dict(line[2:].split(": ", 1) for line in lines[:top])
        body = lines[top:]
        if said.get("view") != _MARK or not body or body[0] != ",".join(COLUMNS):
            raise self._stranger()
        ours = {"Pricewake": software_version(), "question": self._settings}
        for name, value in ours.items():
            if said.get(name) != value:
                raise ScanError(
                    f"--out must be a result of the same question, but {str(self.path)!r} has"
                    f" {name} {said.get(name)!r} where this scan has {value!r}; name another file"
                )
        found = {}
        for values in csv.DictReader(body):
            try:
                scan = read_row(values)
            except ValueError:
                raise self._stranger() from None
            if scan.names not in wanted:
                raise ScanError(
                    f"--out must be a result of the same pairs, but {str(self.path)!r} has"
                    f" {' / '.join(scan.names)}, which is not asked for; name another file"
                )
            if scan.fingerprint != wanted[scan.names]:
                raise ScanError(
                    f"--out must be a result of the same data, but the series of"
                    f" {' / '.join(scan.names)} have changed since {str(self.path)!r} was written;"
                    " name another file"
                )
            found[scan.names] = scan
        return tuple(found.values())

    def _replace(self, text: str) -> None:
        """Write a file beside this one and let it take its place."""
        part = self.path.with_name(f"{self.path.name}.part")
        try:
            if self.path.is_dir():
                raise IsADirectoryError(0, "that is a folder")
            try:
                with part.open("wb") as file:
                    file.write(text.encode("utf-8"))
                    file.flush()
                    os.fsync(file.fileno())
                part.replace(self.path)
            except OSError:
                with contextlib.suppress(OSError):
                    part.unlink()
                raise
        except OSError as error:
            raise self._refusal(error) from error

    def _stranger(self) -> ScanError:
        return ScanError(
            f"--out must be a new file or a result of a scan, but {str(self.path)!r} holds"
            " something else; name another file"
        )

    def _refusal(self, error: OSError) -> ScanError:
        return ScanError(
            f"--out must be a file that may be written, but got {str(self.path)!r}:"
            f" {error.strerror}"
        )


def is_head(line: str) -> bool:
    """Whether a line says what the file holds."""
    return line.startswith("# ") and ": " in line


def _written(value: Any) -> Any:
    if isinstance(value, bool):
        return "yes" if value else "no"
    if isinstance(value, tuple):  # in braces, since a spreadsheet would take -5 12 for a formula
        return f"{{{' '.join(map(str, value))}}}" if value else ""
    return value


def read_row(values: Mapping[str, Any]) -> PairScan:
    """Read a row back; every kind of field is told from the field's default."""
    read: dict[str, Any] = {}
    for item in fields(PairScan):
        text = values[item.name] or ""
        match item.default:
            case bool():
                read[item.name] = text == "yes"
            case int():
                read[item.name] = int(text or 0)
            case float():
                read[item.name] = float(text or "nan")
            case tuple():
                read[item.name] = tuple(int(part) for part in text.strip("{}").split())
            case _:
                read[item.name] = _undefused(text)
    return PairScan(**read)


def _undefused(text: str) -> str:
    """Take back the apostrophe that keeps a spreadsheet from running a name."""
    return text[1:] if text.startswith("'") and _field_of(text[1:]) == text else text


def _field_of(text: str) -> str:
    (line,) = csv.reader(io.StringIO(csv_text([], [[text]])))
    return line[0]
