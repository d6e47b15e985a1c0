"""The spectrum of a joint's error by order of motor angle."""

from __future__ import annotations

import numpy as np
import pytest

from armeval.evaluate.lap_track import LapTrack
from armeval.evaluate.measuring.error_orders import ErrorOrders, error_orders
from armeval.model.drive import Drive


def _lap(target: np.ndarray, angle: np.ndarray) -> LapTrack:
    k = len(target)
    return LapTrack(
        run="bare",
        compensated=False,
        source="log",
        lap=1,
        file=None,
        time=np.arange(k) * 1e-3,
        arc=np.linspace(0.0, 0.1, k),
        angle=angle[:, None],
        target=target[:, None],
        tip=np.zeros((k, 3)),
        target_tip=np.zeros((k, 3)),
        deviation=np.zeros(k),
        lag=np.zeros(k),
        resolution=np.zeros(1),
    )


def _back_and_forth(span: float, *, slow_end: bool = False) -> np.ndarray:
    """Angles from 0 to span and back, at a speed that changes."""
    phase = np.linspace(0.0, 1.0, 6000) ** (2.0 if slow_end else 1.0)
    return np.concatenate([span * phase, span * phase[::-1]])


def _of(drive: Drive, angle: np.ndarray, error: np.ndarray) -> ErrorOrders:
    found = error_orders(drive, [_lap(angle - error, angle)], 0)
    assert found is not None
    return found


def _peak(found: ErrorOrders) -> tuple[float, float]:
    k = int(np.argmax(found.amplitude))
    return float(found.order[k]), float(found.amplitude[k])


@pytest.mark.parametrize("slow_end", [False, True])
def test_an_error_of_one_order_peaks_there_whatever_the_speed(slow_end: bool) -> None:
    angle = _back_and_forth(2.0, slow_end=slow_end)
    order, amplitude = _peak(_of(Drive("lift"), angle, 0.01 * np.sin(84.0 * angle + 0.4)))
    assert order == pytest.approx(84.0, abs=0.5)
    assert amplitude == pytest.approx(0.01, rel=0.03)


def test_orders_count_per_motor_turn() -> None:
    angle = _back_and_forth(0.5)
    drive = Drive("lift", gear_ratio=-6.0, index_offset=0.3)
    order, _ = _peak(_of(drive, angle, 0.01 * np.sin(36.0 * (-6.0 * angle))))
    assert order == pytest.approx(36.0, abs=0.5)


def test_friction_that_changes_sign_with_the_direction_leaves_no_trace() -> None:
    angle = _back_and_forth(2.0)
    rubs = 0.05 * np.sign(np.gradient(angle))
    plain = _of(Drive("lift"), angle, 0.01 * np.sin(84.0 * angle))
    rubbed = _of(Drive("lift"), angle, 0.01 * np.sin(84.0 * angle) - rubs)
    assert rubbed.amplitude == pytest.approx(plain.amplitude, abs=2e-4)


def test_two_orders_closer_than_the_resolution_merge_and_farther_ones_do_not() -> None:
    angle = _back_and_forth(2.0 * np.pi / 3.0)
    found = _of(Drive("lift"), angle, 0.01 * (np.sin(60.0 * angle) + np.sin(84.0 * angle)))
    assert found.resolution == pytest.approx(6.0, rel=0.01)
    between = float(np.interp(72.0, found.order, found.amplitude))
    assert between < 0.1 * float(np.interp(84.0, found.order, found.amplitude))


def test_a_joint_that_hardly_moves_has_no_spectrum() -> None:
    angle = _back_and_forth(0.05)
    assert error_orders(Drive("lift"), [_lap(angle, angle)], 0) is None
