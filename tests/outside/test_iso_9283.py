"""Path criteria of ISO 9283:1998 on made-up laps whose figures were worked out by hand and recomputed independently.

No numeric example is published. Formulas of AT_p, RT_p, AV, RV, FV, CR and CO are from memory (barycentre and distance
confirmed for poses, numbers of cycles confirmed in Table 5).
"""

import numpy as np
import pytest

from armeval.evaluate.measuring.iso_9283 import accuracy_and_repeatability, path_criteria, velocity_criteria
from tests.slides import along, lap_of

RADII = np.tile([0.1, 0.2, 0.1, 0.3, 0.2], 2) * 1e-3
ANGLES = 2.0 * np.pi * np.arange(10) / 10.0
CYCLE_SPEEDS = np.array([97.5, 98.5, 99.5, 100.5, 101.5, 98.5, 99.5, 100.5, 97.5, 101.5]) * 1e-3


def offsets():
    """Ten points about an offset of (0.3, -0.4) mm in the plane normal to x."""
    return np.column_stack([np.zeros(10), 0.3e-3 + RADII * np.cos(ANGLES), -0.4e-3 + RADII * np.sin(ANGLES)])


def test_ten_points_in_one_plane():
    accuracy, repeatability = accuracy_and_repeatability(offsets()[:, None, :], np.zeros((1, 3)))
    assert accuracy == pytest.approx(0.5000e-3, abs=5e-8)
    assert repeatability == pytest.approx(0.416643e-3, abs=5e-10)


def test_ten_laps_beside_a_straight_path():
    trajectory = along([[0.0, 0.0, 0.0], [0.2, 0.0, 0.0]])
    laps = [lap_of(trajectory, trajectory.tip + offset, lap=i + 1) for i, offset in enumerate(offsets())]
    found = path_criteria(laps, trajectory, planes=17)
    assert found.planes == 17
    assert found.accuracy == pytest.approx(0.5000e-3, abs=5e-8)
    assert found.repeatability == pytest.approx(0.416643e-3, abs=5e-10)
    assert found.notes == ()


def test_the_worst_plane_counts():
    attained = np.zeros((10, 3, 3))
    attained[:, 1] = offsets()
    accuracy, repeatability = accuracy_and_repeatability(attained, np.zeros((3, 3)))
    assert accuracy == pytest.approx(0.5e-3, abs=5e-8)
    assert repeatability == pytest.approx(0.416643e-3, abs=5e-10)


def test_cycle_mean_speeds():
    AV, RV, _ = velocity_criteria(CYCLE_SPEEDS[:, None], 0.1)
    assert pytest.approx(-0.5000, abs=5e-5) == 100.0 * AV
    assert pytest.approx(4.4721, abs=5e-5) == 100.0 * RV


def test_laps_that_run_at_those_speeds():
    trajectory = along([[-0.15, 0.0, 0.0], [0.15, 0.0, 0.0]], feed=0.1)
    laps = [lap_of(trajectory, trajectory.tip * (speed / 0.1), lap=i + 1) for i, speed in enumerate(CYCLE_SPEEDS)]
    found = path_criteria(laps, trajectory, planes=10)
    assert (found.speed, found.speed_planes) == (pytest.approx(0.1), 10)
    assert pytest.approx(-0.5000, abs=5e-5) == 100.0 * found.velocity_accuracy
    assert pytest.approx(4.4721, abs=5e-5) == 100.0 * found.velocity_repeatability
    assert found.velocity_fluctuation == pytest.approx(0.0, abs=1e-9)


def test_planes_that_a_lap_never_reaches_do_not_count():
    trajectory = along([[0.0, 0.0, 0.0], [0.1, 0.0, 0.0]])
    laps = [lap_of(trajectory, trajectory.tip * share, lap=i) for i, share in enumerate((1.0, 0.55), 1)]
    found = path_criteria(laps, trajectory, planes=10)
    assert found.planes == 6
    assert found.accuracy == pytest.approx(0.0, abs=1e-12)


def test_fluctuation_is_the_greatest_range_within_a_lap():
    speed = np.array([[0.10, 0.11, 0.09], [0.10, 0.104, 0.103]])
    assert velocity_criteria(speed, 0.1)[2] == pytest.approx(0.02)


def test_a_corner_blended_by_an_arc():
    """A quarter circle of 5 mm about a right corner passes it at (sqrt(2) - 1) 5 mm = 2.07107 mm."""
    trajectory = along([[0.0, 0.0, 0.0], [0.05, 0.0, 0.0], [0.05, 0.05, 0.0]], feed=0.05)
    turn = np.radians(np.linspace(-90.0, 0.0, 2001))
    arc = np.column_stack([0.045 + 0.005 * np.cos(turn), 0.005 + 0.005 * np.sin(turn), 0.0 * turn])
    route = np.concatenate([[[0.0, 0.0, 0.0]], arc, [[0.05, 0.05, 0.0]]])
    length = np.concatenate([[0.0], np.cumsum(np.linalg.norm(np.diff(route, axis=0), axis=1))])
    at = trajectory.arc / trajectory.length * length[-1]
    tip = np.column_stack([np.interp(at, length, column) for column in route.T])
    found = path_criteria([lap_of(trajectory, tip)], trajectory)
    assert found.corner_rounding == pytest.approx(2.07107e-3, abs=1e-8)
    assert found.corner_overshoot == pytest.approx(0.0, abs=1e-9)
    assert found.corners == pytest.approx((0.05,))


def test_a_tip_that_shoots_two_millimetres_beyond_a_corner():
    trajectory = along([[0.0, 0.0, 0.0], [0.05, 0.0, 0.0], [0.05, 0.05, 0.0]], feed=0.05)
    beyond = np.clip(trajectory.arc - 0.05, 0.0, None)
    bump = 2e-3 * np.exp(-(((beyond - 0.004) / 0.0015) ** 2)) * (beyond > 0.0)
    found = path_criteria([lap_of(trajectory, trajectory.tip + np.outer(bump, [1.0, 0.0, 0.0]))], trajectory)
    assert found.corner_overshoot == pytest.approx(2e-3, abs=1e-6)
    inside = path_criteria([lap_of(trajectory, trajectory.tip - np.outer(bump, [1.0, 0.0, 0.0]))], trajectory)
    assert inside.corner_overshoot == pytest.approx(0.0, abs=1e-9)


def test_a_tip_that_turns_back_too_late():
    trajectory = along([[0.0, 0.0, 0.0], [0.05, 0.0, 0.0], [0.0, 0.0, 0.0]], feed=0.05)
    overrun = 1.5e-3 * np.exp(-(((trajectory.arc - 0.051) / 0.002) ** 2))
    found = path_criteria([lap_of(trajectory, trajectory.tip + np.outer(overrun, [1.0, 0.0, 0.0]))], trajectory)
    farthest = np.max(trajectory.tip[:, 0] + overrun) - 0.05
    assert farthest > 0.5e-3
    assert found.corner_overshoot == pytest.approx(farthest, rel=0.02)


def test_too_few_laps_are_said_to_be_below_the_standard():
    trajectory = along([[0.0, 0.0, 0.0], [0.1, 0.0, 0.0]])
    found = path_criteria([lap_of(trajectory, trajectory.tip, lap=i) for i in (1, 2)], trajectory)
    asked = [int(note.split("asks for ")[1].split(" laps")[0]) for note in found.notes]
    assert asked == [10, 10, 3]
    assert all("there are 2" in note for note in found.notes)


def test_a_single_lap_has_no_repeatability():
    trajectory = along([[0.0, 0.0, 0.0], [0.1, 0.0, 0.0]])
    found = path_criteria([lap_of(trajectory, trajectory.tip)], trajectory)
    assert np.isnan([found.repeatability, found.velocity_repeatability]).all()
    assert np.isnan([found.corner_rounding, found.corner_overshoot]).all()


def test_a_tip_that_rests_and_slips_is_not_fast_for_it():
    """It covers its way in slips at five times the feed and takes as long as its target: its mean speed is the feed."""
    trajectory = along([[0.0, 0.0, 0.0], [0.4, 0.0, 0.0]], feed=0.1)
    step = 0.01
    within = np.mod(trajectory.arc, step)
    slipping = step * np.clip((within / step - 0.8) / 0.2, 0.0, 1.0)
    tip = np.array(trajectory.tip)
    tip[:, 0] = trajectory.arc - within + slipping
    found = path_criteria([lap_of(trajectory, tip)], trajectory, planes=400)
    assert abs(found.velocity_accuracy) < 0.03
    assert found.velocity_fluctuation > 0.3
