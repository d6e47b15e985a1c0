from __future__ import annotations

import numpy as np
import numpy.typing as npt
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from armeval.evaluate.cogging.cog_orders import (
    detents,
    expected_orders,
    orders,
    significant_part,
    slope,
    unstable_stretches,
)
from armeval.evaluate.cogging.cog_resample import resample
from armeval.model.cogmap import CogMap

FloatArray = npt.NDArray[np.float64]
TURN = 2.0 * np.pi
ANGLE = TURN * np.arange(4096) / 4096
FEW_HARMONICS = st.lists(
    st.tuples(st.integers(1, 150), st.floats(0.05, 1.0), st.floats(-3.1, 3.1)),
    min_size=1,
    max_size=5,
    unique_by=lambda harmonic: harmonic[0],
)


def sines(angle: FloatArray, harmonics: list[tuple[int, float, float]]) -> FloatArray:
    return sum((a * np.sin(n * angle + p) for n, a, p in harmonics), np.zeros_like(angle))


def white(sigma: float, seed: int = 0, count: int = 1024) -> FloatArray:
    return sigma * np.random.default_rng(seed).standard_normal(count)


# --- which orders there are


@settings(deadline=None, max_examples=60)
@given(harmonics=FEW_HARMONICS, seed=st.integers(0, 2**32 - 1), sigma=st.sampled_from([0.0, 0.01, 0.1]))
def test_orders_are_found_again_from_uneven_samples_and_no_others(
    harmonics: list[tuple[int, float, float]], seed: int, sigma: float
) -> None:
    rng = np.random.default_rng(seed)
    step = rng.uniform(0.3, 1.0, 3000)
    angle = rng.uniform(-10.0, 10.0) + TURN * np.cumsum(step) / step.sum()
    torque = sines(angle, harmonics) + sigma * rng.standard_normal(3000)
    cog_map, _ = resample(angle, torque, None, quantity="cog_torque")
    found = {order.order: order for order in orders(cog_map, significance=1e-6)}
    strong = {n: (a, p) for n, a, p in harmonics if a > 10.0 * sigma * np.sqrt(2.0 / 3000)}
    assert set(found) == set(strong)
    for n, (a, p) in strong.items():
        tolerance = max(1e-9, 6.0 * sigma * np.sqrt(2.0 / 3000))
        assert found[n].amplitude == pytest.approx(a, abs=1.5 * tolerance)
        assert abs(np.angle(np.exp(1j * (found[n].phase - p)))) < 1.5 * tolerance / a
    amplitudes = [order.amplitude for order in orders(cog_map)]
    assert amplitudes == sorted(amplitudes, reverse=True)


def test_noise_creates_orders_no_more_often_than_told() -> None:
    false = sum(bool(orders(CogMap(torque=white(1.0, seed, 512)), significance=0.05)) for seed in range(400))
    assert 0.05 * 400 - 3.5 * np.sqrt(19.0) < false < 0.05 * 400 + 3.5 * np.sqrt(19.0)


@pytest.mark.parametrize("count", [24, 48])
def test_noise_of_a_small_table_creates_no_orders_either(count: int) -> None:
    false = sum(bool(orders(CogMap(torque=white(1.0, seed, count)), significance=0.05)) for seed in range(400))
    assert false < 0.05 * 400 + 3.5 * np.sqrt(19.0)


def test_an_order_is_told_once_its_amplitude_stands_out_of_the_noise() -> None:
    noise_of_amplitude = 0.1 * np.sqrt(2.0 / 1024)
    angle = TURN * np.arange(1024) / 1024
    for share, told in ((2.0, False), (8.0, True)):
        cog_map = CogMap(torque=white(0.1, 3) + share * noise_of_amplitude * np.sin(40 * angle))
        assert (40 in [order.order for order in orders(cog_map)]) is told


def test_amplitude_noise_is_how_far_the_amplitude_scatters() -> None:
    angle = TURN * np.arange(512) / 512
    found = [orders(CogMap(torque=np.sin(40 * angle) + white(0.1, seed, 512)))[0] for seed in range(300)]
    scatter = np.std([order.amplitude for order in found])
    assert np.mean([order.amplitude_noise for order in found]) == pytest.approx(scatter, rel=0.15)


def test_noise_known_from_repeats_hides_what_is_below_it() -> None:
    angle = TURN * np.arange(1024) / 1024
    torque = np.sin(40 * angle) + 0.01 * np.sin(50 * angle)
    assert [order.order for order in orders(CogMap(torque=torque))] == [40, 50]
    assert [order.order for order in orders(CogMap(torque=torque, noise=0.1))] == [40]


def test_orders_too_small_to_matter_are_left_out_on_wish() -> None:
    torque = sines(ANGLE, [(40, 1.0, 0.0), (80, 0.05, 0.0)])
    assert [order.order for order in orders(CogMap(torque=torque), least_share=0.1)] == [40]


def test_a_map_of_zeros_has_no_orders_no_detents_and_no_unstable_stretch() -> None:
    cog_map = CogMap(torque=np.zeros(64))
    assert orders(cog_map) == ()
    assert detents(cog_map).size == 0
    assert unstable_stretches(cog_map).shape == (0, 2)
    assert not slope(cog_map, ANGLE).any()


# --- what the motor's make lets expect


def test_kinds_of_orders_follow_from_slots_and_poles() -> None:
    expected = expected_orders(12, 14)
    kinds = {order: expected.kind(order) for order in (84, 168, 12, 24, 14, 28, 7, 5, 1)}
    assert kinds == {
        84: "expected",
        168: "expected",
        12: "tolerance",
        24: "tolerance",
        14: "tolerance",
        28: "tolerance",
        7: "tolerance",
        5: "unexpected",
        1: "unexpected",
    }


@pytest.mark.parametrize("slots", [None, 8])
def test_a_stepper_of_50_teeth_has_detents_at_order_200_and_tolerances_at_50(slots: int | None) -> None:
    expected = expected_orders(slots, 100)
    assert expected.fundamental == 200
    assert [expected.kind(order) for order in (200, 400, 50, 100)] == ["expected", "expected", "tolerance", "tolerance"]


def test_without_slots_and_poles_nothing_is_expected_nor_unexpected() -> None:
    assert expected_orders(None, None).kind(84) == "unknown"


def test_slots_alone_say_only_which_orders_tolerances_bring() -> None:
    expected = expected_orders(12, None)
    assert (expected.fundamental, expected.kind(24), expected.kind(25)) == (None, "tolerance", "unexpected")


def test_orders_carry_their_kind() -> None:
    cog_map = CogMap(torque=sines(ANGLE, [(84, 1.0, 0.0), (12, 0.5, 0.0), (5, 0.2, 0.0)]))
    kinds = [order.kind for order in orders(cog_map, slots=12, poles=14)]
    assert kinds == ["expected", "tolerance", "unexpected"]


# --- detents, slope, unstable stretches


def test_detents_of_a_sine_are_where_it_falls_through_zero() -> None:
    found = detents(CogMap(torque=0.02 * np.sin(7 * ANGLE + 0.3)))
    np.testing.assert_allclose(found, np.sort(np.mod((np.pi - 0.3 + TURN * np.arange(7)) / 7, TURN)), atol=1e-12)


@settings(deadline=None, max_examples=60)
@given(harmonics=FEW_HARMONICS)
def test_at_a_detent_the_torque_is_zero_and_pulls_back(harmonics: list[tuple[int, float, float]]) -> None:
    cog_map = CogMap(torque=sines(ANGLE, harmonics))
    found = detents(cog_map)
    assert found.size > 0
    assert np.all((found >= 0.0) & (found < TURN))
    steepest = sum(n * a for n, a, _ in harmonics)
    np.testing.assert_allclose(sines(found, harmonics), 0.0, atol=1e-9 * steepest)
    assert np.all(slope(cog_map, found) <= 1e-6 * steepest)
    falling = np.diff(np.sign(sines(np.append(ANGLE, TURN), harmonics))) < 0
    assert abs(found.size - np.count_nonzero(falling)) <= 2  # crossings closer than the row of 4096 may show or not


def test_noise_makes_no_detents() -> None:
    angle = TURN * np.arange(1024) / 1024
    noisy = CogMap(torque=0.02 * np.sin(84 * angle) + white(0.002))
    assert detents(noisy).size == 84
    assert unstable_stretches(noisy).shape == (84, 2)


def test_the_slope_is_the_difference_quotient_of_the_torque() -> None:
    harmonics = [(84, 1.0, 0.4), (12, 0.3, 1.0)]
    h, angle = 1e-6, np.linspace(-3.0, 9.0, 50)
    quotient = (sines(angle + h, harmonics) - sines(angle - h, harmonics)) / (2 * h)
    np.testing.assert_allclose(slope(CogMap(torque=sines(ANGLE, harmonics)), angle), quotient, rtol=1e-6, atol=1e-6)


def test_without_a_servo_half_of_each_period_is_unstable() -> None:
    found = unstable_stretches(CogMap(torque=0.02 * np.sin(4 * ANGLE)))  # rises while 4 angle is within 90 deg of 0
    centre = np.sort(np.mod(found.mean(axis=1), TURN))
    np.testing.assert_allclose(found[:, 1] - found[:, 0], np.pi / 4, atol=1e-12)
    np.testing.assert_allclose(centre, [0.0, np.pi / 2, np.pi, 3 * np.pi / 2], atol=1e-12)
    assert found[-1, 1] > TURN


@pytest.mark.parametrize(("stiffness", "count"), [(1.5, 84), (1.67, 84), (1.69, 0), (2.0, 0)])
def test_a_servo_stiffer_than_the_steepest_cogging_holds_everywhere(stiffness: float, count: int) -> None:
    cog_map = CogMap(torque=0.02 * np.sin(84 * ANGLE + 1.0))  # steepest: 84 x 0.02 = 1.68 N m/rad
    assert len(unstable_stretches(cog_map, stiffness)) == count


def test_unstable_stretches_begin_and_end_where_the_slope_is_the_stiffness() -> None:
    cog_map = CogMap(torque=sines(ANGLE, [(84, 0.02, 0.4), (12, 0.01, 1.0)]))
    found = unstable_stretches(cog_map, 0.7)
    np.testing.assert_allclose(slope(cog_map, found.ravel()), 0.7, atol=1e-9)
    inside, outside = found.mean(axis=1), 0.5 * (found[:-1, 1] + found[1:, 0])
    assert np.all(slope(cog_map, inside) > 0.7)
    assert np.all(slope(cog_map, outside) < 0.7)


# --- the map without its noise


def test_the_significant_part_is_closer_to_the_truth_than_the_map() -> None:
    angle = TURN * np.arange(1024) / 1024
    truth = sines(angle, [(84, 1.0, 0.4), (12, 0.3, 1.0)])
    cog_map = CogMap(torque=truth + white(0.1))
    assert np.std(significant_part(cog_map).torque - truth) < 0.15 * np.std(cog_map.torque - truth)


def test_the_significant_part_of_a_map_without_noise_is_the_map() -> None:
    harmonics = [(84, 1.0, 0.4), (12, 0.3, 1.0), (512, 0.2, 0.5)]
    torque = sines(TURN * np.arange(1024) / 1024, harmonics)
    np.testing.assert_allclose(significant_part(CogMap(torque=torque)).torque, torque, atol=1e-12)
