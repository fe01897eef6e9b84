"""p-values that pay for having asked several questions."""

import numpy as np
from numpy.typing import ArrayLike

from analytics.series import FloatArray, read_only


def holm(p: ArrayLike) -> FloatArray:
    """Adjust p-values so that the chance of any false find stays at its level (Holm 1979).

    Parameters
    ----------
    p : array_like of float, shape (k,)
        One a question, 0 to 1.

    Returns
    -------
    ndarray of float, shape (k,), read-only
        The i-th smallest times k - i + 1, made increasing and cut at 1.

    Raises
    ------
    ValueError
        A value is not from 0 to 1, or the input is not one-dimensional.

    References
    ----------
    Holm (1979), A simple sequentially rejective multiple test procedure, Scand. J. Statist. 6.

    Examples
    --------
    >>> holm([0.01, 0.04, 0.03])
    array([0.03, 0.06, 0.06])
    """
    values = np.asarray(p, dtype=np.float64)
    if values.ndim != 1:
        raise ValueError(f"p must be one-dimensional, but got shape {values.shape}")
    if not ((values >= 0.0) & (values <= 1.0)).all():
        raise ValueError("p must be from 0 to 1, but one is not")
    order = np.argsort(values, kind="stable")
    grown = np.maximum.accumulate(values[order] * np.arange(values.size, 0, -1))
    adjusted = np.empty_like(values)
    adjusted[order] = np.minimum(1.0, grown)
    return read_only(adjusted)
