"""Long CSV that is plain, a row a value and no quotes, in columns at once: millions of rows.

Everything else takes the way over rows (`app.intake.csv_files.split_rows`), which gives the same.
"""

import csv
import io

import numpy as np
import pandas as pd
from numpy.typing import NDArray

from app.intake.csv_files import MAX_COLUMNS, opened
from app.intake.problems import MAX_NAME, plain_text, refusal
from app.intake.tables import Block, long_header, words


def plain_long_blocks(file: str, text: str) -> tuple[list[Block], str] | None:
    """Cut a plain long table into one block a series, in the order in which they first appear.

    Returns
    -------
    tuple of list of Block and str, or None
        Blocks and the separator. None where the text is anything else: quotes, blank rows, rows
        that are not as wide as the header, a series without a name.

    Raises
    ------
    IntakeError
        The text is too large, or there are too many series.
    """
    start = opened(file, text)
    if '"' in text or text.count("\r") != text.count("\r\n"):
        return None
    top = text.find("\n", start.place) + 1
    if text.count(start.separator, start.place, top) > MAX_COLUMNS:
        return None
    header = words(text[start.place : top].rstrip("\r\n").split(start.separator))
    if not top or long_header([header]) is None:
        return None
    raw = text[top:].rstrip("\r\n").encode()
    if not _even(raw, start.separator, len(header)):
        return None
    frame = pd.read_csv(
        io.BytesIO(raw),
        sep=start.separator,
        header=None,
        names=header,
        dtype="str",
        na_filter=False,
        quoting=csv.QUOTE_NONE,
        skip_blank_lines=False,
    )
    del raw
    places, named = _groups(frame, file, start.line + 1)
    if not all(named):
        return None
    codes, known = pd.factorize(frame["period"])
    periods = known.to_numpy(dtype=object)[codes]  # few texts, each of them one object
    values = frame["value"].to_numpy(dtype=object)
    blocks = [
        Block(
            (rows + start.line + 1).tolist(),
            periods[rows].tolist(),
            [(name, values[rows].tolist())],
        )
        for name, rows in _merged(named, places).items()
    ]
    return blocks, start.separator


def _even(raw: bytes, separator: str, width: int) -> bool:
    """Tell whether every line has as many cells as the header, none of them beyond measure."""
    signs = np.frombuffer(raw, dtype=np.uint8)
    ends = np.flatnonzero(signs == ord("\n"))
    marks = np.flatnonzero(signs == ord(separator))
    if not raw or marks.size != (ends.size + 1) * (width - 1):
        return False
    table = marks.reshape(-1, width - 1)
    longest = np.diff(ends, prepend=-1, append=signs.size).max()
    return bool(
        (table[:-1, -1] < ends).all()
        and (table[1:, 0] > ends).all()
        and longest <= csv.field_size_limit()
    )


def _groups(frame: pd.DataFrame, file: str, line: int) -> tuple[list[NDArray[np.intp]], list[str]]:
    """Return the rows of each economy and series, by first appearance, and its name."""
    key, known = pd.factorize(frame["series"])
    if "economy" in frame:
        key = key + len(known) * pd.factorize(frame["economy"])[0]
    _, first, group = np.unique(key, return_index=True, return_inverse=True)
    if first.size > MAX_COLUMNS:
        message = f"a file must not have more than {MAX_COLUMNS:,} series, but this one has"
        raise refusal(file, message, row=line + int(np.sort(first)[MAX_COLUMNS]))
    rows = np.split(np.argsort(group, kind="stable"), np.cumsum(np.bincount(group))[:-1])
    order = np.argsort(first)
    named = []
    for place in first[order]:
        name = plain_text(str(frame["series"].iloc[place]), MAX_NAME)
        if name and "economy" in frame:
            name = f"{plain_text(str(frame['economy'].iloc[place]), MAX_NAME)}: {name}"
        named.append(name)
    return [rows[place] for place in order], named


def _merged(named: list[str], places: list[NDArray[np.intp]]) -> dict[str, NDArray[np.intp]]:
    """Join groups whose names look alike once bare."""
    found: dict[str, list[NDArray[np.intp]]] = {}
    for name, rows in zip(named, places, strict=True):
        found.setdefault(name, []).append(rows)
    return {name: np.concatenate(rows) for name, rows in found.items()}
