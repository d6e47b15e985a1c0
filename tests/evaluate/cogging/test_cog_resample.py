from __future__ import annotations

import numpy as np
import numpy.typing as npt
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from armeval.errors import Finding, InputError
from armeval.evaluate.cogging.cog_resample import resample
from armeval.model.cogmap import CogMap

FloatArray = npt.NDArray[np.float64]
TURN = 2.0 * np.pi
HARMONICS = ((84, 0.016, 0.4), (168, 0.002, 2.1), (14, 0.005, 1.2), (12, 0.003, -0.8), (5, 0.001, 0.1))


def cogging(angle: FloatArray) -> FloatArray:
    return sum((a * np.sin(n * angle + p) for n, a, p in HARMONICS), np.zeros_like(angle))


def even(count: int, start: float = 0.0) -> FloatArray:
    return start + TURN * np.arange(count) / count


def mapped(angle: FloatArray, torque: FloatArray, direction: FloatArray | None = None, **options: int) -> CogMap:
    return resample(angle, torque, direction, quantity="cog_torque", **options)[0]


def warnings(
    angle: FloatArray, torque: FloatArray, direction: FloatArray | None = None, **options: int
) -> list[Finding]:
    return resample(angle, torque, direction, quantity="cog_torque", **options)[1]


# --- one direction, what comes back


@pytest.mark.parametrize("count", [16, 17, 360, 1000, 1023, 1024])
@pytest.mark.parametrize("start", [0.0, 0.0123])
def test_an_even_table_comes_back_at_its_own_angles(count: int, start: float) -> None:
    angle, torque = even(count, start), np.random.default_rng(count).standard_normal(count)
    cog_map = mapped(angle, torque)
    np.testing.assert_allclose(cog_map.at(angle) + cog_map.removed_mean, torque, atol=1e-11)


def test_a_table_of_1024_is_every_fourth_entry_of_the_map() -> None:
    torque = cogging(even(1024))
    np.testing.assert_allclose(mapped(even(1024), torque).torque[::4], torque, atol=1e-16 * 100)


def test_uneven_angles_give_the_torque_between_them() -> None:
    angle = np.random.default_rng(2).uniform(0.0, TURN, 8000)
    np.testing.assert_allclose(mapped(angle, cogging(angle)).torque, cogging(even(4096)), atol=1e-13)


def test_crowded_angles_do_not_bias_the_orders() -> None:
    uniform = np.random.default_rng(3).uniform(0.0, TURN, 20_000)
    angle = uniform + 0.8 * np.sin(uniform)
    torque = cogging(angle) + 1e-4 * np.sign(np.sin(84 * angle))  # edges: orders that no finite map holds
    found = 2.0 * np.abs(mapped(angle, torque).spectrum)
    edges = 1e-4 * 4.0 / np.pi
    in_phase = abs(0.016 * np.exp(0.4j) + edges)
    assert found[84] == pytest.approx(in_phase, rel=1e-4)
    assert found[14] == pytest.approx(0.005, abs=2e-6)
    assert found[100] < 2e-6


def test_the_order_of_the_rows_does_not_matter() -> None:
    rng = np.random.default_rng(4)
    angle = rng.uniform(0.0, TURN, 5000)
    torque = cogging(angle) + 1e-4 * rng.standard_normal(5000)
    shuffled = rng.permutation(5000)
    np.testing.assert_allclose(
        mapped(angle[shuffled], torque[shuffled]).torque, mapped(angle, torque).torque, atol=1e-15
    )


@pytest.mark.parametrize("wrapped", [False, True])
@pytest.mark.parametrize("backwards", [False, True])
def test_several_turns_attenuate_nothing(wrapped: bool, backwards: bool) -> None:
    angle = np.linspace(-3.0, -3.0 + 3.7 * TURN, 3001)
    angle = angle[::-1] if backwards else angle
    torque = cogging(angle)
    cog_map = mapped(np.mod(angle, TURN) if wrapped else angle, torque)
    np.testing.assert_allclose(cog_map.torque, cogging(even(4096)), atol=1e-13)


def test_a_row_for_360_degrees_repeats_the_row_for_0() -> None:
    cog_map = mapped(np.linspace(0.0, TURN, 1025), cogging(np.linspace(0.0, TURN, 1025)))
    assert cog_map.distinct == 1024
    assert cog_map.samples == 1025
    np.testing.assert_allclose(cog_map.torque, cogging(even(4096)), atol=1e-14)
    assert cog_map.noise == 0.0


# --- noise


def test_repeats_are_averaged_and_their_spread_is_the_noise() -> None:
    rng, sigma, turns = np.random.default_rng(5), 3e-4, 4
    angle = np.concatenate([even(720) + turn * TURN for turn in range(turns)])
    cog_map = mapped(angle, cogging(angle) + sigma * rng.standard_normal(angle.size))
    assert cog_map.noise_from == "repeats"
    assert cog_map.noise == pytest.approx(sigma / np.sqrt(turns), rel=0.05)
    assert np.std(cog_map.torque - cogging(cog_map.angle)) == pytest.approx(cog_map.noise, rel=0.1)


def test_without_repeats_what_the_orders_leave_over_is_the_noise() -> None:
    rng, sigma = np.random.default_rng(6), 3e-4
    cog_map = mapped(even(1024), cogging(even(1024)) + sigma * rng.standard_normal(1024))
    assert cog_map.noise_from == "residual"
    assert cog_map.noise == pytest.approx(sigma, rel=0.1)


@pytest.mark.parametrize("crowded", [0.0, 0.7])
@pytest.mark.parametrize("repeats", [1, 3])
def test_the_noise_told_is_the_error_that_the_map_has(crowded: float, repeats: int) -> None:
    rng, sigma = np.random.default_rng(7), 5e-4
    uniform = rng.uniform(0.0, TURN, 12_000)
    angle = np.repeat(uniform + crowded * np.sin(uniform), repeats)
    cog_map = mapped(angle, cogging(angle) + sigma * rng.standard_normal(angle.size))
    assert np.std(cog_map.torque - cogging(cog_map.angle)) == pytest.approx(cog_map.noise, rel=0.15)


def test_more_turns_average_noise() -> None:
    rng, sigma = np.random.default_rng(8), 1e-3
    error = []
    for turns in (1, 16):
        angle = np.linspace(0.0, turns * TURN, turns * 720, endpoint=False) + 1e-3 * rng.standard_normal(turns * 720)
        cog_map = mapped(angle, cogging(angle) + sigma * rng.standard_normal(angle.size))
        error.append(abs(2.0 * np.abs(cog_map.spectrum[84]) - 0.016))
        assert error[-1] < 4.0 * sigma * np.sqrt(2.0 / angle.size)
    assert error[1] < error[0]


# --- two directions


def test_two_directions_need_not_share_an_angle() -> None:
    up, down = even(900, 0.001), even(840, 0.005)[::-1]
    friction = 0.003
    angle = np.concatenate([up, down])
    direction = np.repeat([1.0, -1.0], [900, 840])
    cog_map, findings = resample(
        angle, cogging(angle) - direction * friction + 0.001, direction, quantity="hold_torque", source="lift.csv"
    )
    np.testing.assert_allclose(cog_map.torque, cogging(even(4096)), atol=1e-14)
    assert cog_map.friction == pytest.approx(friction, rel=1e-12)
    np.testing.assert_allclose(cog_map.friction_ripple, friction, rtol=1e-9)
    assert cog_map.removed_mean == pytest.approx(0.001, rel=1e-12)
    assert cog_map.directions == 2
    assert cog_map.distinct == 840
    assert cog_map.widest_gap == pytest.approx(TURN / 840)
    assert cog_map.source == "lift.csv"
    assert findings == []


def test_friction_that_changes_over_the_turn_is_kept_apart_from_cogging() -> None:
    angle, direction = np.concatenate([even(720), even(720)]), np.repeat([1.0, -1.0], 720)
    friction = 0.003 + 0.0005 * np.cos(2 * angle)
    cog_map = mapped(angle, cogging(angle) - direction * friction, direction)
    np.testing.assert_allclose(cog_map.friction_ripple, 0.003 + 0.0005 * np.cos(2 * cog_map.angle), atol=1e-14)
    np.testing.assert_allclose(cog_map.torque, cogging(cog_map.angle), atol=1e-14)
    assert cog_map.friction == pytest.approx(0.003)


def test_noise_of_two_directions_is_that_of_their_mean() -> None:
    rng, sigma = np.random.default_rng(9), 4e-4
    angle, direction = np.tile(even(720), 6), np.repeat([1.0, -1.0], 3 * 720)
    cog_map = mapped(angle, cogging(angle) - 0.003 * direction + sigma * rng.standard_normal(angle.size), direction)
    assert cog_map.noise == pytest.approx(sigma / np.sqrt(6.0), rel=0.05)


def test_swapped_directions_are_told_and_friction_stays_positive() -> None:
    angle, direction = np.concatenate([even(720), even(720)]), np.repeat([1.0, -1.0], 720)
    cog_map, findings = resample(angle, cogging(angle) + 0.003 * direction, direction, quantity="cog_torque")
    assert cog_map.friction == pytest.approx(0.003)
    np.testing.assert_allclose(cog_map.friction_ripple, 0.003, rtol=1e-9)
    assert ["direction" in finding.place for finding in findings] == [True]
    assert "6.00 mN·m" in findings[0].what


def test_a_lag_between_the_directions_is_found_and_told() -> None:
    angle, direction = np.concatenate([even(720), even(720)]), np.repeat([1.0, -1.0], 720)
    lag = np.radians(0.3)
    cog_map, findings = resample(angle, cogging(angle - direction * lag), direction, quantity="cog_torque")
    assert cog_map.direction_lag == pytest.approx(lag, rel=1e-9)
    assert "0.600 deg" in findings[0].what
    assert f"{np.cos(84 * lag):.3g}" in findings[0].what


def test_one_direction_warns_of_what_the_mean_may_be() -> None:
    cog_map, findings = resample(even(720), cogging(even(720)) - 0.004, None, quantity="cog_torque")
    assert cog_map.friction is None
    assert cog_map.friction_ripple is None
    assert cog_map.removed_mean == pytest.approx(-0.004)
    assert "-4.00 mN·m" in findings[0].what
    assert "friction, a load or an offset" in findings[0].what


def test_one_direction_without_a_mean_warns_of_nothing() -> None:
    assert warnings(even(720), cogging(even(720))) == []


def test_a_column_of_one_direction_only_is_one_direction() -> None:
    cog_map = mapped(even(720), cogging(even(720)), np.ones(720))
    assert (cog_map.directions, cog_map.friction) == (1, None)


# --- bad input


def test_too_few_angles_are_refused() -> None:
    with pytest.raises(InputError, match="only 4 different angles"):
        mapped(np.tile(even(4), 10), np.zeros(40))
    with pytest.raises(InputError, match="no sample"):
        mapped(np.empty(0), np.empty(0))


@pytest.mark.parametrize("column", ["angle", "torque", "direction"])
def test_a_value_that_is_no_number_is_refused_by_its_row(column: str) -> None:
    columns = {"angle": even(100), "torque": np.zeros(100), "direction": np.ones(100)}
    columns[column][41] = np.nan
    with pytest.raises(InputError, match=f"{column} of sample 42"):
        mapped(columns["angle"], columns["torque"], columns["direction"])


def test_a_direction_of_0_is_refused_by_its_row() -> None:
    direction = np.ones(100)
    direction[7] = 0.0
    with pytest.raises(InputError, match="sample 8 is 0"):
        mapped(even(100), np.zeros(100), direction)


def test_columns_of_different_length_are_refused() -> None:
    with pytest.raises(InputError, match="100 angles"):
        mapped(even(100), np.zeros(99))


# --- any map


@settings(deadline=None, max_examples=50)
@given(seed=st.integers(0, 2**32 - 1), start=st.floats(-30.0, 30.0), size=st.sampled_from([1024, 4096]))
def test_where_a_turn_begins_does_not_matter(seed: int, start: float, size: int) -> None:
    rng = np.random.default_rng(seed)
    step = rng.uniform(0.4, 1.0, 1500)
    angle = start + TURN * np.cumsum(step) / step.sum()
    orders, amplitude, phase = rng.integers(1, 200, 4), rng.uniform(0.1, 1.0, 4), rng.uniform(0.0, TURN, 4)

    def torque(at: FloatArray) -> FloatArray:
        return np.sin(np.outer(at, orders) + phase) @ amplitude

    np.testing.assert_allclose(mapped(angle, torque(angle), size=size).torque, torque(even(size)), atol=1e-9)
