from __future__ import annotations

import math

import numpy as np
import numpy.typing as npt
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from armeval.evaluate.cogging.cog_loss import (
    Interpolation,
    compensation_table,
    lookup,
    order_residual,
    residual,
    table_gain,
    table_noise,
    table_power,
)
from armeval.model.cogmap import CogMap
from armeval.model.trial import Compensation

FloatArray = npt.NDArray[np.float64]
TURN = 2.0 * np.pi
ANGLE = TURN * np.arange(4096) / 4096
BOTH = pytest.mark.parametrize("interpolation", ["linear", "nearest"])


def sines(angle: FloatArray, harmonics: list[tuple[int, float, float]]) -> FloatArray:
    return sum((a * np.sin(n * angle + p) for n, a, p in harmonics), np.zeros_like(angle))


def rms(values: FloatArray) -> float:
    return float(np.sqrt(np.mean(values**2)))


# --- the table and its lookup


@pytest.mark.parametrize("bins", [64, 500, 1024])
def test_the_table_is_the_map_at_even_angles(bins: int) -> None:
    harmonics = [(12, 0.02, 0.4), (84, 0.01, 1.0)]
    table = compensation_table(CogMap(torque=sines(ANGLE, harmonics)), Compensation(table_bins=bins))
    np.testing.assert_allclose(table, sines(TURN * np.arange(bins) / bins, harmonics), atol=1e-14)


def test_the_noise_of_the_table_is_what_was_told_else_what_the_map_shows() -> None:
    cog_map = CogMap(torque=np.zeros(64), noise=2e-4)
    for told, expected in ((None, 2e-4), (5e-4, 5e-4), (0.0, 0.0)):
        compensation = Compensation(table_bins=50_000, map_noise=told)
        table = compensation_table(cog_map, compensation, np.random.default_rng(1))
        assert np.std(table) == pytest.approx(expected, rel=0.02)
        assert not compensation_table(cog_map, compensation).any()


def test_linear_lookup_is_the_line_between_two_entries_around_the_turn() -> None:
    table = np.array([0.0, 1.0, 4.0, 2.0])
    degrees = np.array([0.0, 45.0, 90.0, 135.0, 315.0, 360.0, -45.0, 765.0])
    np.testing.assert_allclose(
        lookup(table, np.radians(degrees), "linear"), [0.0, 0.5, 1.0, 2.5, 1.0, 0.0, 1.0, 0.5], atol=1e-12
    )


def test_nearest_lookup_is_the_entry_beside() -> None:
    table = np.array([0.0, 1.0, 4.0, 2.0])
    degrees = np.array([0.0, 44.0, 46.0, 134.0, 316.0, 359.0, -46.0, 764.0])
    np.testing.assert_array_equal(lookup(table, np.radians(degrees), "nearest"), [0, 0, 1, 1, 0, 0, 2, 0])


@settings(max_examples=100)
@given(angle=st.floats(-1e3, 1e3), bins=st.integers(4, 2048))
def test_a_lookup_stays_between_the_entries_of_the_table(angle: float, bins: int) -> None:
    table = np.random.default_rng(bins).standard_normal(bins)
    for interpolation in ("linear", "nearest"):
        assert table.min() - 1e-12 <= lookup(table, np.array([angle]), interpolation)[0] <= table.max() + 1e-12


# --- closed forms against the lookup itself


@BOTH
@pytest.mark.parametrize("error_deg", [0.0, 0.1, 0.4])
@pytest.mark.parametrize(("order", "bins"), [(84, 840), (84, 1024), (84, 200), (200, 512), (3, 17)])
@pytest.mark.parametrize("gain_error", [0.0, 0.05, -0.1])
def test_the_closed_form_is_what_a_lookup_leaves(
    order: int, bins: int, error_deg: float, gain_error: float, interpolation: Interpolation
) -> None:
    # averaged over the phase of the order against the bins, which the closed form does not know
    angle, error = np.random.default_rng(2).uniform(0.0, TURN, 20_000), math.radians(error_deg)
    left = []
    for phase in np.linspace(0.0, TURN, 8, endpoint=False):
        table = (1.0 + gain_error) * np.sin(order * TURN * np.arange(bins) / bins + phase)
        left.append(np.sin(order * angle + phase) - lookup(table, angle + error, interpolation))
    predicted = order_residual(order, bins=bins, interpolation=interpolation, angle_error=error, gain_error=gain_error)
    assert predicted == pytest.approx(rms(np.concatenate(left)) * math.sqrt(2.0), rel=0.02)


@BOTH
def test_gain_and_power_are_those_of_the_lookup(interpolation: Interpolation) -> None:
    order, bins = 84, 500
    angle = TURN * (np.arange(500 * 64) + 0.5) / (500 * 64)
    looked_up = lookup(np.cos(order * TURN * np.arange(bins) / bins), angle, interpolation)
    gain = 2.0 * np.mean(looked_up * np.cos(order * angle))
    assert table_gain(order, bins, interpolation) == pytest.approx(gain, rel=1e-3)
    assert table_power(order, bins, interpolation) == pytest.approx(2.0 * np.mean(looked_up**2), rel=1e-3)


@BOTH
def test_noise_of_the_lookup_is_that_of_the_entries_less_what_interpolation_averages(
    interpolation: Interpolation,
) -> None:
    rng = np.random.default_rng(3)
    table = 0.3 * rng.standard_normal(50_000)
    looked_up = lookup(table, rng.uniform(0.0, TURN, 200_000), interpolation)
    assert table_noise(0.3, interpolation) == pytest.approx(np.std(looked_up), rel=0.02)


def test_a_perfect_table_in_step_leaves_nothing() -> None:
    assert order_residual(84) == 0.0
    assert order_residual(84, interpolation="nearest") == 0.0


# --- a whole map


@BOTH
@pytest.mark.parametrize("index_error_deg", [0.0, 0.2])
def test_the_residual_of_a_map_is_what_its_table_leaves(interpolation: Interpolation, index_error_deg: float) -> None:
    harmonics = [(84, 0.016, 0.4), (168, 0.002, 2.1), (12, 0.004, 0.3)]
    cog_map = CogMap(torque=sines(ANGLE, harmonics), noise=2e-4)
    compensation = Compensation(table_bins=700, interpolation=interpolation, index_error=math.radians(index_error_deg))
    predicted = residual(cog_map, compensation)
    angle, rng = np.random.default_rng(4).uniform(0.0, TURN, 50_000), np.random.default_rng(5)
    left = []
    for _ in range(10):
        table = compensation_table(cog_map, compensation, rng)
        left.append(sines(angle, harmonics) - lookup(table, angle + compensation.index_error, interpolation))
    assert predicted.rms == pytest.approx(rms(np.concatenate(left)), rel=0.02)
    assert predicted.cogging_rms == pytest.approx(rms(sines(angle, harmonics)), rel=0.02)
    assert predicted.share == pytest.approx(predicted.rms / predicted.cogging_rms)
    assert [part.order for part in predicted.orders] == [84, 12, 168]
    parts = math.hypot(*(part.rms for part in predicted.orders), predicted.noise_rms)
    assert predicted.rms == pytest.approx(parts)


def test_delay_at_speed_is_an_index_error() -> None:
    cog_map = CogMap(torque=sines(ANGLE, [(84, 0.016, 0.4)]))
    speed, delay = 1.5, 2e-3
    late = residual(cog_map, Compensation(), speed=speed, delay=delay)
    shifted = residual(cog_map, Compensation(index_error=speed * delay))
    assert late == shifted
    assert residual(cog_map, Compensation(), speed=-speed, delay=delay) == late


def test_at_the_break_even_angle_as_much_is_left_as_there_was() -> None:
    cog_map = CogMap(torque=sines(ANGLE, [(84, 0.016, 0.4), (12, 0.006, 0.3)]), noise=3e-4)
    found = residual(cog_map, Compensation())
    there = residual(cog_map, Compensation(index_error=found.break_even_angle))
    assert there.share == pytest.approx(1.0, rel=1e-9)
    assert residual(cog_map, Compensation(index_error=0.99 * found.break_even_angle)).share < 1.0


def test_a_table_noisier_than_the_cogging_breaks_even_nowhere() -> None:
    cog_map = CogMap(torque=sines(ANGLE, [(84, 0.016, 0.4)]))
    found = residual(cog_map, Compensation(map_noise=0.02))
    assert found.share > 1.0
    assert found.break_even_angle == 0.0


def test_nothing_is_left_where_there_was_no_cogging() -> None:
    found = residual(CogMap(torque=np.zeros(64)), Compensation())
    assert (found.rms, found.share, found.orders) == (0.0, 0.0, ())
