"""Economies whose lag, slope and noise are known: the judges of every estimate in this package."""

from dataclasses import dataclass
from typing import Literal, get_args

import numpy as np
from numpy.typing import ArrayLike, NDArray

from analytics.series import FloatArray, read_only

Law = Literal["normal", "laplace"]


@dataclass(frozen=True, eq=False)
class PlantedPair:
    """Result of `planted_pair`: two growth rates and the relation that was built into them.

    Attributes
    ----------
    driver, response : ndarray of float, shape (n,), read-only
        Growth rates in percent a month, same months.
    noise : ndarray of float, shape (n,), read-only
        The part of the response that owes nothing to the driver, in percent a month.
    lag : int
        Months by which the driver leads; below 0 the response leads.
    slope : float
        Percent of response for one percent of driver, once the effect is complete.
    baseline : float
        Percent a month of response at a driver of zero.
    spread : int
        Months, odd, centred on `lag`, over which the effect is spread evenly.
    """

    driver: FloatArray
    response: FloatArray
    noise: FloatArray
    lag: int
    slope: float
    baseline: float
    spread: int


def white_noise(rng: np.random.Generator, n: int, *, sd: float, law: Law = "normal") -> FloatArray:
    """Independent draws with mean zero.

    Parameters
    ----------
    rng : numpy.random.Generator
        Source of the draws.
    n : int
        Number of draws.
    sd : float
        Standard deviation, the same whatever the law. A Laplace variable of scale b has
        standard deviation ``b sqrt(2)`` and excess kurtosis 3 [1]_.
    law : {"normal", "laplace"}
        Shape of the distribution.

    Returns
    -------
    ndarray of float, shape (n,)

    Raises
    ------
    ValueError
        `n` or `sd` is negative, or the law is unknown.

    References
    ----------
    .. [1] Johnson, Kotz and Balakrishnan (1995), Continuous Univariate Distributions,
       vol. 2, 2nd ed., ch. 24.
    """
    if n < 0:
        raise ValueError(f"n must be 0 or more, but got {n}")
    if sd < 0:
        raise ValueError(f"sd must be 0 or more, but got {sd}")
    if law not in get_args(Law):
        raise ValueError(f"law must be one of {', '.join(get_args(Law))}, but got {law!r}")
    if law == "laplace":
        return rng.laplace(scale=sd / np.sqrt(2.0), size=n)
    return rng.normal(scale=sd, size=n)


def ar_process(
    rng: np.random.Generator, n: int, *, ar: float, sd: float, law: Law = "normal"
) -> FloatArray:
    """First-order autoregression around zero, ``x_t = ar x_(t-1) + e_t``, in its stationary state.

    Parameters
    ----------
    rng : numpy.random.Generator
        Source of the draws.
    n : int
        Number of values.
    ar : float
        Autocorrelation at one step, above -1 and below 1; at k steps it is ``ar**k``.
    sd : float
        Standard deviation of x, not of e.
    law : {"normal", "laplace"}
        Law of e.

    Returns
    -------
    ndarray of float, shape (n,)
        The state before the first value has forgotten where it began to within 1e-9.

    Raises
    ------
    ValueError
        `ar` is not inside (-1, 1), or what `white_noise` refuses.
    """
    if not -1.0 < ar < 1.0:
        raise ValueError(f"ar must be above -1 and below 1, but got {ar}")
    start_up = 0 if ar == 0.0 else int(np.ceil(np.log(1e-9) / np.log(abs(ar))))
    shocks = white_noise(rng, start_up + n, sd=sd * float(np.sqrt(1.0 - ar**2)), law=law)
    values = np.empty(start_up + n)
    state = 0.0
    for step, shock in enumerate(shocks.tolist()):
        state = ar * state + shock
        values[step] = state
    return values[start_up:]


def garch_noise(
    rng: np.random.Generator, n: int, *, sd: float, arch: float = 0.1, garch: float = 0.85
) -> FloatArray:
    """Uncorrelated noise whose variance comes in clusters.

    The variance follows ``h_t = sd^2 (1 - arch - garch) + arch e_(t-1)^2 + garch h_(t-1)`` [1]_,
    so that its long-run mean is ``sd^2``.

    Parameters
    ----------
    rng : numpy.random.Generator
        Source of the draws.
    n : int
        Number of values.
    sd : float
        Standard deviation in the long run.
    arch, garch : float
        Weights of the last squared shock and of the last variance, 0 or more, sum below 1.

    Returns
    -------
    ndarray of float, shape (n,)

    Raises
    ------
    ValueError
        A weight is negative or the two do not sum to less than 1.

    References
    ----------
    .. [1] Bollerslev (1986), Generalized autoregressive conditional heteroskedasticity, Journal of
       Econometrics 31, section 2.
    """
    if min(arch, garch) < 0.0 or arch + garch >= 1.0:
        raise ValueError(
            f"arch and garch must be 0 or more and sum to less than 1, but got {arch} and {garch}"
        )
    start_up = 500
    draws = white_noise(rng, start_up + n, sd=1.0)
    values = np.empty(start_up + n)
    variance = sd**2
    for step, draw in enumerate(draws.tolist()):
        values[step] = draw * variance**0.5
        variance = sd**2 * (1.0 - arch - garch) + (arch * draw**2 + garch) * variance
    return values[start_up:]


def level_shift(n: int, *, at: int, size: float) -> FloatArray:
    """Zero before place `at`, `size` from there on; shape (n,)."""
    return np.where(np.arange(n) >= at, float(size), 0.0)


def hump(n: int, *, start: int, rise: int, hold: int, fall: int, size: float) -> FloatArray:
    """One episode: up along half a cosine, flat, and down along half a cosine.

    Parameters
    ----------
    n : int
        Number of values.
    start : int
        Place of the last zero before the rise; may lie outside 0..n-1.
    rise, hold, fall : int
        Steps spent going up (1 or more), at the top, and going down (1 or more).
    size : float
        Height of the top.

    Returns
    -------
    ndarray of float, shape (n,)
        The sum over a hump that lies inside is ``size * ((rise + fall) / 2 + hold)``.

    Raises
    ------
    ValueError
        `rise` or `fall` is below 1, or `hold` below 0.
    """
    if rise < 1 or fall < 1 or hold < 0:
        raise ValueError(
            f"rise and fall must be 1 or more and hold 0 or more, but got {rise}, {fall}, {hold}"
        )
    step = np.arange(n) - start
    up = np.clip(step / rise, 0.0, 1.0)
    down = np.clip((step - rise - hold) / fall, 0.0, 1.0)
    return 0.5 * size * (np.cos(np.pi * down) - np.cos(np.pi * up))


def lagged_effect(driver: ArrayLike, *, lag: int, spread: int = 1) -> FloatArray:
    """Mean of the driver over `spread` months around t - lag: what reaches the response.

    Parameters
    ----------
    driver : array_like of float, shape (n,)
        One value a month.
    lag : int
        Months from the driver to the middle of its effect; below 0 the effect comes first.
    spread : int, default 1
        Months over which the effect is spread evenly, odd; 1 is a pure delay.

    Returns
    -------
    ndarray of float, shape (n,)
        nan where a month of the driver that is needed lies outside.

    Raises
    ------
    ValueError
        `driver` is not one-dimensional or `spread` is not a positive odd number.

    Examples
    --------
    >>> lagged_effect([0.0, 3.0, 0.0, 0.0, 0.0], lag=2, spread=1)
    array([nan, nan,  0.,  3.,  0.])
    >>> lagged_effect([0.0, 3.0, 0.0, 0.0, 0.0], lag=2, spread=3)
    array([nan, nan, nan,  1.,  1.])
    """
    values = np.asarray(driver, dtype=np.float64)
    if values.ndim != 1:
        raise ValueError(f"driver must be one-dimensional, but got shape {values.shape}")
    if spread < 1 or spread % 2 == 0:
        raise ValueError(f"spread must be a positive odd number of months, but got {spread}")
    effect = np.full(values.size, np.nan)
    half = spread // 2
    first, last = max(0, lag + half), min(values.size, values.size + lag - half)
    if first < last:
        means = np.lib.stride_tricks.sliding_window_view(values, spread).mean(axis=1)
        effect[first:last] = means[first - lag - half : last - lag - half]
    return effect


def planted_pair(
    rng: np.random.Generator,
    n: int,
    *,
    lag: int,
    slope: float,
    baseline: float = 0.1,
    driver_ar: float = 0.5,
    driver_mean: float = 0.0,
    driver_sd: float = 1.0,
    noise: float = 1.0,
    noise_ar: float = 0.0,
    law: Law = "normal",
    spread: int = 1,
) -> PlantedPair:
    """Driver and response growth rates with ``response_t = baseline + slope effect_t + noise_t``.

    The effect is `lagged_effect` of the driver. A slope of 0 gives an unrelated pair.

    Parameters
    ----------
    rng : numpy.random.Generator
        Source of the draws.
    n : int
        Months of each series; every one of them has its effect, none is cut off.
    lag : int
        Months by which the driver leads; below 0 the response leads.
    slope, baseline : float
        Of the relation; the baseline in percent a month.
    driver_ar, driver_mean, driver_sd : float
        Autocorrelation at one month, mean and standard deviation of the driver.
    noise, noise_ar : float
        Standard deviation and autocorrelation at one month of the noise.
    law : {"normal", "laplace"}
        Law of the shocks of both.
    spread : int, default 1
        Months over which the effect is spread evenly, odd.

    Returns
    -------
    PlantedPair
        With spread 1 and white noise the share of the response's variance that comes from the
        driver is ``(slope driver_sd)^2 / ((slope driver_sd)^2 + noise^2)``.

    Raises
    ------
    ValueError
        What `ar_process` or `lagged_effect` refuse.

    Examples
    --------
    >>> pair = planted_pair(np.random.default_rng(1), 240, lag=18, slope=0.4, noise=0.0)
    >>> bool(np.allclose(pair.response[18:], 0.1 + 0.4 * pair.driver[:-18]))
    True
    """
    margin = abs(lag) + spread // 2
    long = driver_mean + ar_process(rng, n + 2 * margin, ar=driver_ar, sd=driver_sd, law=law)
    inside = slice(margin, margin + n)
    effect = lagged_effect(long, lag=lag, spread=spread)[inside]
    rest = ar_process(rng, n, ar=noise_ar, sd=noise, law=law)
    return PlantedPair(
        driver=read_only(long[inside]),
        response=read_only(baseline + slope * effect + rest),
        noise=read_only(rest),
        lag=lag,
        slope=float(slope),
        baseline=float(baseline),
        spread=spread,
    )


def levels_from_growth(growth: ArrayLike, *, start: float = 100.0) -> NDArray[np.float64]:
    """Level or index whose log growth rates are `growth`.

    Parameters
    ----------
    growth : array_like of float, shape (n,)
        ``100 ln(p_t / p_(t-1))`` in percent.
    start : float, default 100
        The value before the first growth rate; positive.

    Returns
    -------
    ndarray of float, shape (n + 1,)

    Raises
    ------
    ValueError
        `start` is not positive.
    """
    if not start > 0:
        raise ValueError(f"start must be positive, but got {start}")
    steps = np.cumsum(np.asarray(growth, dtype=np.float64)) / 100.0
    return start * np.exp(np.concatenate(([0.0], steps)))
