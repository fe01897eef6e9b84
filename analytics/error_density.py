"""How the error of intercept and slope is spread: their joint density around the estimate."""

from dataclasses import dataclass

import numpy as np

from analytics.robust import CellInference
from analytics.series import FloatArray, read_only


@dataclass(frozen=True, eq=False)
class ErrorDensity:
    """Result of `error_density`; arrays are read-only.

    Attributes
    ----------
    intercept, slope : ndarray of float, shape (k,)
        The grid, in the units of the line.
    density : ndarray of float, shape (k, k)
        Per unit of intercept and of slope; rows are slopes.
    level_height : float
        Density on the outline of the joint region at the level of the inference.
    freedom : float
        Degrees of freedom, effective months less 2.
    """

    intercept: FloatArray
    slope: FloatArray
    density: FloatArray
    level_height: float
    freedom: float


def error_density(inference: CellInference, *, steps: int = 61, reach: float = 1.4) -> ErrorDensity:
    """Joint density of intercept and slope, by effective months.

    Parameters
    ----------
    inference : CellInference
        The cell.
    steps : int, default 61
        Points of the grid along each side, 2 or more.
    reach : float, default 1.4
        How far the grid goes, in half-widths of the joint region.

    Returns
    -------
    ErrorDensity

    Raises
    ------
    ValueError
        Steps are below 2, or the region has no area: the line fits without error.

    Notes
    -----
    The bivariate t that belongs to the region: with Q = (v - estimate)' C^-1 (v - estimate),
    ``(1 + Q / f)^-(f + 2)/2 / (2 pi sqrt(det C))``. Q / 2 then follows F(2, f), so the region
    ``Q <= 2 F`` of `cell_inference` is its set of highest density and holds exactly its level.
    Read it as the spread of the error of estimation, and as a belief about the two only under a
    flat prior.
    """
    plane, freedom = inference.plane, inference.effective_months - 2.0
    root = np.sqrt(float(np.linalg.det(plane.covariance)))
    if steps < 2:
        raise ValueError(f"steps must be 2 or more, but got {steps}")
    if not root > 0.0:
        raise ValueError("the line must have an error to be spread, but fits without one")
    half = reach * np.abs(plane.robust - plane.estimate).max(axis=0)
    intercept, slope = (
        np.linspace(centre - wide, centre + wide, steps)
        for centre, wide in zip(plane.estimate, half, strict=True)
    )
    away = np.stack(np.meshgrid(intercept, slope)) - plane.estimate[:, None, None]
    inverse = np.linalg.inv(plane.covariance)
    q = np.einsum("iab,ij,jab->ab", away, inverse, away)
    edge = plane.robust[0] - plane.estimate
    peak, power = 1.0 / (2.0 * np.pi * root), -0.5 * (freedom + 2.0)
    return ErrorDensity(
        intercept=read_only(intercept),
        slope=read_only(slope),
        density=read_only(peak * (1.0 + q / freedom) ** power),
        level_height=float(peak * (1.0 + edge @ inverse @ edge / freedom) ** power),
        freedom=float(freedom),
    )
