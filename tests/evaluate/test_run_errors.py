import numpy as np
import pytest

from armeval.evaluate.run_errors import laps_frame, run_errors, runs_frame, stretches_frame
from tests.slides import along, lap_of

TRAJECTORY = along([[0.0, 0.0, 0.0], [0.1, 0.0, 0.0], [0.1, 0.1, 0.0]])


def laps(*sizes):
    return [lap_of(TRAJECTORY, TRAJECTORY.tip + np.array([0.0, 0.0, size]), lap=i + 1) for i, size in enumerate(sizes)]


def test_a_run_holds_all_samples_of_its_laps():
    found = run_errors(laps(1e-3, 3e-3))
    assert found.tracking.samples == 2 * len(TRAJECTORY.time)
    assert found.tracking.rms == pytest.approx(np.sqrt(5.0) * 1e-3)
    assert [lap.deviation.rms for lap in found.laps] == pytest.approx([1e-3, 3e-3])
    assert [lap.duration for lap in found.laps] == pytest.approx([TRAJECTORY.duration] * 2)


def test_a_single_lap_is_the_run():
    found = run_errors(laps(1e-3))
    assert found.tracking == found.laps[0].tracking


def test_without_the_path_nothing_is_said_along_or_across_it():
    found = run_errors(laps(1e-3))
    assert (found.components, found.stretches, found.iso_9283) == (None, (), None)
    assert "iso_9283" not in found.to_document()


def test_with_the_path_stretches_and_criteria_are_told():
    found = run_errors(laps(1e-3, 2e-3), TRAJECTORY)
    assert len(found.stretches) == 2
    assert found.components.across_rms == pytest.approx(np.sqrt(2.5) * 1e-3)
    assert found.iso_9283.accuracy == pytest.approx(1.5e-3)


def test_frames_tell_run_lap_and_stretch():
    runs = [run_errors(laps(1e-3, 2e-3), TRAJECTORY)]
    assert list(runs_frame(runs)["error"]) == ["tracking", "deviation"]
    assert list(laps_frame(runs)["lap"]) == [1, 1, 2, 2]
    assert list(stretches_frame(runs)["stretch"]) == [1, 2]
