"""Speed of the search against a matrix product in the same run: ``python -m tests.bench.speed``.

Two cores are assumed. Every time is the best of several, taken turn about with what it is
compared to, so that other work on the machine hits both.
"""

import importlib
import importlib.util
import sys
import time
import tracemalloc

import numpy as np

from analytics.kernel import response_kernel
from analytics.search import lag_search
from analytics.shiftset import shift_set

WINDOWS, SHIFTS = range(1, 61), range(-36, 61)
DRIVERS, CHUNK, MONTHS = 2000, 250, 760
ROUNDS = 5


def seconds(work):
    start = time.perf_counter()
    work()
    return time.perf_counter() - start


def best_of(*works, rounds):
    """Shortest time of each, the works taking turns."""
    times = [[seconds(work) for work in works] for _ in range(rounds)]
    return [min(column) for column in zip(*times, strict=True)]


def kernel_against_product(months, rounds):
    """All cells of 2,000 drivers, in the search's chunks, and 60 plain products of that size."""
    rng = np.random.default_rng(1)
    drivers, response = rng.standard_normal((DRIVERS, months)), rng.standard_normal(months)
    kernel = response_kernel(response, windows=WINDOWS, shifts=SHIFTS)
    left = rng.standard_normal((len(WINDOWS), len(SHIFTS), months))
    right, out = np.ascontiguousarray(drivers.T), np.empty((len(SHIFTS), DRIVERS))

    def correlations():
        for start in range(0, DRIVERS, CHUNK):
            kernel.correlations(drivers[start : start + CHUNK])

    def products():
        for matrix in left:
            np.matmul(matrix, right, out=out)

    return best_of(correlations, products, rounds=rounds)


def pair(months):
    rng = np.random.default_rng(2)
    return rng.standard_normal((2, months))


def whole_search(months):
    driver, response = pair(months)
    return best_of(lambda: lag_search(driver, response, surrogates=DRIVERS), rounds=3)[0]


def peak_memory():
    """Megabytes that a whole search holds at its worst, by numpy's own allocations."""
    driver, response = pair(MONTHS)
    tracemalloc.start()
    lag_search(driver, response, surrogates=DRIVERS)
    peak = tracemalloc.get_traced_memory()[1]
    tracemalloc.stop()
    return peak / 2**20


def measure():
    """Rows (what, figure, unit, limit), one after another."""
    fast, floor = kernel_against_product(MONTHS, rounds=ROUNDS)
    yield "matrix product, 60 of 97 x 760 by 760 x 2000", floor, "s", None
    yield "kernel, 2,000 drivers, 60 windows, 97 shifts, 760 months", fast, "s", None
    yield "kernel over matrix product", fast / floor, "", 1.5
    yield "whole search, 2,000 surrogates", whole_search(MONTHS), "s", 1.0
    yield "memory held by the search", peak_memory(), "MB", 500.0
    driver, response = pair(MONTHS)
    narrow = best_of(lambda: shift_set(driver, response, window=12), rounds=3)[0]
    yield "shift set, window 12, 97 candidates", narrow, "s", 0.5
    long, long_floor = kernel_against_product(3000, rounds=3)
    yield "kernel over matrix product at 3,000 months", long / long_floor, "", 1.5
    yield "kernel at 3,000 months over 760, per month", long / fast * MONTHS / 3000, "", 1.0


def all_rows():
    """Our rows and those of the surface's errors, with whether the limit is a least one."""
    for what, figure, unit, limit in measure():
        yield what, figure, unit, limit, False
    if importlib.util.find_spec("tests.bench.speed_hac"):
        for what, figure, limit in importlib.import_module("tests.bench.speed_hac").measure():
            yield what, figure, "", limit, "times faster" in what


def main():
    missed = 0
    for what, figure, unit, limit, at_least in all_rows():
        held = limit is None or (figure >= limit if at_least else figure <= limit)
        missed += not held
        bound = "" if limit is None else f"{'least' if at_least else 'most'} {limit:g} {unit}"
        print(f"{what:60}{figure:12.4g} {unit:4}{bound:16}{'' if held else 'NOT HELD'}", flush=True)
    return 1 if missed else 0


if __name__ == "__main__":
    sys.exit(main())
