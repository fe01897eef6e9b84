"""Time of the surface, its inference and its HAC errors: `python -m tests.bench.speed_hac`.

The largest usual grid: windows 1 to 60, shifts -36 to 60, 760 months. Rows are (name, value,
limit); a time must stay below its limit, the ratio to a loop over statsmodels above it.
"""

import time

import numpy as np

from analytics.hac import hac_surface
from analytics.rates import trailing_mean
from analytics.robust import surface_inference
from analytics.surface import lag_surface

MONTHS, WINDOWS, SHIFTS = 760, range(1, 61), range(-36, 61)


def pair(seed=1):
    """Two unrelated autoregressions."""
    values = np.random.default_rng(seed).standard_normal((2, MONTHS))
    for t in range(1, MONTHS):
        values[:, t] += np.array([0.9, 0.5]) * values[:, t - 1]
    return values


def best(function, repeats):
    """Shortest of several runs, in seconds."""
    times = []
    for _ in range(repeats):
        start = time.perf_counter()
        function()
        times.append(time.perf_counter() - start)
    return min(times)


def statsmodels_cells(driver, response, cells, bandwidths):
    """Slope and standard error of some cells, as one would loop over the grid by statsmodels."""
    from statsmodels.api import OLS, add_constant

    found = []
    for (window, shift), bandwidth in zip(cells, bandwidths, strict=True):
        xs, ys = trailing_mean(driver, window), trailing_mean(response, window)
        n = xs.size - abs(shift)
        x, y = xs[max(0, -shift) :][:n], ys[max(0, shift) :][:n]
        options = {"maxlags": bandwidth - 1, "use_correction": False}
        fit = OLS(y, add_constant(x)).fit(cov_type="HAC", cov_kwds=options)
        found.append((fit.params[1], fit.bse[1]))
    return np.array(found)


def measure(cells=30, repeats=25):
    """Rows (name, value, limit)."""
    driver, response = pair()
    grid = {"windows": WINDOWS, "shifts": SHIFTS}
    rng = np.random.default_rng(2)
    sample = [(int(rng.choice(WINDOWS)), int(rng.choice(SHIFTS))) for _ in range(cells)]
    surface = hac_surface(driver, response, **grid)
    places = [(window - WINDOWS[0], shift - SHIFTS[0]) for window, shift in sample]
    bandwidths = [int(surface.bandwidth[place]) for place in places]
    ours = np.array([(surface.slope[place], surface.se[place]) for place in places])
    theirs = statsmodels_cells(driver, response, sample, bandwidths)
    loop = best(lambda: statsmodels_cells(driver, response, sample, bandwidths), 5)
    loop *= len(WINDOWS) * len(SHIFTS) / cells
    hac = best(lambda: hac_surface(driver, response, **grid), repeats)
    shown = best(lambda: lag_surface(driver, response, **grid), repeats)
    inference = best(lambda: surface_inference(driver, response, **grid), repeats)
    same = best(lambda: lag_surface(driver, response, same_months=True, **grid), repeats)
    return [
        ("largest relative gap to statsmodels", float(np.abs(ours / theirs - 1.0).max()), 1e-9),
        ("surface, milliseconds", 1e3 * shown, 40.0),
        ("surface over the same months, milliseconds", 1e3 * same, 60.0),
        ("effective months and p, milliseconds", 1e3 * inference, 60.0),
        ("HAC errors, milliseconds", 1e3 * hac, 60.0),
        ("HAC by a loop over statsmodels, milliseconds", 1e3 * loop, np.inf),
        ("HAC, times faster than the loop", loop / hac, 500.0),
    ]


def main():
    """Print the rows; status 1 when one is on the wrong side of its limit."""
    lost = 0
    for name, value, limit in measure():
        held = value >= limit if "times faster" in name else value <= limit
        lost += not held
        print(f"{value:14.4g}  limit {limit:8.4g}  {'' if held else 'NOT HELD'}  {name}")
    raise SystemExit(1 if lost else 0)


if __name__ == "__main__":
    main()
