"""What measuring does to a cog map: two directions, position lag, aliasing, noise of one harmonic.

Sources: two-direction separation, lag between directions and aliasing follow from the definitions (derived and
confirmed numerically); amplitude noise of one harmonic, sigma sqrt(2 / M), is the variance of a least-squares sine fit.
"""

import numpy as np
import pytest

from armeval.evaluate.cogging.cog_orders import orders
from armeval.evaluate.cogging.cog_resample import resample

TURN = 2.0 * np.pi


def test_hold_torques_of_26_and_minus_6_are_10_of_cogging_and_16_of_friction() -> None:
    angle = TURN * np.arange(360) / 360
    below_crest = np.sin(12 * angle) - 1.0  # 0 at 7.5 deg
    up, down = 0.026 + 0.010 * below_crest, -0.006 + 0.010 * below_crest  # what the drive applied
    at_crest = np.radians(7.5)
    cog_map, _ = resample(
        np.tile(angle, 2), -np.concatenate([up, down]), np.repeat([1.0, -1.0], 360), quantity="hold_torque"
    )
    assert cog_map.at(at_crest) == pytest.approx(-0.010)  # the magnets pull against what the drive applies
    assert cog_map.friction == pytest.approx(0.016)


def test_a_position_lag_shrinks_the_mean_and_makes_false_friction_ripple() -> None:
    angle, lag = TURN * np.arange(1024) / 1024, np.radians(0.1)
    direction = np.repeat([1.0, -1.0], 1024)
    both = np.tile(angle, 2)
    cog_map, _ = resample(both, np.sin(84 * (both - direction * lag)), direction, quantity="cog_torque")
    assert orders(cog_map)[0].amplitude == pytest.approx(0.989272, abs=5e-7)
    assert cog_map.friction_ripple is not None
    assert np.ptp(cog_map.friction_ripple) / 2.0 == pytest.approx(0.146083, abs=5e-7)
    assert cog_map.direction_lag == pytest.approx(lag)


@pytest.mark.parametrize(("bins", "alias"), [(128, 44), (64, 20)])
def test_order_84_passes_for_another_where_the_angles_are_too_few(bins: int, alias: int) -> None:
    angle = TURN * np.arange(bins) / bins
    cog_map, findings = resample(angle, np.sin(84 * angle), None, quantity="cog_torque", slots=12, poles=14)
    assert [order.order for order in orders(cog_map)] == [alias]
    assert f"order {alias}" in findings[0].what


def test_the_amplitude_noise_of_one_harmonic_of_1024_angles_is_0_0442_of_the_noise() -> None:
    angle = TURN * np.arange(1024) / 1024
    torque = np.sin(84 * angle) + 0.01 * np.random.default_rng(0).standard_normal(1024)
    cog_map, _ = resample(angle, torque, None, quantity="cog_torque")
    assert orders(cog_map)[0].amplitude_noise == pytest.approx(0.0441942 * 0.01, rel=0.1)
