"""Distributed lags: the response on all shifts of the driver at once."""

from dataclasses import dataclass
from typing import Literal, get_args

import numpy as np
from numpy.typing import ArrayLike

from analytics.lag_profile import (
    LagProfile,
    fixed_b_critical,
    lag_profile,
    lagged,
    long_run_products,
    neighbour_matrix,
    usual_truncation,
)
from analytics.series import FloatArray
from analytics.surface import growth_pair

LagForm = Literal["smooth", "polynomial", "unrestricted"]


@dataclass(frozen=True, eq=False)
class DistributedLag:
    """Result of `distributed_lag`.

    Attributes
    ----------
    weights : LagProfile
        Response at lag k to one percentage point of driver growth in one month.
    cumulative : LagProfile
        Sum of the weights up to lag k: response to growth that is one point higher for good.
    averaged : LagProfile
        Mean of the weights over `window` neighbouring lags, on which `peak` rests.
    window : int
        Lags averaged.
    intercept : float
        Percent a month.
    form : {"smooth", "polynomial", "unrestricted"}
        What was assumed about the shape of the weights.
    penalty : float
        Price of unevenness; 0 unless the form is "smooth".
    parameters : float
        Effective number of free weights, up to the number of lags.
    n : int
        Months in the regression.
    truncation : int
        Last lag of the residual correlation allowed for in the bands.
    """

    weights: LagProfile
    cumulative: LagProfile
    averaged: LagProfile
    window: int
    intercept: float
    form: LagForm
    penalty: float
    parameters: float
    n: int
    truncation: int

    @property
    def peak(self) -> int:
        """Lag, in months, around which the response is strongest."""
        return self.averaged.peak


def distributed_lag(
    driver: ArrayLike,
    response: ArrayLike,
    *,
    max_shift: int,
    form: LagForm = "smooth",
    degree: int = 4,
    penalty: float | None = None,
    window: int = 1,
    truncation: int | None = None,
    level: float = 0.95,
) -> DistributedLag:
    """Regress the response on the driver of the same month and of each of the months before.

    Parameters
    ----------
    driver, response : array_like of float, shape (T,)
        Growth rates in percent, one a month, same months, no gaps. Not smoothed.
    max_shift : int
        Longest lag K reported, in months. With `window` above 1, ``window // 2`` more lags are
        estimated, so that the mean around lag K exists.
    form : {"smooth", "polynomial", "unrestricted"}
        Weights that prefer an even course, by a penalty on their second differences (Shiller
        1973); that lie on a polynomial (Almon 1965); or that are free.
    degree : int, default 4
        Of the polynomial.
    penalty : float, optional
        Price of a squared second difference, in squared units of the driver times months;
        by default the one that generalised cross-validation picks.
    window : int, default 1
        Neighbouring lags averaged before the peak is looked for.
    truncation : int, optional
        Of the Bartlett weights; by default ``1.3 sqrt(n)``.
    level : float, default 0.95
        Confidence of the bands, one lag at a time.

    Returns
    -------
    DistributedLag

    Raises
    ------
    ValueError
        The series cannot be paired, fewer months are left than twice the lags, the lags of the
        driver are linearly dependent, or an option is out of range.

    Notes
    -----
    With X the lags and y the response in deviations from their means, and P the penalty matrix,
    the weights are ``A^-1 X'y``, ``A = X'X + penalty P``, and their covariance is
    ``A^-1 S A^-1 + penalty s^2 A^-1 P A^-1``: S is the long-run product of regressor times
    residual (Newey and West 1987) times n over n less the parameters, with critical values for
    a truncation that grows with the sample (Kiefer and Vogelsang 2005); the second part is the
    expected squared bias of a smooth curve (Nychka 1988), 0 without a penalty.

    Bands of 95 % held the true weights of an effect that begins and ends abruptly at 95 % of
    the lags when unrestricted, at 88 to 93 % when smooth, and at 59 to 83 % on a polynomial of
    degree 4, which cannot follow such a course. For an effect spread over 13 months the smooth
    bands are half as wide as the unrestricted (own measurement, tests/bench/second_opinions).

    Examples
    --------
    >>> rng = np.random.default_rng(1)
    >>> driver = rng.standard_normal(400)
    >>> response = 0.5 * np.roll(driver, 9) + 0.3 * rng.standard_normal(400)
    >>> distributed_lag(driver, response, max_shift=24).peak
    9
    """
    x, y = growth_pair(driver, response)
    if form not in get_args(LagForm):
        raise ValueError(f"form must be one of {', '.join(get_args(LagForm))}, but got {form!r}")
    if max_shift < 0:
        raise ValueError(f"max_shift must be 0 or more, but got {max_shift}")
    if penalty is not None and not penalty >= 0.0:
        raise ValueError(f"penalty must be 0 or more, but got {penalty}")
    means = neighbour_matrix(max_shift, window)
    lags = means.shape[1]
    n = x.size - lags + 1
    if n < 2 * lags:
        raise ValueError(
            f"the regression must have at least {2 * lags} months for {lags} lags, but"
            f" {x.size} months leave {max(0, n)}"
        )
    bartlett = usual_truncation(n) if truncation is None else truncation
    if not 0 <= bartlett < n:
        raise ValueError(f"truncation must be from 0 to {n - 1}, but got {bartlett}")
    critical = fixed_b_critical(bartlett, n, level)

    design = lagged(x, np.arange(lags), lags - 1)
    past_mean = design.mean(axis=0)
    design = design - past_mean
    late = y[lags - 1 :] - y[lags - 1 :].mean()
    basis = np.eye(lags)
    if form == "polynomial":
        basis = _polynomials(lags, degree)
    price = np.zeros((basis.shape[1], basis.shape[1]))
    if form == "smooth" and lags > 2:
        bend = np.diff(np.eye(lags), n=2, axis=0)
        price = bend.T @ bend
    free, spectrum, rotation, chosen = _fit(design @ basis, late, price, penalty)
    residuals = late - design @ (basis @ free)
    shrink = 1.0 / (1.0 + chosen * spectrum)
    parameters = float(shrink.sum())
    inverse = basis @ (rotation * shrink) @ rotation.T  # A^-1 X'e is what the noise adds
    scores = (design @ basis) * residuals[:, None]
    covariance = inverse @ long_run_products(scores, bartlett) @ inverse.T
    covariance *= n / (n - 1.0 - parameters)
    if chosen > 0.0:
        variance = float(residuals @ residuals) / (n - 1 - parameters)
        covariance += chosen * variance * inverse @ price @ inverse.T

    weights = basis @ free
    shown = np.eye(lags)[: max_shift + 1]
    sums = np.tri(max_shift + 1, lags)

    def profile(combination: FloatArray) -> LagProfile:
        spread = np.einsum("ij,jk,ik->i", combination, covariance, combination)
        return lag_profile(combination @ weights, spread, critical=critical, level=level)

    return DistributedLag(
        weights=profile(shown),
        cumulative=profile(sums),
        averaged=profile(means),
        window=window,
        intercept=float(y[lags - 1 :].mean() - past_mean @ weights),
        form=form,
        penalty=chosen,
        parameters=parameters,
        n=n,
        truncation=bartlett,
    )


def _polynomials(lags: int, degree: int) -> FloatArray:
    """Orthonormal polynomials of degree 0 to `degree` over the lags, shape (lags, degree + 1)."""
    if not 0 <= degree < lags:
        raise ValueError(f"degree must be from 0 to {lags - 1}, but got {degree}")
    powers = np.polynomial.legendre.legvander(np.linspace(-1.0, 1.0, lags), degree)
    orthonormal: FloatArray = np.linalg.qr(powers)[0]
    return orthonormal


def _fit(
    design: FloatArray, late: FloatArray, price: FloatArray, penalty: float | None
) -> tuple[FloatArray, FloatArray, FloatArray, float]:
    """Penalised least squares: coefficients, spectrum and rotation of the penalty, penalty.

    The rotation V has V'(X'X)V = I and V'PV = diag(spectrum), so that every penalty costs no
    more than a sum over the columns.
    """
    from scipy.linalg import LinAlgError, eigh

    try:
        spectrum, rotation = eigh(price, design.T @ design)
    except LinAlgError:
        raise ValueError(
            "driver must have linearly independent lags, but its lags repeat each other"
        ) from None
    spectrum = np.maximum(spectrum, 0.0)
    projected = rotation.T @ (design.T @ late)
    if not spectrum.any():
        return rotation @ projected, spectrum, rotation, 0.0
    if penalty is None:
        penalty = _cross_validated(spectrum, projected, float(late @ late), late.size)
    coefficients = rotation @ (projected / (1.0 + penalty * spectrum))
    return coefficients, spectrum, rotation, penalty


def _cross_validated(spectrum: FloatArray, projected: FloatArray, total: float, n: int) -> float:
    """Penalty with the least generalised cross-validation score (Craven and Wahba 1979)."""
    middle = 1.0 / float(np.exp(np.mean(np.log(spectrum[spectrum > 1e-9 * spectrum.max()]))))
    candidates = middle * np.logspace(-8.0, 8.0, 161)
    shrink = 1.0 / (1.0 + np.outer(candidates, spectrum))
    squares = total - (shrink * (2.0 - shrink)) @ projected**2
    room = n - 1.0 - shrink.sum(axis=1)
    score = np.where(room > 0.0, squares / np.maximum(room, 1.0) ** 2, np.inf)
    return float(candidates[int(np.argmin(score))])
