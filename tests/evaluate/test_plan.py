"""Trajectories: where the tip is when, by construction; and what a person is told when the arm cannot follow."""

import numpy as np
import pytest

from armeval.errors import InputError
from armeval.evaluate.plan import plan, plan_trial
from armeval.kernels.chain import tip_positions
from armeval.model.planned_path import PlannedPath
from armeval.model.trial import Run, Trial
from tests.planar_arms import planar_arm

FEED, ACCELERATION = 0.06, 0.5


def two_joints(**settings):
    return planar_arm((0.2, 0.2), (0.3, 0.9), **settings)


def flat(*points):
    return np.array([[x, y, 0.0] for x, y in points])


SQUARE = flat((0.2, 0.1), (0.3, 0.1), (0.3, 0.2), (0.2, 0.2), (0.2, 0.1))


def run(arm, points, **settings):
    return plan(arm, PlannedPath(points, source="path.csv", **settings), feed=FEED, acceleration=ACCELERATION)


def test_a_square_is_run_side_by_side_with_a_stop_at_each_corner():
    trajectory = run(two_joints(), SQUARE)
    assert trajectory.corners == pytest.approx([0.0, 0.1, 0.2, 0.3, 0.4])
    side = 0.1 / FEED + FEED / ACCELERATION
    assert trajectory.duration == pytest.approx(4.0 * side, abs=1e-3)
    speed = np.linalg.norm(np.diff(trajectory.tip, axis=0), axis=1) / 1e-3
    assert speed.max() == pytest.approx(FEED, rel=1e-6)
    for stop in range(1, 4):
        near = np.abs(trajectory.time[:-1] - stop * side) < 1.5e-3
        assert speed[near].min() < ACCELERATION * 1e-3


def test_the_joints_put_the_tip_on_its_target():
    arm = two_joints()
    trajectory = run(arm, SQUARE)
    assert tip_positions(arm.chain.arrays, np.array(trajectory.joint)) == pytest.approx(trajectory.tip, abs=1e-9)
    assert trajectory.joint[-1] == pytest.approx(trajectory.joint[0], abs=1e-9)


def test_a_gentle_curve_is_passed_at_speed():
    turn = np.linspace(0.0, 2.0 * np.pi, 181)  # 2 degrees a point, below the 5 at which it stops
    circle = np.column_stack([0.25 + 0.05 * np.cos(turn), 0.1 + 0.05 * np.sin(turn), 0.0 * turn])
    trajectory = run(two_joints(), circle)
    assert len(trajectory.corners) == 2
    assert trajectory.duration == pytest.approx(trajectory.length / FEED + FEED / ACCELERATION, abs=1e-3)
    stopping = plan(
        two_joints(), PlannedPath(circle), feed=FEED, acceleration=ACCELERATION, corner_angle=np.radians(1.0)
    )
    assert len(stopping.corners) == 181


def test_there_and_back_stops_at_the_turn():
    trajectory = run(two_joints(), flat((0.2, 0.1), (0.3, 0.1), (0.2, 0.1)))
    assert trajectory.corners == pytest.approx([0.0, 0.1, 0.2])
    assert trajectory.length == pytest.approx(0.2)


def test_repeated_points_change_nothing():
    doubled = np.repeat(SQUARE, [2, 1, 3, 1, 2], axis=0)
    once, twice = run(two_joints(), SQUARE), run(two_joints(), doubled)
    assert twice.joint == pytest.approx(once.joint, abs=1e-12)
    assert len(twice.path) == 5


def test_speeds_and_accelerations_are_the_differences_of_the_targets():
    trajectory = run(two_joints(), SQUARE)
    q, period = trajectory.joint, 1e-3
    assert trajectory.joint_speed[1:-1] == pytest.approx((q[2:] - q[:-2]) / (2.0 * period))
    assert trajectory.joint_acceleration[1:-1] == pytest.approx((q[2:] - 2.0 * q[1:-1] + q[:-2]) / period**2)
    # Two steps of the speed make the same change as the accelerations between them.
    change = trajectory.joint_speed[2:] - trajectory.joint_speed[:-2]
    middle = trajectory.joint_acceleration
    assert change[1:-1] == pytest.approx(period * (0.5 * middle[1:-3] + middle[2:-2] + 0.5 * middle[3:-1]), abs=1e-9)


def test_a_path_with_time_is_taken_as_it_is():
    points = flat((0.2, 0.1), (0.3, 0.1), (0.3, 0.1), (0.3, 0.15))
    trajectory = plan(two_joints(), PlannedPath(points, time=np.array([5.0, 7.0, 8.0, 8.5])))
    assert trajectory.duration == pytest.approx(3.5)
    assert trajectory.tip[500] == pytest.approx([0.225, 0.1, 0.0])
    assert np.ptp(trajectory.arc[2000:3001]) == pytest.approx(0.0, abs=1e-12)  # it dwells on the repeated point
    assert trajectory.arc[-1] == pytest.approx(0.15)
    assert trajectory.corners == pytest.approx([0.0, 0.1, 0.15])


def test_a_joint_path_is_linear_in_the_joints_and_measured_at_the_tip():
    rows = np.array([[0.3, 0.9], [0.3, 1.2], [0.6, 1.2]])
    trajectory = plan(two_joints(), PlannedPath(rows, space="joint", time=np.array([0.0, 1.0, 2.0])))
    assert trajectory.joint[500] == pytest.approx([0.3, 1.05])
    # First the elbow alone swings the tip on its radius, then the shoulder on the tip's distance from the base.
    radius = 2.0 * 0.2 * np.cos(0.6)
    assert trajectory.arc[1000] == pytest.approx(0.2 * 0.3, rel=1e-6)
    assert trajectory.length == pytest.approx(0.2 * 0.3 + radius * 0.3, rel=1e-6)
    assert len(trajectory.corners) == 3


def test_a_joint_path_without_time_runs_the_tip_at_the_feed():
    rows = np.array([[0.3, 0.9], [0.3, 1.2], [0.6, 1.2]])
    trajectory = run(two_joints(), rows, space="joint")
    speed = np.linalg.norm(np.diff(trajectory.tip, axis=0), axis=1) / 1e-3
    assert speed.max() == pytest.approx(FEED, rel=1e-4)
    assert trajectory.joint[-1] == pytest.approx(rows[-1])
    first, second = np.diff(trajectory.corners)
    both = first / FEED + second / FEED + 2.0 * FEED / ACCELERATION
    assert trajectory.duration == pytest.approx(both, abs=1e-3)


def test_a_trial_hands_on_its_feed_and_acceleration():
    trial = Trial("t", two_joints(), PlannedPath(SQUARE), (Run("bare", False),), feed=FEED, acceleration=ACCELERATION)
    assert plan_trial(trial).joint == pytest.approx(run(two_joints(), SQUARE).joint)


def faults(arm, points, **settings):
    with pytest.raises(InputError) as caught:
        run(arm, points, **settings)
    assert all(finding.file == "path.csv" and finding.mend for finding in caught.value.findings)
    return [f"{finding.place}: {finding.what}" for finding in caught.value.findings]


def test_every_stretch_out_of_reach_is_told_at_once_with_place_and_amount():
    told = faults(two_joints(), flat((0.2, 0.1), (0.45, 0.1), (0.2, 0.1), (0.2, -0.4), (0.2, 0.0)))
    assert len(told) == 2
    # Reach is 0.4 m; the corner is at hypot(0.45, 0.1) = 0.461, left and entered at x = sqrt(0.16 - 0.01) = 0.3873.
    assert "points 1 to 3, s = 187.3 mm to 312.7 mm" in told[0]
    assert "up to 61.0 mm short" in told[0]
    assert "points 3 to 5" in told[1]
    assert "up to 47.2 mm short" in told[1]


def test_a_planar_arm_cannot_leave_its_plane():
    told = faults(two_joints(), np.array([[0.2, 0.1, 0.0], [0.3, 0.1, 0.0], [0.3, 0.1, 0.004]]))
    assert len(told) == 1
    assert "points 2 to 3" in told[0]
    assert "up to 4.00 mm short" in told[0]


def test_a_joint_range_that_is_too_small_is_told_with_joint_and_amount():
    # The line's nearest point is 0.6 / sqrt(10) = 0.18974 m from the base: the elbow needs 2 acos(0.18974 / 0.4) there,
    # which is 123.4 degrees; the range ends at 100.
    told = faults(two_joints(limit=np.radians(100.0)), flat((0.3, 0.1), (0.0, 0.2)))
    assert len(told) == 1
    assert "joint `elbow` would have to go up to 23.4 deg beyond its range (-100 deg to 100 deg)" in told[0]
    assert "points 1 to 2" in told[0]


def test_a_joint_path_beyond_a_range_is_told_with_joint_and_amount():
    rows = np.array([[0.3, 0.9], [1.5, 0.9], [1.6, 0.9], [0.3, -1.1]])
    told = faults(two_joints(limit=1.0), rows, space="joint")
    assert told == [
        "points 2 to 3: joint `shoulder` goes up to 34.4 deg beyond its range (-57.3 deg to 57.3 deg)",
        "point 4: joint `elbow` goes up to 5.73 deg beyond its range (-57.3 deg to 57.3 deg)",
    ]


def test_a_path_close_by_the_base_axis_is_near_singular():
    told = faults(two_joints(), flat((0.3, 0.0001), (-0.3, 0.0001)))
    assert len(told) == 1
    assert "near a singular pose: joint `shoulder` would have to move at" in told[0]
    assert "smallest singular value of the Jacobian 0.100 mm/rad" in told[0].replace("0.1000", "0.100")
    assert "points 1 to 2, s = 29" in told[0]


def test_a_path_that_touches_the_end_of_the_reach_is_near_singular_there():
    told = faults(two_joints(), flat((0.2, 0.0), (0.39999, 0.0)))
    assert len(told) == 1
    assert "near a singular pose" in told[0]


def test_joints_that_move_without_the_tip_need_time():
    arm = planar_arm((0.2, 0.0), (0.0, 0.0))
    rows = np.array([[0.0, 0.0], [0.5, 0.0], [0.5, 0.5]])
    assert faults(arm, rows, space="joint") == [
        "points 2 to 3: the joints move and the tip does not, so a feed cannot say how fast"
    ]
    trajectory = plan(arm, PlannedPath(rows, space="joint", time=np.array([0.0, 1.0, 2.0])))
    assert trajectory.length == pytest.approx(0.1, rel=1e-6)


def test_a_joint_path_that_folds_the_arm_at_a_feed_is_near_singular():
    # With equal links and the elbow turning twice as fast, the tip runs straight out and back in and stands still
    # where the arm is stretched.
    rows = np.array([[0.5, -1.0], [-0.5, 1.0]])
    told = faults(two_joints(), rows, space="joint")
    assert len(told) == 1
    assert "near a singular pose" in told[0]
    trajectory = plan(two_joints(), PlannedPath(rows, space="joint", time=np.array([0.0, 1.0])))
    assert trajectory.length == pytest.approx(2.0 * 0.4 * (1.0 - np.cos(0.5)), rel=1e-5)


@pytest.mark.parametrize(
    ("settings", "what"),
    [
        ({"feed": None, "acceleration": 1.0}, "feed or acceleration are missing"),
        ({"feed": 0.0, "acceleration": 1.0}, "`feed` is 0.0"),
        ({"feed": 0.1, "acceleration": np.nan}, "`acceleration` is nan"),
    ],
)
def test_feed_and_acceleration_must_be_there_and_above_zero(settings, what):
    with pytest.raises(InputError, match=what):
        plan(two_joints(), PlannedPath(SQUARE), **settings)


def test_a_joint_path_of_another_arm_is_refused():
    with pytest.raises(InputError, match="3 joint columns, the arm 2 joints"):
        run(two_joints(), np.array([[0.0, 0.0, 0.0], [0.1, 0.1, 0.1]]), space="joint")
