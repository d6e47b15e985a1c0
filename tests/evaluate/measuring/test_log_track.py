"""What is done with one log: taken by its targets, refused where they run elsewhere."""

import numpy as np
import pytest

from armeval.errors import InputError
from armeval.evaluate.measuring.log_track import log_track
from armeval.model.joint_log import JointLog
from armeval.model.trial import Run
from tests.slides import along, comb, eight, slides

ARM = slides()
RUN = Run("bare", False)


def test_targets_on_another_path_are_refused_with_their_distance():
    trajectory = along(eight())
    log = JointLog(trajectory.time, trajectory.joint, target=1.5 * trajectory.joint, source="other.csv")
    with pytest.raises(InputError, match=r"other\.csv, lap 1.*do not follow the planned path.*mm"):
        log_track(ARM, trajectory, RUN, log)


def test_targets_a_little_off_the_path_are_told():
    trajectory = along(eight())
    log = JointLog(trajectory.time, trajectory.joint, target=trajectory.joint + np.array([0.0, 0.0, 1.5e-3]))
    _, findings = log_track(ARM, trajectory, RUN, log)
    assert "1.5 mm off the planned path" in str(findings[0])


def test_targets_that_stop_half_way_are_refused():
    trajectory = along(eight())
    half = len(trajectory.time) // 2
    log = JointLog(trajectory.time[:half], trajectory.joint[:half], target=trajectory.joint[:half], source="half.csv")
    with pytest.raises(InputError, match=r"half\.csv.*of a path of.*log the whole lap"):
        log_track(ARM, trajectory, RUN, log)


def test_laps_that_run_on_into_each_other_are_refused():
    trajectory = along(eight())
    target = np.concatenate([trajectory.joint, trajectory.joint])
    log = JointLog(1e-3 * np.arange(len(target)), target, target=target, source="twice.csv")
    with pytest.raises(InputError, match="`lap` column"):
        log_track(ARM, trajectory, RUN, log)


def test_of_laps_with_a_way_back_one_is_taken_and_the_rest_told():
    trajectory = along(comb())
    target = np.concatenate([trajectory.joint, np.linspace(trajectory.joint[-1], trajectory.joint[0], 500)] * 2)
    log = JointLog(1e-3 * np.arange(len(target)), target, target=target, source="twice.csv")
    track, findings = log_track(ARM, trajectory, RUN, log)
    assert "`lap` column" in findings[0].mend
    assert track.duration == pytest.approx(trajectory.duration, abs=0.05)
    np.testing.assert_allclose(track.tracking, 0.0, atol=1e-12)


def test_logged_targets_set_the_timing_whatever_the_feed():
    trajectory, slower = along(eight(), feed=0.1), along(eight(), feed=0.037)
    log = JointLog(slower.time, slower.joint, target=slower.joint)
    track, findings = log_track(ARM, trajectory, RUN, log)
    assert not findings
    assert track.duration == pytest.approx(slower.duration, abs=5e-3)
    np.testing.assert_allclose(track.arc[::100], slower.arc[: len(track.arc)][::100], atol=1e-4)
    np.testing.assert_allclose(track.lag, 0.0, atol=1e-7)
