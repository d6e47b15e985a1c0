import numpy as np
import pytest

from armeval.kernels.moments import moments, squares_in_bins


def test_moments_of_a_row():
    values = np.random.default_rng(0).standard_normal(1000)
    assert moments(values) == pytest.approx((values.sum(), np.sum(values**2), values.max()))


def test_squares_fall_into_their_bins_and_empty_bins_stay_empty():
    values = np.arange(1.0, 7.0)
    squares, fourth = squares_in_bins(values, np.array([0, 2, 2, 5, 6]))
    np.testing.assert_allclose(squares, [5.0, 0.0, 50.0, 36.0])
    assert fourth == pytest.approx(np.sum(values**4))
