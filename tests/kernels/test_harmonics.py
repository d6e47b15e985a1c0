import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from armeval.kernels.harmonics import harmonic_series, harmonic_sums


@given(seed=st.integers(0, 2**32 - 1), count=st.integers(1, 40), highest=st.integers(0, 200))
def test_sums_are_those_of_the_definition(seed: int, count: int, highest: int) -> None:
    rng = np.random.default_rng(seed)
    angle, weight = rng.uniform(-20.0, 20.0, count), rng.standard_normal(count)
    plain = np.exp(-1j * np.outer(np.arange(highest + 1), angle)) @ weight
    np.testing.assert_allclose(harmonic_sums(angle, weight, highest), plain, atol=1e-11 * count)


@given(seed=st.integers(0, 2**32 - 1), count=st.integers(1, 40), orders=st.integers(1, 200))
def test_a_series_is_that_of_the_definition(seed: int, count: int, orders: int) -> None:
    rng = np.random.default_rng(seed)
    angle = rng.uniform(-20.0, 20.0, count)
    c = rng.standard_normal(orders) + 1j * rng.standard_normal(orders)
    c[0] = c[0].real
    plain = c[0].real + 2.0 * sum((c[k] * np.exp(1j * k * angle)).real for k in range(1, orders))
    np.testing.assert_allclose(harmonic_series(angle, c), plain, atol=1e-11 * orders)


def test_long_rows_are_summed_block_by_block_without_a_seam() -> None:
    angle = np.linspace(0.0, 7.0, 70_001)
    weight = np.cos(3.0 * angle)
    plain = np.exp(-1j * np.outer([0, 1, 5], angle)) @ weight
    np.testing.assert_allclose(harmonic_sums(angle, weight, 5)[[0, 1, 5]], plain, rtol=1e-10, atol=1e-8)
    np.testing.assert_allclose(harmonic_series(angle, np.array([0, 0, 0, 0.5 + 0j])), weight, atol=1e-12)


def test_no_angle_gives_no_sum() -> None:
    assert harmonic_sums(np.empty(0), np.empty(0), 3) == pytest.approx(np.zeros(4))
    assert harmonic_series(np.empty(0), np.ones(3, dtype=complex)).shape == (0,)
