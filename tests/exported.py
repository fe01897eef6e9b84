"""Files that leave the program, taken apart: the lines of their head and the rows below."""

import csv
import io
import re


def taken_apart(text):
    """Lines of the head without their ``# ``, and rows as text, the names of the columns first."""
    head = re.match(r"(?:# [^\n]*\n)*", text)[0]
    rows = csv.reader(io.StringIO(text[len(head) :], newline=""), strict=True)
    return [line.removeprefix("# ").rstrip("\r\n") for line in io.StringIO(head)], list(rows)


def head_of(text):
    """What the head says, by name; where a name stands twice, what it said last."""
    return dict(line.split(": ", 1) for line in taken_apart(text)[0])


def rows_of(text):
    """The rows, the names of the columns first."""
    return taken_apart(text)[1]


def records(text):
    """The rows by the names of their columns; every row has a field for each."""
    names, *rows = rows_of(text)
    return [dict(zip(names, row, strict=True)) for row in rows]
