import json
from dataclasses import replace

import numpy as np
import pytest

from armeval.errors import Finding, InputError
from armeval.evaluate.measure import measure
from armeval.model.joint_log import JointLog
from tests.slides import along, delayed, slides, trial_of

TRAJECTORY = along([[0.0, 0.0, 0.0], [0.1, 0.0, 0.0], [0.1, 0.1, 0.0], [0.0, 0.1, 0.0]], feed=0.1, rest=0.1)
ARM = slides()


def logged(tip, *, lap=1, targets=True, shift=0.0, **more):
    return JointLog(
        TRAJECTORY.time + shift,
        tip,
        target=TRAJECTORY.joint if targets else None,
        lap=lap,
        source=f"lap-{lap}.csv",
        **more,
    )


def scattered(scale, seed):
    return TRAJECTORY.tip + scale * np.random.default_rng(seed).standard_normal(TRAJECTORY.tip.shape)


def test_an_offset_across_every_stretch_is_both_tracking_error_and_deviation():
    trial = trial_of(ARM, TRAJECTORY, bare=(logged(TRAJECTORY.tip + np.array([0.0, 0.0, 7e-4])),))
    run = measure(trial, trajectory=TRAJECTORY).runs[0]
    for summary in (run.tracking, run.deviation):
        assert summary.rms == pytest.approx(7e-4)
        assert summary.max == pytest.approx(7e-4)
        assert (summary.rms_low, summary.rms_high) == pytest.approx((7e-4, 7e-4))
    assert run.components.lag_time == pytest.approx(0.0, abs=1e-9)


def test_a_delay_is_tracking_error_and_lag_but_hardly_deviation():
    trial = trial_of(ARM, TRAJECTORY, bare=(logged(delayed(TRAJECTORY, 0.02)),))
    run = measure(trial, trajectory=TRAJECTORY).runs[0]
    assert run.tracking.median == pytest.approx(2e-3)
    assert run.deviation.max == pytest.approx(0.0, abs=1e-12)
    assert run.components.lag_time == pytest.approx(0.02, rel=0.02)


def test_without_targets_a_delay_is_taken_for_the_time_offset_and_said_so():
    trial = trial_of(ARM, TRAJECTORY, bare=(logged(delayed(TRAJECTORY, 0.02), targets=False, shift=50.0),))
    found = measure(trial, trajectory=TRAJECTORY)
    # The log ends with the lap, so all but the last 20 ms of the delay's shift are there to find.
    assert found.runs[0].laps[0].time_offset == pytest.approx(50.0, abs=0.021)
    assert any("constant lag" in warning and "bare" in warning for warning in found.warnings)


def test_figures_are_those_of_the_samples():
    laps = tuple(logged(scattered(1e-3, seed), lap=seed + 1) for seed in range(3))
    run = measure(trial_of(ARM, TRAJECTORY, bare=laps), trajectory=TRAJECTORY).runs[0]
    moving = slice(99, len(TRAJECTORY.time) - 99)
    size = [np.linalg.norm((lap.angle - TRAJECTORY.joint)[moving], axis=1) for lap in laps]
    pooled = np.concatenate(size)
    assert run.tracking.samples == pytest.approx(len(pooled), abs=9)
    assert run.tracking.rms == pytest.approx(np.sqrt(np.mean(pooled**2)), rel=1e-3)
    assert run.tracking.median == pytest.approx(np.median(pooled), rel=2e-3)
    assert run.tracking.p95 == pytest.approx(np.percentile(pooled, 95), rel=2e-3)
    assert run.tracking.mean == pytest.approx(np.mean(pooled), rel=1e-3)
    assert [lap.tracking.rms for lap in run.laps] == pytest.approx([np.sqrt(np.mean(e**2)) for e in size], rel=1e-3)


def test_runs_and_laps_keep_their_order():
    runs = {name: tuple(logged(scattered(1e-4, lap), lap=lap) for lap in (1, 2, 3)) for name in ("compensated", "bare")}
    found = measure(trial_of(ARM, TRAJECTORY, **runs), trajectory=TRAJECTORY)
    assert [run.name for run in found.runs] == ["compensated", "bare"]
    assert [run.compensated for run in found.runs] == [True, False]
    assert [lap.file for lap in found.run("bare").laps] == ["lap-1.csv", "lap-2.csv", "lap-3.csv"]


def test_a_run_without_logs_is_left_out():
    trial = trial_of(ARM, TRAJECTORY, bare=(logged(TRAJECTORY.tip),), planned=())
    assert [run.name for run in measure(trial, trajectory=TRAJECTORY).runs] == ["bare"]


def test_a_trial_without_logs_is_refused():
    with pytest.raises(InputError, match="no run has logs"):
        measure(trial_of(ARM, TRAJECTORY, planned=()), trajectory=TRAJECTORY)


def test_an_unknown_run_names_the_known_ones():
    found = measure(trial_of(ARM, TRAJECTORY, bare=(logged(TRAJECTORY.tip),)), trajectory=TRAJECTORY)
    with pytest.raises(InputError, match="`bare`"):
        found.run("bear")


def test_every_measurement_says_what_it_cannot_see():
    trial = trial_of(ARM, TRAJECTORY, bare=(logged(TRAJECTORY.tip),))
    assert "link flex and wrong link lengths do not show" in measure(trial, trajectory=TRAJECTORY).warnings[0]


def test_warnings_of_the_files_are_passed_on():
    trial = trial_of(ARM, TRAJECTORY, bare=(logged(TRAJECTORY.tip),))
    trial = replace(trial, findings=(Finding("warning", "3 rows are doubled", "nothing", "lap-1.csv"),))
    assert "lap-1.csv: 3 rows are doubled (nothing)" in measure(trial, trajectory=TRAJECTORY).warnings


def test_the_document_has_the_promised_keys():
    trial = trial_of(ARM, TRAJECTORY, bare=(logged(scattered(1e-4, 0)),))
    told = json.loads(measure(trial, trajectory=TRAJECTORY).to_json())
    assert told["schema"] == "armeval/measure/1"
    assert told["trial"] == "slides"
    run = told["runs"][0]
    summary = {"rms_m", "rms_low_m", "rms_high_m", "mean_m", "median_m", "p95_m", "max_m", "samples"}
    assert summary <= run["tracking"].keys()
    assert summary <= run["deviation"].keys()
    assert {"file", "duration_s", "time_offset_s", "tracking", "deviation"} <= run["laps"][0].keys()
    assert {"along_rms_m", "across_rms_m", "lag_mean_m", "lag_time_s", "stretches", "iso_9283"} <= run.keys()
    assert {"AT_m", "RT_m", "AV", "RV", "FV_m_s", "CR_m", "CO_m", "planes", "laps", "laps_asked"} <= run[
        "iso_9283"
    ].keys()
    assert len(run["stretches"]) == 3


def test_the_plan_is_made_from_the_trial_where_none_is_given():
    trial = trial_of(ARM, TRAJECTORY, bare=(logged(TRAJECTORY.tip + np.array([0.0, 0.0, 5e-4])),))
    found = measure(trial)
    assert found.trajectory.duration == pytest.approx(TRAJECTORY.duration, abs=2e-3)
    assert found.runs[0].tracking.rms == pytest.approx(5e-4, rel=1e-6)


def test_progress_counts_all_laps():
    heard = []
    laps = tuple(logged(scattered(1e-4, lap), lap=lap) for lap in (1, 2, 3))
    trial = trial_of(ARM, TRAJECTORY, bare=laps, compensated=laps)
    measure(trial, trajectory=TRAJECTORY, progress=lambda what, done, total: heard.append((done, total)))
    assert heard == [(done, 6) for done in range(1, 7)]


def test_every_log_at_fault_is_named():
    laps = [logged(TRAJECTORY.tip, lap=lap) for lap in (1, 2, 3)]
    short = [replace(lap, time=lap.time[:500], angle=lap.angle[:500], target=lap.target[:500]) for lap in laps]
    with pytest.raises(InputError) as caught:
        measure(trial_of(ARM, TRAJECTORY, bare=(short[0], laps[1], short[2])), trajectory=TRAJECTORY)
    assert [finding.file for finding in caught.value.findings] == ["lap-1.csv", "lap-3.csv"]


def test_an_unknown_alignment_is_refused():
    with pytest.raises(InputError, match="`time` or `rigid`"):
        measure(trial_of(ARM, TRAJECTORY, bare=(logged(TRAJECTORY.tip),)), trajectory=TRAJECTORY, align="best")


def test_encoder_resolution_comes_from_the_log_else_from_the_arm():
    laps = (logged(TRAJECTORY.tip, resolution=np.array([1e-5, 0.0, 2e-5])),)
    run = measure(trial_of(ARM, TRAJECTORY, bare=laps), trajectory=TRAJECTORY).runs[0]
    np.testing.assert_allclose(run.tracks[0].resolution, [1e-5, 0.0, 2e-5])


def test_a_base_put_down_askew_is_told_and_taken_out_on_demand():
    turn = 0.004
    R = np.array([[np.cos(turn), -np.sin(turn), 0.0], [np.sin(turn), np.cos(turn), 0.0], [0.0, 0.0, 1.0]])
    shift = np.array([1e-3, -2e-3, 5e-4])
    runs = {
        "bare": (logged((scattered(1e-4, 0) - shift) @ R),),
        "compensated": (logged((scattered(5e-5, 1) - shift) @ R),),
    }
    found = measure(trial_of(ARM, TRAJECTORY, **runs), trajectory=TRAJECTORY, align="rigid")
    assert found.runs[0].tracking.rms > 1.5e-3
    np.testing.assert_allclose(found.rigid.rotation, [0.0, 0.0, turn], atol=2e-4)
    np.testing.assert_allclose(found.rigid.translation, shift, atol=2e-5)
    assert [run.tracking.rms for run in found.rigid.runs] == pytest.approx(
        [np.sqrt(3.0) * 1e-4, np.sqrt(3.0) * 5e-5], rel=0.03
    )
    assert found.rigid.runs[0].deviation.rms == pytest.approx(np.sqrt(2.0) * 1e-4, rel=0.1)
    told = json.loads(found.to_json())["rigid"]
    assert [run["name"] for run in told["runs"]] == ["bare", "compensated"]
    assert len(told["rotation_rad"]) == 3


def test_the_turn_about_a_straight_path_is_not_claimed():
    straight = along([[0.0, 0.0, 0.0], [0.2, 0.0, 0.0]])
    log = JointLog(straight.time, straight.tip + np.array([0.0, 1e-3, 0.0]), target=straight.joint)
    found = measure(trial_of(ARM, straight, bare=(log,)), trajectory=straight, align="rigid")
    assert any("cannot be told" in warning for warning in found.warnings)
    assert found.rigid.runs[0].tracking.rms == pytest.approx(0.0, abs=1e-9)


def test_frames_have_a_row_for_everything_that_was_summed_up():
    laps = tuple(logged(scattered(1e-4, lap), lap=lap) for lap in (1, 2))
    found = measure(trial_of(ARM, TRAJECTORY, bare=laps, compensated=laps), trajectory=TRAJECTORY)
    assert len(found.to_frame()) == 2 * 2
    assert len(found.laps_frame()) == 2 * 2 * 2
    assert len(found.stretches_frame()) == 2 * 3
    criteria = found.criteria_frame()
    assert list(criteria["run"]) == ["bare", "compensated"]
    assert {"along_rms_m", "across_rms_m", "lag_time_s", "AT_m", "RT_m", "AV", "RV", "FV_m_s", "CR_m", "CO_m"} <= set(
        criteria.columns
    )
