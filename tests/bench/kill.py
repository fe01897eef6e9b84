"""Kill a program in the middle of its writes, again and again, and look what is left.

A child process makes 200 random changes to a workspace file and acknowledges each on a pipe once
the change has returned; the parent kills it (SIGKILL) at a random moment. Every acknowledged change
must be there, nothing may be there in part, and the file must be sound::

    python -m tests.bench.kill --rounds 50
"""

import argparse
import os
import random
import signal
import sqlite3
import subprocess
import sys
import tempfile
import time
from collections.abc import Iterator
from pathlib import Path

import numpy as np
import pandas as pd

from analytics.series import Series
from app.intake.problems import Problem
from app.intake.reading import Release
from app.kept_rules import keep_rule, rule_lines
from app.workspace import Workspace

ROOT = Path(__file__).resolve().parents[2]
WRITES = 200


def changes(seed: int) -> Iterator[tuple[str, int, int]]:
    """Kinds, sizes and seeds of the changes of one round, the same for child and parent."""
    rng = random.Random(seed)
    for _ in range(WRITES):
        kind = rng.choice(("load", "load", "correct", "mark", "statement", "rule", "hide"))
        yield kind, rng.randint(1, 40), rng.randrange(2**31)


def release(place: int, size: int, seed: int) -> Release:
    """Return a file of `size` series with random walks, named after its place."""
    rng = np.random.default_rng(seed)
    series = tuple(
        Series(
            f"Series {number}",
            pd.Period("1960-01", "M"),
            np.cumsum(rng.standard_normal(rng.integers(2, 900))) + 1e3,
            kind="level",
        )
        for number in range(size)
    )
    return Release(f"{place}.csv", series, (Problem("note", f"{place}.csv", None, None, "m"),))


def write(path: str, seed: int) -> None:
    """Make the changes and acknowledge each: the child process."""
    desk = Workspace(path=path)
    desk.add(release(0, 40, seed))
    _acknowledge(0)
    for place, (kind, size, own) in enumerate(changes(seed), start=1):
        name = f"Series {size - 1}"
        if kind == "load":
            desk.add(release(place, size, own))
        elif kind == "correct":
            desk.correct(name, "unit", f"unit {place}")
        elif kind == "hide":
            desk.add(Release(f"hidden {place}.csv", (), ()))
            desk.hide(f"hidden {place}.csv")
        elif kind == "rule":
            keep_rule(desk.store, f"rate_12m above {place}")
        else:
            table = "marks (series, period, treatment, at)"
            if kind == "statement":
                table = "statements (subject, content, state, at, day)"
            values = (name, f"{place}", "splice", "now", "2024-01-01")[: table.count(",") + 1]
            with desk.store.change() as db:
                db.execute(f"INSERT INTO {table} VALUES ({', '.join('?' * len(values))})", values)
        _acknowledge(place)


def _acknowledge(place: int) -> None:
    os.write(1, f"{place}\n".encode())


def check(path: Path, seed: int, acknowledged: int) -> list[str]:
    """Say what of the acknowledged changes is not there, and what is there in part."""
    wrong = []
    raw = sqlite3.connect(path)
    sound = raw.execute("PRAGMA integrity_check").fetchall()
    if sound != [("ok",)] or raw.execute("PRAGMA foreign_key_check").fetchall():
        wrong.append(f"the file is not sound: {sound[:3]}")
    raw.close()
    desk = Workspace(path=path)
    held = {each.name: each for each in desk.releases}
    hidden = {each.name for each in desk.hidden_files()}
    units = {name: said.get("unit", "") for name, said in desk.corrections().items()}
    with desk.store.look() as db:
        marks = {row["period"] for row in db.execute("SELECT period FROM marks")}
        statements = {row["content"] for row in db.execute("SELECT content FROM statements")}
    rules = set(rule_lines(desk.store))
    desk.close()
    latest: dict[str, int] = {}
    for place, (kind, size, own) in enumerate(changes(seed), start=1):
        there = True
        name = f"{place}.csv"
        if kind == "load" and name in held:
            expected = release(place, size, own)
            there = [s.fingerprint for s in held[name].series] == [
                s.fingerprint for s in expected.series
            ] and held[name].problems == expected.problems
            if not there:
                wrong.append(f"change {place} is there in part")
        elif place <= acknowledged:
            there = {
                "load": name in held,
                "hide": f"hidden {place}.csv" in hidden,
                "mark": f"{place}" in marks,
                "statement": f"{place}" in statements,
                "rule": f"rate_12m above {place}" in rules,
                "correct": True,
            }[kind]
        if kind == "correct" and place <= acknowledged:
            latest[f"Series {size - 1}"] = place
        if not there and place <= acknowledged:
            wrong.append(f"change {place} ({kind}) was acknowledged and is not there")
    for name, place in latest.items():
        # The change under way when the child was killed may be there as well.
        if int((units.get(name) or "unit 0").removeprefix("unit ")) < place:
            wrong.append(f"correction {place} was acknowledged and is not there")
    return wrong


def round_of(seed: int, folder: Path, moment: float) -> tuple[int, list[str]]:
    """Run a child, kill it after `moment` of its usual time, and check what it left."""
    path = folder / f"{seed}.sqlite"
    child = subprocess.Popen(
        [sys.executable, "-m", "tests.bench.kill", "--child", str(path), "--seed", str(seed)],
        cwd=ROOT,
        stdout=subprocess.PIPE,
    )
    assert child.stdout is not None
    child.stdout.readline()  # the file is made and the first change is in
    time.sleep(moment)
    child.send_signal(signal.SIGKILL)
    rest = child.stdout.read().split(b"\n")
    child.wait()
    acknowledged = max((int(line) for line in rest[:-1]), default=0)
    return acknowledged, check(path, seed, acknowledged)


def main() -> int:
    """Run the rounds and print the counts."""
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("--rounds", type=int, default=50)
    parser.add_argument("--seed", type=int, default=1)
    parser.add_argument("--longest", type=float, default=0.0, help="seconds until a kill, at most")
    parser.add_argument("--child", default="")
    asked = parser.parse_args()
    if asked.child:
        write(asked.child, asked.seed)
        return 0
    rng = random.Random(asked.seed)
    total, early, failures = 0, 0, 0
    with tempfile.TemporaryDirectory() as folder:
        longest = asked.longest or _usual_time(Path(folder), asked.seed)
        print(f"{WRITES} changes take {longest:.2f} s; killed at a random moment before that")
        for k in range(asked.rounds):
            seed = 1000 * asked.seed + k
            acknowledged, wrong = round_of(seed, Path(folder), rng.uniform(0, longest))
            total += acknowledged
            early += acknowledged < WRITES
            failures += bool(wrong)
            for sentence in wrong:
                print(f"round {k}: {sentence}")
    print(
        f"{asked.rounds} rounds, {early} killed before their last change; {total} changes"
        f" acknowledged; {failures} rounds with a loss, a part or an unsound file"
    )
    return int(failures > 0)


def _usual_time(folder: Path, seed: int) -> float:
    """Seconds that a child takes for its changes when it is left alone."""
    child = subprocess.Popen(
        [
            *(sys.executable, "-m", "tests.bench.kill"),
            *("--child", str(folder / "whole.sqlite"), "--seed", str(seed)),
        ],
        cwd=ROOT,
        stdout=subprocess.PIPE,
    )
    assert child.stdout is not None
    child.stdout.readline()
    start = time.monotonic()
    child.communicate()
    return time.monotonic() - start


if __name__ == "__main__":
    sys.exit(main())
