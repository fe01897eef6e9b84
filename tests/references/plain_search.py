"""The search's kernel written as it is defined: one cell at a time, nothing shared, slow."""

import numpy as np


def plain_correlations(driver, response, windows, shifts, min_pairs=24):
    """Pearson's r in each cell, from trailing means built by a convolution."""
    driver, response = np.asarray(driver, float), np.asarray(response, float)
    surface = np.full((len(windows), len(shifts)), np.nan)
    for row, window in enumerate(windows):
        box = np.full(window, 1.0 / window)
        if window > driver.size:
            continue
        x, y = np.convolve(driver, box, "valid"), np.convolve(response, box, "valid")
        for column, shift in enumerate(shifts):
            n = x.size - abs(shift)
            if n < min_pairs:
                continue
            a = x[:n] if shift >= 0 else x[-shift:]
            b = y[shift:] if shift >= 0 else y[:n]
            a, b = a - a.mean(), b - b.mean()
            if min(np.abs(a).max(), np.abs(b).max()) <= 1e-12 * max(
                np.abs(driver).max(), np.abs(response).max()
            ):
                continue
            surface[row, column] = (a @ b) / np.sqrt((a @ a) * (b @ b))
    return surface


def plain_search(driver, response, surrogates, windows, shifts, min_pairs=24):
    """Search-adjusted p by its definition: every surrogate's surface in full, one loop each.

    Returns p, one-sided p and the p of each cell.
    """
    surfaces = np.array(
        [
            np.arctanh(plain_correlations(series, response, windows, shifts, min_pairs))
            for series in (driver, *surrogates)
        ]
    )
    z = surfaces / np.sqrt((surfaces**2).mean(axis=0))
    largest = np.nanmax(np.abs(z), axis=(1, 2))
    highest = np.nanmax(z, axis=(1, 2))
    p_cell = (largest[1:, None, None] >= np.abs(z[0])).sum(axis=0) + 1.0
    return (
        (1 + (largest[1:] >= largest[0]).sum()) / len(surfaces),
        (1 + (highest[1:] >= highest[0]).sum()) / len(surfaces),
        np.where(np.isnan(z[0]), np.nan, p_cell / len(surfaces)),
    )
