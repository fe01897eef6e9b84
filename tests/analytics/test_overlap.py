"""Smoothed rows and moments against one slice at a time."""

import numpy as np
import pytest

from analytics.overlap import overlap_moments, smoothed_rows, span_moments
from analytics.rates import trailing_mean

RNG = np.random.default_rng(1)
X, Y = RNG.standard_normal((2, 90)).cumsum(axis=1)
WINDOWS = np.array([1, 2, 7, 12, 60])


def test_rows_are_trailing_means_then_zeros():
    rows = smoothed_rows(X, WINDOWS)
    assert rows.shape == (5, 90)
    for row, window in zip(rows, WINDOWS.tolist(), strict=True):
        np.testing.assert_allclose(row[: 91 - window], trailing_mean(X, window), atol=1e-13)
        assert (row[91 - window :] == 0.0).all()


@pytest.mark.parametrize("value", [0.1, 1.0 / 3.0, 1e6 + 0.1])
def test_rows_of_a_constant_are_constant(value):
    rows = smoothed_rows(np.full(90, value), WINDOWS)
    for row, window in zip(rows, WINDOWS.tolist(), strict=True):
        assert np.ptp(row[: 91 - window]) == 0.0


@pytest.mark.parametrize("shifts", [range(-25, 26), range(3, 9), [-7], [0], [-29, 28]])
def test_overlap_moments_equal_slices(shifts):
    shifts, sizes = np.array(shifts), 91 - WINDOWS
    xs, ys = smoothed_rows(X, WINDOWS), smoothed_rows(Y, WINDOWS)
    moments = overlap_moments(xs, ys, sizes, shifts)
    assert moments.shape == (5, 5, shifts.size)
    for i, size in enumerate(sizes.tolist()):
        for j, shift in enumerate(shifts.tolist()):
            n = size - abs(shift)
            x, y = xs[i, max(0, -shift) :][:n], ys[i, max(0, shift) :][:n]
            dx, dy = x - x.mean(), y - y.mean()
            judge = [x.mean(), y.mean(), dx @ dx, dy @ dy, dx @ dy]
            np.testing.assert_allclose(moments[:, i, j], judge, rtol=1e-9, atol=1e-10)


def test_span_moments_equal_slices():
    moments = span_moments(X, Y, np.array([-10, 0, 15]), (12, 60))
    for j, shift in enumerate((-10, 0, 15)):
        x, y = X[12:60], Y[12 + shift : 60 + shift]
        covariance = np.cov(x, y) * 47
        judge = [covariance[0, 0], covariance[1, 1], covariance[0, 1]]
        np.testing.assert_allclose(moments[:, j], judge, rtol=1e-12, atol=1e-10)
