"""A periodic table against the function that it was made of."""

import numpy as np
import pytest

from armeval.kernels.periodic import hermite_table, periodic_slope, periodic_slopes, periodic_value, periodic_values

ORDER, AMPLITUDE, PHASE = 84, 0.02, 0.3


def wave(angle):
    return AMPLITUDE * np.sin(ORDER * angle + PHASE)


def wave_slope(angle):
    return AMPLITUDE * ORDER * np.cos(ORDER * angle + PHASE)


@pytest.fixture(scope="module")
def table():
    return hermite_table(wave(2.0 * np.pi * np.arange(4096) / 4096))


def test_a_harmonic_is_given_back_between_the_nodes(table):
    angle = np.random.default_rng(0).uniform(-30.0, 30.0, 2000)
    # Bound of cubic Hermite interpolation: h^4 max|f''''| / 384.
    bound = AMPLITUDE * (ORDER * 2.0 * np.pi / 4096) ** 4 / 384.0
    assert np.abs(periodic_values(table, angle) - wave(angle)).max() <= 1.01 * bound


def test_the_slope_is_that_of_the_harmonic(table):
    angle = np.random.default_rng(1).uniform(-30.0, 30.0, 2000)
    assert periodic_slopes(table, angle) == pytest.approx(wave_slope(angle), abs=2e-4 * AMPLITUDE * ORDER)


def test_the_slope_is_the_derivative_of_the_value(table):
    step = 1e-6
    for angle in np.random.default_rng(2).uniform(-7.0, 7.0, 50):
        difference = (periodic_value(table, angle + step) - periodic_value(table, angle - step)) / (2.0 * step)
        assert periodic_slope(table, angle) == pytest.approx(difference, abs=1e-5)


def test_the_table_repeats_after_each_turn(table):
    for angle in (-1e-17, -1e-3, 0.0, 2.0 * np.pi - 1e-12, 5.0):
        assert periodic_value(table, angle) == pytest.approx(periodic_value(table, angle + 14.0 * np.pi), abs=1e-11)


@pytest.mark.parametrize("size", [8, 9])
def test_nodes_hold_value_and_slope_for_even_and_odd_sizes(size):
    angle = 2.0 * np.pi * np.arange(size) / size
    table = hermite_table(np.sin(3.0 * angle) + 0.5)
    assert table[:, 0] == pytest.approx(np.sin(3.0 * angle) + 0.5)
    assert table[:, 1] == pytest.approx(3.0 * np.cos(3.0 * angle))
