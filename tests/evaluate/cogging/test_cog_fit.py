from __future__ import annotations

import numpy as np
import numpy.typing as npt
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from armeval.evaluate.cogging.cog_fit import entry_variance, fit, merged, on_even_angles, supported_bandwidth

FloatArray = npt.NDArray[np.float64]
TURN = 2.0 * np.pi


@settings(deadline=None, max_examples=40)
@given(seed=st.integers(0, 2**32 - 1), bandwidth=st.integers(1, 20), crowded=st.floats(0.0, 0.7))
def test_the_fit_is_the_weighted_least_squares_solution(seed: int, bandwidth: int, crowded: float) -> None:
    rng = np.random.default_rng(seed)
    even = TURN * (np.arange(200) + 0.4 * rng.uniform(-1.0, 1.0, 200)) / 200
    samples = merged(even + crowded * np.sin(even), rng.standard_normal(200))
    order = np.arange(-bandwidth, bandwidth + 1)
    root = np.sqrt(samples.weight)
    solution, *_ = np.linalg.lstsq(
        root[:, None] * np.exp(1j * np.outer(samples.angle, order)), root * samples.torque, rcond=None
    )
    np.testing.assert_allclose(fit(samples, bandwidth), solution[bandwidth:], atol=1e-9)


def test_weights_are_shares_of_the_turn() -> None:
    samples = merged(np.radians([350.0, 10.0, 90.0, 180.0]), np.zeros(4))
    np.testing.assert_allclose(samples.weight, np.array([50.0, 85.0, 130.0, 95.0]) / 360.0)


def test_repeats_are_merged_around_the_turn() -> None:
    samples = merged(np.array([0.0, 1.0, TURN, -TURN, 1.0 + 3 * TURN, -1e-9]), np.array([1.0, 5.0, 2.0, 3.0, 7.0, 2.0]))
    np.testing.assert_allclose(samples.angle, [0.0, 1.0], atol=1e-8)
    np.testing.assert_allclose(samples.torque, [2.0, 6.0])
    np.testing.assert_array_equal(samples.readings, [4, 2])
    assert samples.squares == pytest.approx(2.0 + 2.0)


def test_a_dense_row_of_angles_is_not_merged_into_one() -> None:
    samples = merged(np.linspace(0.0, 1e-3, 10_000), np.zeros(10_000))
    assert samples.angle.size > 50
    assert samples.gap[:-1].max() < 4e-5


@pytest.mark.parametrize(("missing", "bandwidth"), [(0, 512), (1, 255), (5, 85), (6, 73)])
def test_half_a_period_of_the_highest_order_spans_the_widest_gap(missing: int, bandwidth: int) -> None:
    angle = np.delete(TURN * np.arange(1024) / 1024, np.arange(300, 300 + missing))
    assert supported_bandwidth(merged(angle, np.zeros(angle.size)), 4096) == bandwidth


def test_a_small_table_holds_no_order_that_it_cannot_show() -> None:
    assert supported_bandwidth(merged(TURN * np.arange(1024) / 1024, np.zeros(1024)), 256) == 127


def test_few_repeats_say_nothing_of_noise() -> None:
    angle = TURN * np.arange(100) / 100
    with_a_row_for_360_deg = merged(np.append(angle, TURN), np.zeros(101))
    assert entry_variance(with_a_row_for_360_deg, 50) is None
    assert entry_variance(merged(np.tile(angle, 2), np.repeat([-1.0, 1.0], 100)), 50) == pytest.approx(1.0)


def test_a_polynomial_is_evaluated_at_even_angles_up_to_the_highest_order_of_the_table() -> None:
    at = TURN * np.arange(16) / 16
    np.testing.assert_allclose(on_even_angles(np.array([1.0, 0.0, 0.5j]), 16), 1.0 - np.sin(2 * at), atol=1e-14)
    highest = np.zeros(9, dtype=complex)
    highest[8] = 0.5
    np.testing.assert_allclose(on_even_angles(highest, 16), np.cos(8 * at), atol=1e-14)
