"""Responses that would follow if one candidate shift were the true one, and their correlations."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy import fft

from analytics.series import FloatArray
from analytics.surface import IntArray
from analytics.surrogates import autoregressive_surrogates

NARROWEST = 24  # periods over which the effect is taken to spread, whatever the window


def effect_width(window: int) -> int:
    """Periods over which the driver's effect is taken to spread: twice the window, at least 24."""
    return max(2 * window, NARROWEST)


@dataclass(frozen=True, eq=False)
class DriverCells:
    """The driver's side of every candidate cell, for `correlation_profile`."""

    window: int
    shifts: IntArray
    pairs: IntArray  # shape (S,)
    length: int  # of the transforms
    spectrum: NDArray[np.complex128]  # of the driver's trailing means, centred
    total: FloatArray  # sum of them in each cell, shape (S,)
    spread: FloatArray  # sum of squares about the cell's mean, nan where not defined


def driver_cells(
    driver: FloatArray, window: int, shifts: IntArray, defined: NDArray[np.bool_]
) -> DriverCells:
    """Prepare a driver for `correlation_profile`."""
    means = np.lib.stride_tricks.sliding_window_view(driver, window).mean(axis=1)
    means = means - means.mean()
    length = fft.next_fast_len(means.size + int(np.abs(shifts).max()), real=True)
    total, spread = np.zeros(shifts.size), np.full(shifts.size, np.nan)
    for place in np.flatnonzero(defined):
        early, _ = _pair(means, means, int(shifts[place]))
        total[place] = early.sum()
        spread[place] = np.square(early - early.mean()).sum()
    pairs = np.maximum(1, means.size - np.abs(shifts))
    spectrum = fft.rfft(means, length).conj()
    return DriverCells(window, shifts, pairs, length, spectrum, total, spread)


def correlation_profile(responses: FloatArray, cells: DriverCells) -> FloatArray:
    """Correlation of the driver with each of many responses at every candidate, shape (B, S)."""
    summed = np.cumsum(responses, axis=1)
    means = summed[:, cells.window - 1 :].copy()
    means[:, 1:] -= summed[:, : -cells.window]
    means -= means.mean(axis=1, keepdims=True)
    # Products at every lag: the means end where the sample ends, so each has its own overlap.
    spectrum = fft.rfft(means, cells.length, axis=1)
    spectrum *= cells.spectrum
    products = fft.irfft(spectrum, cells.length, axis=1, overwrite_x=True)
    covariance = products[:, cells.shifts % cells.length]
    # A cell leaves out the response's first means (driver leads) or its last ones.
    lost = means.shape[1] - np.maximum(0, means.shape[1] - np.abs(cells.shifts))
    late = cells.shifts >= 0
    most = int(lost.max())
    ends = np.stack((means[:, :most], means[:, ::-1][:, :most]))
    running = np.zeros((2, 2, len(means), most + 1))
    np.cumsum(ends, axis=2, out=running[0, :, :, 1:])
    np.cumsum(ends**2, axis=2, out=running[1, :, :, 1:])
    total, squares = -np.where(late, running[:, 0][:, :, lost], running[:, 1][:, :, lost])
    squares += np.einsum("bt,bt->b", means, means)[:, None]
    covariance -= total * (cells.total / cells.pairs)
    spread = squares - total**2 / cells.pairs
    covariance /= np.sqrt(np.where(spread > 0, spread, np.nan) * cells.spread)
    return covariance


def slope_profile(
    driver: FloatArray, response: FloatArray, window: int, shifts: IntArray, r: FloatArray
) -> FloatArray:
    """Slope at each shift: r times the ratio of the standard deviations of the pairs."""
    x = np.lib.stride_tricks.sliding_window_view(driver, window).mean(axis=1)
    y = np.lib.stride_tricks.sliding_window_view(response, window).mean(axis=1)
    slopes = np.full(shifts.size, np.nan)
    for place in np.flatnonzero(np.isfinite(r)):
        early, late = _pair(x, y, int(shifts[place]))
        slopes[place] = r[place] * late.std() / early.std()
    return slopes


def simulated_responses(
    driver: FloatArray,
    response: FloatArray,
    *,
    window: int,
    shift: int,
    slope: float,
    draws: int,
    rng: np.random.Generator,
) -> FloatArray:
    """Responses in which the driver leads by `shift`, with a smoothed slope of `slope` there.

    Parameters
    ----------
    driver, response : ndarray of float, shape (n,)
        The pair observed.
    window, shift : int
        Periods averaged, and the candidate.
    slope : float
        Slope of the response's mean on the driver's at the candidate.
    draws : int
        Number of responses.
    rng : numpy.random.Generator
        Source of the noise.

    Returns
    -------
    ndarray of float, shape (draws, n)
        In deviations from their mean: the driver's mean over `effect_width` periods, centred
        `shift` periods earlier, times a constant, plus autoregressive noise like the residual of
        that fit (Burg, AIC). What lies before the first period or after the last counts as 0.
    """
    box = effect_width(window)
    driver = driver - driver.mean()
    # The mean over t - shift - box/2 .. t - shift + box/2, the two ends counted half.
    weights = np.full(box + 1, 1.0 / box)
    weights[[0, -1]] /= 2.0
    smooth = np.convolve(driver, weights, "full")
    effect = np.zeros(driver.size)
    sources = np.arange(driver.size) - shift + box // 2
    inside = (sources >= 0) & (sources < smooth.size)
    effect[inside] = smooth[sources[inside]]

    x = np.lib.stride_tricks.sliding_window_view(driver, window).mean(axis=1)
    y = np.lib.stride_tricks.sliding_window_view(effect, window).mean(axis=1)
    early, late = _pair(x, y, shift)
    early = early - early.mean()
    gain = float(early @ late) / float(early @ early)
    scale = slope / gain if abs(gain) > 1e-6 else 0.0
    centred = response - response.mean()
    noise = autoregressive_surrogates(centred - scale * effect, draws, rng)
    return noise + scale * effect


def _pair(early: FloatArray, late: FloatArray, shift: int) -> tuple[FloatArray, FloatArray]:
    """Values of `early` and, `shift` periods on, of `late`, where both exist."""
    n = early.size - abs(shift)
    return (early[:n], late[shift:]) if shift >= 0 else (early[-shift:], late[:n])
