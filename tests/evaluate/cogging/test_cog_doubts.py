from __future__ import annotations

import numpy as np
import numpy.typing as npt
import pytest

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


# --- gaps, coverage, aliasing


def test_half_a_turn_is_refused_in_plain_words() -> None:
    angle = np.linspace(0.0, np.pi, 600)
    with pytest.raises(InputError, match=r"only 180 deg of the motor's turn, about half a turn \(from 0 deg to 180"):
        resample(angle, cogging(angle), None, quantity="cog_torque", source="half.csv")


def test_a_direction_that_covers_half_a_turn_is_named() -> None:
    angle = np.concatenate([even(720), np.linspace(0.0, np.pi, 360)])
    with pytest.raises(InputError, match="direction -1"):
        mapped(angle, cogging(angle), np.repeat([1.0, -1.0], [720, 360]))


def test_a_gap_wider_than_half_the_period_of_an_order_that_shows_is_refused() -> None:
    angle = even(1024)
    angle = np.delete(angle, np.arange(300, 306))  # 7 steps, 2.46 deg; half a period of order 84 is 2.14 deg
    with pytest.raises(InputError) as refusal:
        resample(angle, 0.02 * np.sin(84 * angle), None, quantity="cog_torque", source="gap.csv")
    told = str(refusal.value)
    assert "gap.csv" in told
    assert "2.46 deg" in told
    assert "order 84" in told
    assert "2.14 deg" in told
    assert "105.1 deg to 107.6 deg" in told


@pytest.mark.parametrize("count", [80, 100, 400])
def test_scattered_angles_too_few_for_an_order_are_refused_by_that_order(count: int) -> None:
    angle = np.random.default_rng(11).uniform(0.0, TURN, count)
    with pytest.raises(InputError, match=r"order 84|cover only"):
        mapped(angle, 0.02 * np.sin(84 * angle) + 0.001 * np.sin(3 * angle))


def test_a_gap_narrower_than_half_that_period_is_bridged_and_reported() -> None:
    angle = np.delete(even(1024), np.arange(300, 305))
    cog_map = mapped(angle, 0.02 * np.sin(84 * angle))
    assert cog_map.widest_gap == pytest.approx(6 * TURN / 1024)
    np.testing.assert_allclose(cog_map.torque, 0.02 * np.sin(84 * cog_map.angle), atol=1e-13)


def test_a_wide_gap_does_no_harm_to_slow_cogging() -> None:
    angle = np.delete(even(1024), np.arange(300, 328))
    cog_map = mapped(angle, 0.02 * np.sin(12 * angle))
    np.testing.assert_allclose(cog_map.torque, 0.02 * np.sin(12 * cog_map.angle), atol=1e-13)


def test_noise_alone_is_not_taken_for_an_order_hidden_by_a_gap() -> None:
    rng = np.random.default_rng(10)
    angle = np.delete(even(1024), np.arange(300, 320))
    assert mapped(angle, rng.standard_normal(angle.size)).bandwidth < 1024 / 40


@pytest.mark.parametrize(("count", "alias"), [(128, 44), (64, 20)])
def test_too_few_angles_for_the_order_to_expect_are_told_with_where_it_shows(count: int, alias: int) -> None:
    findings = warnings(even(count), 0.02 * np.sin(84 * even(count) + 0.3), slots=12, poles=14)
    assert f"passes for order {alias}" in findings[0].what
    assert "169 even angles" in findings[0].mend


def test_enough_angles_for_the_order_to_expect_are_not_remarked_on() -> None:
    def torque(count: int) -> FloatArray:
        return 0.02 * np.sin(84 * even(count))

    assert warnings(even(169), torque(169), slots=12, poles=14) == []
    assert len(warnings(even(168), torque(168), slots=12, poles=14)) == 1


# --- strays


@pytest.mark.parametrize("noise", [0.0, 3e-4])
@pytest.mark.parametrize("uneven", [0.0, 0.4])
def test_a_torque_astray_is_pointed_at_by_its_angle(noise: float, uneven: float) -> None:
    rng = np.random.default_rng(12)
    angle = (np.arange(1000) + uneven * rng.uniform(-1.0, 1.0, 1000)) * TURN / 1000
    torque = cogging(angle) + noise * rng.standard_normal(1000)
    assert warnings(angle, torque) == []
    torque[300] += 0.2
    told = [finding.what for finding in warnings(angle, torque) if "off what the map's orders make it" in finding.what]
    assert len(told) == 1
    assert f"at {np.degrees(angle[300]):.1f} deg" in told[0]
    torque[[500, 501]] -= 0.15
    assert any("3 angles are astray" in finding.what for finding in warnings(angle, torque))


def test_friction_that_nobody_told_apart_is_no_torque_astray() -> None:
    angle = np.random.default_rng(13).uniform(0.0, TURN, 8000)
    torque = cogging(angle) - np.repeat([0.008, -0.008], 4000)
    assert warnings(angle, torque) == []


# --- rows that go over the turn and back


@pytest.mark.parametrize("first", [1.0, -1.0])
@pytest.mark.parametrize("wrapped", [False, True])
def test_rows_that_turn_back_without_a_direction_are_told(first: float, wrapped: bool) -> None:
    angle = first * np.concatenate([even(720, 1.0), even(720, 1.0)[::-1]])
    torque = cogging(angle) - first * np.repeat([0.003, -0.003], 720)
    findings = warnings(np.mod(angle, TURN) if wrapped else angle, torque)
    assert ["over the turn and back" in finding.what for finding in findings] == [True]
    assert warnings(angle, torque, first * np.repeat([1.0, -1.0], 720)) == []


def test_rows_that_go_one_way_or_any_way_are_not_taken_for_rows_that_turn_back() -> None:
    for angle in (even(1440), -even(1440), np.linspace(0.0, 3 * TURN, 1440, endpoint=False)):
        assert warnings(angle, cogging(angle)) == []
        shuffled = np.random.default_rng(14).permutation(angle)
        assert warnings(shuffled, cogging(shuffled)) == []
