"""Size, power and coverage of the search, by simulation: ``python -m tests.bench.calibration``.

One table, a row for each figure. ``--full`` takes the number of runs behind the statements in the
package's docstrings; without it the same rows come from few runs, as a smoke test with errors to
match. ``--out FILE`` keeps finished cases in a CSV and goes on from there when started again.
Every case is seeded by its name, so that a row is the same whatever ran before it.
"""

import argparse
import csv
import os
import sys
import zlib
from dataclasses import asdict, dataclass, fields
from pathlib import Path

os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")

import numpy as np

from analytics.cell import lag_cell
from analytics.robust import cell_inference
from analytics.search import lag_search
from analytics.shiftset import shift_set
from analytics.simulate import planted_pair
from tests.bench.calibration_series import SHAPES, related, unrelated

WINDOWS = (1, 2, 3, 4, 6, 9, 12, 15, 18, 24, 30, 36, 48, 60)
SURROGATES = 199
LEVEL = 0.05


@dataclass(frozen=True)
class Row:
    """One figure of one case, with what it had to be."""

    kind: str
    case: str
    months: int
    runs: int
    figure: str
    value: float
    mc_error: float
    low: float | None
    high: float | None
    verdict: str


def row(kind, case, months, figure, outcomes, *, low=None, high=None, median=False):
    """Summarise outcomes; within two Monte Carlo errors of a bound counts as "at the bound"."""
    outcomes = np.asarray(outcomes, dtype=float)
    value = float(np.median(outcomes) if median else outcomes.mean())
    if median:
        spread = np.percentile(outcomes, 75) - np.percentile(outcomes, 25)
        error = 1.25 * spread / 1.35 / np.sqrt(outcomes.size)
    else:
        error = np.sqrt(max(value * (1 - value), 0.5 / outcomes.size) / outcomes.size)
    if low is None and high is None:
        verdict = ""
    elif (low is None or value >= low) and (high is None or value <= high):
        verdict = "met"
    elif (low is None or value + 2 * error >= low) and (high is None or value - 2 * error <= high):
        verdict = "within error"
    else:
        verdict = "NOT MET"
    return Row(
        kind,
        case,
        months,
        outcomes.size,
        figure,
        round(value, 4),
        round(error, 4),
        low,
        high,
        verdict,
    )


def generator(kind, case, months, run):
    return np.random.default_rng([run, months, zlib.crc32(f"{kind} {case}".encode())])


def size_of_the_search(case, months, runs):
    """Unrelated pairs: how often the search says otherwise at 5 %."""
    found = []
    for run in range(runs):
        driver, response = unrelated(case, generator("size", case, months, run), months)
        found.append(lag_search(driver, response, windows=WINDOWS, surrogates=SURROGATES, seed=run))
    adjusted = [f.p <= LEVEL for f in found]
    given = [(f.p if f.p_with_level_shifts is None else f.p_with_level_shifts) for f in found]
    return [
        row("size", case, months, "search-adjusted p", adjusted, low=0.035, high=0.065),
        row(
            "size",
            case,
            months,
            "search-adjusted p, one-sided",
            [f.p_one_sided <= LEVEL for f in found],
        ),
        row("size", case, months, "before shifts are removed", np.array(given) <= LEVEL),
        row("size", case, months, "shifts removed", [f.level_shifts_removed for f in found]),
        row("size", case, months, "spread evened", [f.spreads_evened for f in found]),
    ]


def size_of_one_cell(case, months, runs):
    """The same for one cell fixed in advance, naive and by effective months."""
    outcomes = {name: [] for name in ("naive", 12, 36)}
    for run in range(runs):
        driver, response = unrelated(case, generator("size", case, months, run), months)
        outcomes["naive"].append(lag_cell(driver, response, window=12, shift=24).p_naive <= LEVEL)
        for window in (12, 36):
            cell = cell_inference(driver, response, window=window, shift=24)
            outcomes[window].append(cell.p <= LEVEL)
    return [
        row("cell", case, months, "naive p, window 12, shift 24", outcomes["naive"]),
        *(
            row(
                "cell",
                case,
                months,
                f"per-cell p, window {w}, shift 24",
                outcomes[w],
                low=0.03,
                high=0.07,
            )
            for w in (12, 36)
        ),
    ]


# Share of the response's variance that comes from the driver: the least power asked for.
POWER = {
    ("AR .5", 240, 0.05): 0.12,
    ("AR .5", 240, 0.1): 0.22,
    ("AR .5", 240, 0.2): 0.45,
    ("AR .5", 240, 0.4): 0.85,
    ("AR .5", 760, 0.02): 0.19,
    ("AR .5", 760, 0.05): 0.54,
    ("AR .5", 760, 0.1): 0.92,
    ("AR .5", 760, 0.2): 0.99,
    ("AR .9", 240, 0.2): 0.36,
    ("AR .9", 760, 0.1): 0.92,
}


def power_of_the_search(case, months, runs):
    """Driver leads by 18 months, spread over 13: how often the search sees it, and where."""
    shape, share = case.split(", share ")
    found = []
    for run in range(runs):
        driver, response = related(
            generator("power", case, months, run),
            months,
            share=float(share),
            driver_ar=float(shape.removeprefix("AR ")),
        )
        found.append(lag_search(driver, response, windows=WINDOWS, surrogates=SURROGATES, seed=run))
    near = [abs(f.best_shift - 18) <= 6 for f in found if f.p <= LEVEL]
    rows = [
        row(
            "power",
            case,
            months,
            "search-adjusted p",
            [f.p <= LEVEL for f in found],
            low=POWER[shape, months, float(share)],
        ),
        row(
            "power",
            case,
            months,
            "search-adjusted p, one-sided",
            [f.p_one_sided <= LEVEL for f in found],
        ),
    ]
    if near:
        rows.append(
            row("power", case, months, "best shift within 6 of the true one, where p <= .05", near)
        )
    return rows


SETS = {
    "spread effect, window 12, share .1": (240, 0.1, 12, 0.5),
    "spread effect, window 12, share .2": (240, 0.2, 12, 0.5),
    "spread effect, window 12, share .4": (240, 0.4, 12, 0.5),
    "spread effect, window 24, share .4": (240, 0.4, 24, 0.5),
    "spread effect, AR .9, share .2": (240, 0.2, 12, 0.9),
    "long, window 12, share .05": (760, 0.05, 12, 0.5),
    "long, window 12, share .2": (760, 0.2, 12, 0.5),
    "long, window 3, share .2": (760, 0.2, 3, 0.5),
    "long, pure delay, window 12": (760, None, 12, 0.5),
}


def coverage_of_the_set(case, months, runs):
    """How often the set holds the true 18 months, and how many months it has."""
    _, share, window, persistence = SETS[case]
    covered, width, previewed, preview_width, identified = [], [], [], [], []
    for run in range(runs):
        rng = generator("set", case, months, run)
        if share is None:
            pair = planted_pair(
                rng, months, lag=18, slope=1.0, driver_ar=0.5, noise=3.0, noise_ar=0.5
            )
            driver, response = pair.driver, pair.response
        else:
            driver, response = related(rng, months, share=share, driver_ar=persistence)
        found = shift_set(driver, response, window=window, seed=run)
        covered.append(18 in found.shifts)
        width.append(found.shifts.size)
        identified.append(found.identified)
        previewed.append(18 in found.preview)
        preview_width.append(found.preview.size)
    return [
        row("set", case, months, "set holds the true shift", covered, low=0.93),
        row("set", case, months, "months in the set, median", width, median=True),
        row("set", case, months, "lag identified", identified),
        row("set", case, months, "preview holds the true shift", previewed, low=0.93),
        row("set", case, months, "months in the preview, median", preview_width, median=True),
    ]


KINDS = {
    "size": (size_of_the_search, [(shape, months) for shape in SHAPES for months in (240, 760)]),
    "power": (
        power_of_the_search,
        [(f"{shape}, share {share}", months) for shape, months, share in POWER],
    ),
    "cell": (size_of_one_cell, [(shape, months) for shape in SHAPES for months in (240, 760)]),
    "set": (coverage_of_the_set, [(case, SETS[case][0]) for case in SETS]),
}
FULL = {"size": 1000, "power": 200, "cell": 500, "set": 120}
SMALL = {"size": 8, "power": 8, "cell": 20, "set": 4}


def read_rows(path):
    """Rows of an earlier run, and the cases that they finish."""
    if path is None or not path.exists():
        return []
    with path.open(newline="") as file:
        return [
            Row(
                **{
                    **line,
                    "months": int(line["months"]),
                    "runs": int(line["runs"]),
                    "value": float(line["value"]),
                    "mc_error": float(line["mc_error"]),
                    "low": float(line["low"]) if line["low"] else None,
                    "high": float(line["high"]) if line["high"] else None,
                }
            )
            for line in csv.DictReader(file)
        ]


def write_rows(path, rows):
    """Put the table down whole, so that a run that is stopped leaves no half row."""
    fresh = path.with_suffix(".part")
    with fresh.open("w", newline="") as file:
        table = csv.DictWriter(file, [field.name for field in fields(Row)], lineterminator="\n")
        table.writeheader()
        table.writerows(asdict(r) for r in rows)
    fresh.replace(path)


def line(r):
    wanted = "" if r.low is None and r.high is None else f"{r.low or 0:.3f}-{r.high or 1:.3f}"
    return (
        f"{r.kind:6}{r.case:36}{r.months:5}{r.runs:6}  {r.figure:52}"
        f"{r.value:9.3f} +-{r.mc_error:6.3f}  {wanted:13}{r.verdict}"
    )


def main(arguments=None, kinds=KINDS, full=FULL, small=SMALL):
    parser = argparse.ArgumentParser()
    parser.add_argument("--full", action="store_true", help="the number of runs of the record")
    parser.add_argument("--out", type=Path, help="CSV to write and to go on from")
    parser.add_argument("--kinds", default=",".join(kinds), help="which of " + ", ".join(kinds))
    parser.add_argument("--cases", default="", help="only these, separated by semicolons")
    parser.add_argument("--runs", type=int, help="runs for each case, whatever the kind")
    chosen = parser.parse_args(arguments)
    rows = read_rows(chosen.out)
    for kind in chosen.kinds.split(","):
        measure, cases = kinds[kind]
        runs = chosen.runs or (full if chosen.full else small)[kind]
        wanted = chosen.cases.split(";") if chosen.cases else [case for case, _ in cases]
        for case, months in cases:
            if case not in wanted:
                continue
            known = [
                r
                for r in rows
                if (r.kind, r.case, r.months, r.runs >= runs) == (kind, case, months, True)
            ]
            if not known:
                rows = [r for r in rows if (r.kind, r.case, r.months) != (kind, case, months)]
                known = measure(case, months, runs)
                rows += known
                if chosen.out:
                    write_rows(chosen.out, rows)
            for r in known:
                print(line(r), flush=True)
    missed = [r for r in rows if r.verdict == "NOT MET"]
    print(f"{len(rows)} rows, {len(missed)} not met")
    return 1 if missed and chosen.full else 0


if __name__ == "__main__":
    sys.exit(main())
