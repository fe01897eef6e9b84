"""Small files for the command, and how its refusals look."""

import csv
import os
import subprocess
import sys
from pathlib import Path

from analytics.series import period_code
from tests.app.economies import levels, planted

ROOT = Path(__file__).resolve().parents[2]


def few_surrogates(words):
    """The words of a command; where it searches, briefly: judged is the command, not the search."""
    return (words[0], "--surrogates", "39", *words[1:]) if words[0] == "lag" else words


def rows_of(n=120, **options):
    """Rows of a planted pair as index levels: period, money, prices."""
    money, prices = (levels(side) for side in planted(n, **options))
    return [
        [period_code(period), f"{m:.6f}", f"{p:.6f}"]
        for period, m, p in zip(money.periods, money.values, prices.values, strict=True)
    ]


def write(path, rows, head=("period", "Money", "Prices")):
    """Write rows under a head; gives the path."""
    with path.open("w", newline="", encoding="utf-8") as stream:
        csv.writer(stream).writerows([head, *rows])
    return path


def one_sentence(err):
    """What a refusal says, after making sure that it is one sentence and shows no inside."""
    assert err.startswith("pricewake: ")
    assert err.count("\n") == 1
    assert err.endswith("\n")
    assert "Traceback" not in err
    assert "Errno" not in err
    assert len(err) < 500
    return err.removeprefix("pricewake: ").rstrip()


def process(*words, **environment):
    """Run the command as a process of its own; gives bytes."""
    return subprocess.run(
        [sys.executable, "-m", "app", *map(str, words)],
        cwd=ROOT,
        capture_output=True,
        timeout=120,
        env={**os.environ, **environment},
        stdin=subprocess.DEVNULL,
        check=False,
    )
