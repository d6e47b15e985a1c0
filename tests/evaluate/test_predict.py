"""The prediction of a trial: how sure it is, and what it would be without a cause."""

import json
import math
from dataclasses import replace

import numpy as np
import pytest

from armeval.evaluate.predict import predict
from armeval.model.planned_path import PlannedPath
from armeval.model.servo import Servo
from armeval.model.spreads import Spreads
from armeval.model.trial import Compensation, Run, Trial
from tests.planar_arms import harmonic_map, planar_arm

RUNS = (Run("bare", compensated=False), Run("smoothed", compensated=True))
CERTAIN = Spreads(rotor_index=0.0, friction=0.0, torque_constant=0.0, start=0.0)


def trial(**more):
    """Two joints that cog and rub, led along an arc for a second and a half."""
    arm = planar_arm(
        (0.2, 0.15),
        (0.2, 0.9),
        servo=Servo("joint_pd", 1e-3, delay=1e-3, speed_cutoff=80.0),
        stiffness=3.0,
        damping=0.05,
        rotor_inertia=3e-4,
        coulomb_friction=4e-3,
        viscous_friction=1e-3,
        encoder_counts=8192.0,
        cog_map=replace(harmonic_map(84, 0.02), noise=2e-4),
    )
    path = PlannedPath(np.array([[0.2, 0.9], [0.5, 0.6], [0.4, 0.6]]), space="joint", time=np.array([0.0, 1.0, 1.5]))
    settings = {"compensation": Compensation(256, index_error=math.radians(0.1)), **more}
    return Trial("two joints", arm, path, RUNS, **settings)


@pytest.fixture(scope="module")
def with_members():
    return predict(trial(), members=20, seed=3)


def test_the_numbers_do_not_depend_on_the_threads(with_members):
    for threads in (1, 3):
        for run, again in zip(
            with_members.runs, predict(trial(), members=20, seed=3, threads=threads).runs, strict=True
        ):
            for name in ("tracking", "deviation", "error", "sticking"):
                assert np.array_equal(getattr(run.ensemble, name), getattr(again.ensemble, name), equal_nan=True)


def test_another_seed_draws_other_arms(with_members):
    other = predict(trial(), members=20, seed=4)
    assert not np.any(other.run("bare").ensemble.tracking == with_members.run("bare").ensemble.tracking)


def test_an_arm_of_which_everything_is_known_has_no_band():
    # Without an index error and without noise on the table nothing is left to be drawn.
    known = trial(uncertainty=CERTAIN, compensation=Compensation(256, map_noise=0.0))
    for run in predict(known, members=9).runs:
        assert np.ptp(run.ensemble.tracking) == 0.0
        assert run.ensemble.tracking[0] == pytest.approx(run.errors.tracking.rms, rel=1e-6)
        assert set(np.unique(run.ensemble.sticking)) <= {0.0, 1.0}


def test_the_trial_says_how_far_arms_may_differ():
    low, high = (
        predict(trial(uncertainty=replace(CERTAIN, friction=spread)), members=24).run("bare").ensemble.tracking_interval
        for spread in (0.05, 0.4)
    )
    assert high[1] - high[0] > 3.0 * (low[1] - low[0])


def test_the_interval_lies_about_the_prediction(with_members):
    bare = with_members.run("bare")
    low, high = bare.ensemble.tracking_interval
    assert low < bare.errors.tracking.rms < high


def test_without_members_there_is_no_ensemble():
    found = predict(trial())
    assert all(run.ensemble is None for run in found.runs)
    assert found.to_document()["runs"][0]["ensemble"] is None
    assert found.bands_frame().empty


def test_document_and_table_tell_of_every_run(with_members):
    told = json.loads(with_members.to_json())["runs"]
    table = with_members.bands_frame()
    for entry, run in zip(told, with_members.runs, strict=True):
        assert entry["ensemble"]["members"] == 20
        assert (entry["ensemble"]["tracking_rms_m"]["low"], entry["ensemble"]["tracking_rms_m"]["high"]) == (
            pytest.approx(run.ensemble.tracking_interval)
        )
        rows = table[table["run"] == run.name]
        assert rows["shoulder_sticks"].tolist() == entry["ensemble"]["sticking"][0]["probability"]
        assert rows["p50_m"].to_numpy() == pytest.approx(run.ensemble.band[2], nan_ok=True)


def test_progress_tells_of_each_runs_members():
    told = []
    predict(trial(), members=16, progress=lambda *step: told.append(step))
    for run in RUNS:
        assert (f"members of run {run.name}", 2, 2) in told


@pytest.mark.parametrize("joint", ["shoulder", "elbow"])
def test_without_its_cogging_a_joint_is_not_compensated_either(joint):
    found = predict(trial(compensation=Compensation(256, map_noise=0.0)))
    i = trial().arm.joints.index(joint)
    bare, smoothed = (found.counterfactuals[run.name](joint, "cogging").angle[:, i] for run in RUNS)
    # The joints of this arm are coupled by nothing but their rotors, and these by nothing at all.
    assert np.array_equal(bare, smoothed)
    assert not np.array_equal(found.run("bare").track.angle[:, i], found.run("smoothed").track.angle[:, i])


def test_a_step_that_is_too_coarse_is_told_with_its_size_and_what_to_do():
    # Rotors so light that they swing in their detents 30 times a second, at a servo period of 4 ms.
    arm = trial().arm
    drives = tuple(replace(drive, rotor_inertia=5e-5, damping=0.02, encoder_counts=0.0) for drive in arm.drives)
    light = replace(trial(), arm=replace(arm, drives=drives, servo=Servo("joint_pd", 4e-3)), runs=RUNS[:1])
    (warning,) = predict(light).warnings
    assert warning.startswith("run bare: the time step moves the tip by about 0.")
    assert "--substeps 2" in warning
    fine = predict(light, substeps=32)
    assert fine.warnings == ()
    assert fine.runs[0].step.rms < 0.2 * predict(light).runs[0].step.rms
