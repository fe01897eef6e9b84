"""Holm's adjustment, against statsmodels and by hand."""

import numpy as np
import pytest

from analytics.several import holm


def test_by_hand():
    """0.01 * 4, 0.02 * 3, 0.03 * 2, 0.5 * 1, each no less than the one before."""
    np.testing.assert_allclose(holm([0.5, 0.01, 0.03, 0.02]), [0.5, 0.04, 0.06, 0.06])


def test_equals_statsmodels():
    """statsmodels.stats.multitest.multipletests, method holm."""
    from statsmodels.stats.multitest import multipletests

    rng = np.random.default_rng(8)
    for k in (1, 2, 7, 40):
        p = rng.uniform(size=k) ** 2
        np.testing.assert_allclose(holm(p), multipletests(p, method="holm")[1])


def test_refusals_and_nothing():
    assert holm([]).size == 0
    for wrong in ([1.2], [-0.1], [np.nan]):
        with pytest.raises(ValueError, match="from 0 to 1"):
            holm(wrong)
    with pytest.raises(ValueError, match="one-dimensional"):
        holm([[0.1]])
