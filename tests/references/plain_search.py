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
