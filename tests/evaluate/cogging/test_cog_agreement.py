from __future__ import annotations

import numpy as np
import numpy.typing as npt
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from armeval.evaluate.cogging.cog_agreement import agreement
from armeval.model.cogmap import CogMap

FloatArray = npt.NDArray[np.float64]
TURN = 2.0 * np.pi
HARMONICS = ((84, 0.016, 0.4), (14, 0.005, 1.2), (12, 0.003, -0.8), (1, 0.002, 0.1))


def measured(shift: float = 0.0, *, scale: float = 1.0, noise: float = 0.0, seed: int = 0, size: int = 1024) -> CogMap:
    angle = TURN * np.arange(size) / size - shift
    torque = scale * sum(a * np.sin(n * angle + p) for n, a, p in HARMONICS)
    return CogMap(
        torque=torque + noise * np.random.default_rng(seed).standard_normal(size), noise=noise, friction=0.002
    )


@settings(deadline=None, max_examples=40)
@given(shift=st.floats(-3.1, 3.1))
def test_a_map_measured_from_another_zero_is_the_same_map_shifted(shift: float) -> None:
    found = agreement(measured(), measured(shift, size=2048))
    assert found.shift == pytest.approx(shift, abs=1e-9)
    assert not found.ambiguous
    assert found.correlation == pytest.approx(1.0)
    assert found.residual_share < 1e-7
    assert found.friction_difference == 0.0


def test_two_measurements_differ_by_their_noise() -> None:
    first, second = measured(noise=3e-4, seed=1), measured(0.05, noise=4e-4, seed=2)
    found = agreement(first, second, joint="lift")
    assert found.joint == "lift"
    assert found.shift == pytest.approx(0.05, abs=3e-4)
    assert found.noise_rms == pytest.approx(5e-4)
    assert found.residual_rms == pytest.approx(found.noise_rms, rel=0.15)
    assert 0.99 < found.correlation < 1.0


def test_a_map_twice_as_large_has_the_scale_2() -> None:
    found = agreement(measured(), measured(scale=2.0))
    assert found.scale == pytest.approx(2.0)
    assert found.correlation == pytest.approx(1.0)
    assert found.residual_share == pytest.approx(1.0)


def test_a_map_of_one_order_fits_in_many_places_and_the_nearest_is_told() -> None:
    angle = TURN * np.arange(1024) / 1024
    found = agreement(CogMap(torque=np.sin(84 * angle)), CogMap(torque=np.sin(84 * (angle - 0.03))))
    assert found.ambiguous
    assert found.shift == pytest.approx(0.03, abs=1e-9)


def test_different_motors_do_not_agree() -> None:
    angle = TURN * np.arange(1024) / 1024
    found = agreement(CogMap(torque=np.sin(84 * angle)), CogMap(torque=np.sin(36 * angle)))
    assert found.correlation == pytest.approx(0.0, abs=1e-9)
    assert found.residual_share == pytest.approx(np.sqrt(2.0))


def test_friction_differs_only_where_both_are_known() -> None:
    one, other = CogMap(torque=np.zeros(64), friction=0.002), CogMap(torque=np.zeros(64), friction=0.005)
    assert agreement(one, other).friction_difference == pytest.approx(0.003)
    assert agreement(one, CogMap(torque=np.zeros(64))).friction_difference is None
