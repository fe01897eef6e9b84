"""Series that look like a given one and owe nothing to any other: what chance would draw."""

import numpy as np
from numpy.typing import ArrayLike
from scipy import fft

from analytics.autoregression import Autoregression, autoregression
from analytics.series import FloatArray


def phase_surrogates(values: ArrayLike, draws: int, rng: np.random.Generator) -> FloatArray:
    """Series with the mean and the periodogram of `values` and random phases.

    Parameters
    ----------
    values : array_like of float, shape (n,)
        One a period, no gaps.
    draws : int
        Number of surrogates.
    rng : numpy.random.Generator
        Source of the phases.

    Returns
    -------
    ndarray of float, shape (draws, n)
        In the unit of `values`. Mean and periodogram, hence the circular autocorrelation, are
        those of `values` up to rounding.

    Raises
    ------
    ValueError
        A value is not finite, or `draws` is below 1.

    Notes
    -----
    Each Fourier coefficient is turned by an independent angle, uniform over the circle; the mean
    stays, and with n even the coefficient of the fastest cycle keeps or changes its sign. The
    method is that of Theiler, Eubank, Longtin, Galdrikian and Farmer (1992), Physica D 58, 77-94
    (cited from memory). A seasonal pattern keeps its strength; with n a whole number of years it
    also keeps its sharpness.

    Examples
    --------
    >>> values = np.array([3.0, 1.0, 4.0, 1.0, 5.0])
    >>> copies = phase_surrogates(values, 3, np.random.default_rng(1))
    >>> copies.shape, bool(np.allclose(copies.mean(axis=1), values.mean()))
    ((3, 5), True)
    """
    array = _finite(values)
    _some(draws)
    spectrum = fft.rfft(array)
    turns = np.ones((draws, spectrum.size), dtype=np.complex128)
    cycles = (array.size - 1) // 2
    angles = rng.uniform(0.0, 2.0 * np.pi, (draws, cycles))
    turns.real[:, 1 : cycles + 1] = np.cos(angles)
    turns.imag[:, 1 : cycles + 1] = np.sin(angles)
    if array.size % 2 == 0:
        turns.real[:, -1] = rng.choice((-1.0, 1.0), draws)
    turns *= spectrum
    surrogates: FloatArray = fft.irfft(turns, array.size, axis=1, overwrite_x=True)
    return surrogates


def autoregressive_surrogates(
    values: ArrayLike,
    draws: int,
    rng: np.random.Generator,
    *,
    model: Autoregression | None = None,
) -> FloatArray:
    """Series from the autoregression of `values` with its own surprises in random order.

    Parameters
    ----------
    values : array_like of float, shape (n,)
        One a period, no gaps.
    draws : int
        Number of surrogates.
    rng : numpy.random.Generator
        Source of the surprises.
    model : Autoregression, optional
        By default that of Burg, its order by AIC.

    Returns
    -------
    ndarray of float, shape (draws, n)
        In the unit of `values`, with their mean.

    Raises
    ------
    ValueError
        A value is not finite, the series does not vary, or `draws` is below 1.

    Notes
    -----
    The sieve bootstrap of Bühlmann (1997), Bernoulli 3, 123-148 (cited from memory): the
    surprises are the residuals of the model, centred and drawn with replacement. They are
    filtered on a circle so long that its ends have forgotten each other, which starts every
    series in its stationary state. It knows no season and no step: for series that have
    them use `phase_surrogates`.

    Examples
    --------
    >>> values = np.random.default_rng(1).standard_normal(100)
    >>> autoregressive_surrogates(values, 3, np.random.default_rng(2)).shape
    (3, 100)
    """
    array = _finite(values)
    _some(draws)
    fitted = autoregression(array) if model is None else model
    whitening = np.concatenate(([1.0], -fitted.coefficients))
    centred = array - array.mean()
    surprises = np.convolve(centred, whitening)[fitted.order : array.size]
    surprises = surprises - surprises.mean()
    length = fft.next_fast_len(array.size + _memory(whitening), real=True)
    drawn = surprises[rng.integers(0, surprises.size, (draws, length), dtype=np.int32)]
    spectrum = fft.rfft(drawn, axis=1, overwrite_x=True)
    spectrum /= fft.rfft(whitening, length)
    surrogates: FloatArray = fft.irfft(spectrum, length, axis=1, overwrite_x=True)
    surrogates = surrogates[:, : array.size]
    surrogates += array.mean()
    return surrogates


def _memory(whitening: FloatArray, *, longest: int = 1000) -> int:
    """Periods after which a surprise has lost all but a thousandth of its effect."""
    pulse = np.zeros(longest)
    pulse[0] = 1.0
    from scipy.signal import lfilter

    effect = np.abs(lfilter([1.0], whitening, pulse))
    return int(np.flatnonzero(effect > 1e-3)[-1])


def _finite(values: ArrayLike) -> FloatArray:
    """Check one series without gaps."""
    array = np.asarray(values, dtype=np.float64)
    if array.ndim != 1 or array.size < 2 or not np.isfinite(array).all():
        raise ValueError("values must be one finite series, but got a gap or another shape")
    return array


def _some(draws: int) -> None:
    """Check the number of surrogates."""
    if draws < 1:
        raise ValueError(f"draws must be 1 or more, but got {draws}")
