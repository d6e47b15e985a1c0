"""The time offset is the one of least RMS over all offsets, however often the path comes by the same place."""

import numpy as np
import pytest

from armeval.errors import InputError
from armeval.evaluate.measuring.align import align_by_targets, align_on_path, align_to_plan
from armeval.evaluate.measuring.log_track import log_track
from armeval.model.joint_log import JointLog
from armeval.model.trial import Run
from tests.slides import PATHS, along, circle, eight, slides

ARM = slides()
RUN = Run("bare", False)


def recorded(trajectory, *, offset, early, late, noise=2e-4, targets=False, seed=0, rate=1000.0, angle=None):
    """A log whose arm follows the plan from `offset` on and rests before and after it; a jittered clock."""
    rng = np.random.default_rng(seed)
    count = round((trajectory.duration + early + late) * rate)
    time = offset - early + (np.arange(count) + rng.uniform(-0.3, 0.3, count)) / rate
    plan = np.column_stack([np.interp(time - offset, trajectory.time, column) for column in trajectory.joint.T])
    wander = noise * rng.standard_normal(plan.shape)
    return JointLog(time, plan + wander if angle is None else angle, target=plan if targets else None, source="log.csv")


def rms_at(log, trajectory, offset):
    inside = (log.time >= offset) & (log.time <= offset + trajectory.duration)
    planned = log.time[inside] - offset
    target = np.column_stack([np.interp(planned, trajectory.time, column) for column in trajectory.tip.T])
    return np.sqrt(np.mean(np.sum((log.angle[inside] - target) ** 2, axis=1)))


@pytest.mark.parametrize("shape", PATHS)
@pytest.mark.parametrize(("early", "late"), [(0.0, 3.0), (2.0, 0.5), (7.3, 4.1)])
def test_the_offset_is_found_on_paths_that_come_by_the_same_place_again(shape, early, late):
    trajectory = along(PATHS[shape], rest=0.2)
    log = recorded(trajectory, offset=12.345, early=early, late=late, noise=2e-3)
    found = align_to_plan(log, trajectory, ARM)
    assert found.time_offset == pytest.approx(12.345, abs=2e-3)


@pytest.mark.parametrize("shape", PATHS)
def test_no_other_offset_has_a_lower_rms(shape):
    trajectory = along(PATHS[shape], rest=0.1)
    log = recorded(trajectory, offset=-3.0, early=4.0, late=5.0, noise=3e-3, rate=200.0)
    found = align_to_plan(log, trajectory, ARM)
    every = np.arange(log.time[0], log.time[-1] - trajectory.duration, 5e-3)
    best = min(rms_at(log, trajectory, offset) for offset in every)
    assert rms_at(log, trajectory, found.time_offset) <= best * (1.0 + 1e-6)


def test_a_long_log_of_many_short_stretches_is_not_misplaced_by_one():
    teeth = np.arange(3001)
    zigzag = np.column_stack([1e-5 * teeth, 4e-3 * (teeth % 2), 0.0 * teeth])
    trajectory = along(zigzag, feed=0.1, period=4e-3)
    log = recorded(trajectory, offset=31.4, early=20.0, late=35.0, noise=1e-3, rate=250.0)
    assert align_to_plan(log, trajectory, ARM).time_offset == pytest.approx(31.4, abs=2e-3)


def test_a_lagging_arm_is_found_late_by_its_lag():
    trajectory = along(eight(), rest=0.5)
    log = recorded(trajectory, offset=5.02, early=2.0, late=2.0, noise=1e-5)
    assert align_to_plan(log, trajectory, ARM).time_offset == pytest.approx(5.02, abs=1e-4)


def test_the_lap_is_cut_to_the_plan():
    trajectory = along(circle(), rest=0.1)
    log = recorded(trajectory, offset=1.0, early=3.0, late=3.0)
    found = align_to_plan(log, trajectory, ARM)
    time = log.time[found.part]
    assert time[0] >= found.time_offset
    assert time[-1] <= found.time_offset + trajectory.duration
    assert len(time) == pytest.approx(trajectory.duration * 1000.0, abs=3)


def test_a_slow_log_is_placed_between_its_samples():
    trajectory = along(eight(), rest=0.2)
    log = recorded(trajectory, offset=2.0123, early=1.0, late=1.0, noise=1e-5, rate=25.0)
    assert align_to_plan(log, trajectory, ARM).time_offset == pytest.approx(2.0123, abs=1e-3)


def test_a_log_of_exactly_one_lap_needs_no_spare_time():
    trajectory = along(circle())
    log = JointLog(trajectory.time + 7.0, trajectory.joint)
    assert align_to_plan(log, trajectory, ARM).time_offset == pytest.approx(7.0, abs=1e-6)


def test_a_log_shorter_than_the_trajectory_says_how_much_is_missing():
    trajectory = along(circle(), rest=0.5)
    log = JointLog(trajectory.time[:-250], trajectory.joint[:-250], lap=2, source="short.csv")
    with pytest.raises(InputError, match=r"short\.csv, lap 2.*0\.25 s are missing"):
        align_to_plan(log, trajectory, ARM)


def test_two_laps_in_one_log_are_noticed():
    trajectory = along(eight(), rest=0.3)
    twice = np.concatenate([trajectory.joint, trajectory.joint])
    noise = 1e-4 * np.random.default_rng(0).standard_normal(twice.shape)
    found = align_to_plan(JointLog(1e-3 * np.arange(len(twice)), twice + noise), trajectory, ARM)
    assert "nearly as well" in str(found.findings[0])


def test_a_log_of_another_path_is_doubted():
    trajectory = along(circle(), rest=0.3)
    log = recorded(along(circle() * [-1.0, 1.0, 1.0], rest=0.3), offset=0.0, early=1.0, late=1.0)
    assert any("off a path" in str(finding) for finding in align_to_plan(log, trajectory, ARM).findings)


def test_logged_targets_mark_the_lap():
    trajectory = along(eight())
    log = recorded(trajectory, offset=3.0, early=2.0, late=1.0, targets=True)
    part = align_by_targets(log).part
    assert log.time[part][0] == pytest.approx(3.0, abs=2e-3)
    assert log.time[part][-1] == pytest.approx(3.0 + trajectory.duration, abs=2e-3)


def test_targets_that_never_move_are_refused():
    log = JointLog(np.arange(100.0), np.zeros((100, 3)), target=np.zeros((100, 3)), source="still.csv")
    with pytest.raises(InputError, match=r"still\.csv.*never move"):
        align_by_targets(log)


@pytest.mark.parametrize("shape", ["circle", "eight", "comb"])
def test_motion_to_the_path_and_from_it_is_left_out(shape):
    trajectory = along(PATHS[shape])
    home = np.array([-0.02, -0.1, 0.08])
    start, end = trajectory.joint[0], trajectory.joint[-1]
    rest = np.ones((300, 1))
    way = np.linspace(0.0, 1.0, 800)[:, None]
    target = np.concatenate(
        [rest * home, home + way * (start - home), rest * start, trajectory.joint, rest * end, end + way * (home - end)]
    )
    log = JointLog(1e-3 * np.arange(len(target)), target + np.array([0.0, 0.0, 1e-3]), target=target, source="all.csv")
    found = align_on_path(log, trajectory, ARM)
    assert found.part.start == pytest.approx(1400, abs=2)
    assert found.part.stop == pytest.approx(1400 + len(trajectory.time), abs=2)
    track, findings = log_track(ARM, trajectory, RUN, log)
    assert "are left out" in str(findings[0])
    np.testing.assert_allclose(track.tracking, 1e-3, atol=1e-9)
    assert track.arc[0] == pytest.approx(0.0, abs=1e-3)
    assert track.arc[-1] == pytest.approx(trajectory.length, abs=1e-3)
