"""What a hand meets, and what is said where it cannot be had."""

from __future__ import annotations

import json
from dataclasses import replace

import numpy as np
import pytest

from armeval.errors import InputError
from armeval.evaluate.feel import feel
from armeval.evaluate.feeling.feel_notes import CAUTION
from armeval.files.demo import write_demo
from armeval.files.thresholds_file import read_thresholds
from armeval.files.trial_file import read_trial
from armeval.model.arm import Arm
from armeval.model.drive import Drive
from armeval.model.hand import Hand
from armeval.model.joint_log import JointLog
from armeval.model.planned_path import PlannedPath
from armeval.model.servo import Servo
from armeval.model.trial import Compensation, Run, Trial
from tests.planar_arms import harmonic_map, planar_arm
from tests.random_arms import chain_of, random_urdf

DRIVE = {
    "rotor_inertia": 1e-4,
    "torque_limit": 0.3,
    "coulomb_friction": 0.004,
    "viscous_friction": 1e-3,
    "encoder_counts": 16384.0,
    "cog_map": harmonic_map(84, 0.01),
}
LINE = PlannedPath(np.array([[0.25, -0.08, 0.0], [0.25, 0.08, 0.0]]))


def trial_of(*, path=LINE, hand=None, lengths=(0.2, 0.2), rest=(-0.6, 1.6), laps=(), **drive) -> Trial:
    timed = {} if path.time is not None else {"feed": 0.06, "acceleration": 0.5}
    return Trial(
        title="planar",
        arm=planar_arm(lengths, rest, **{**DRIVE, **drive}),
        path=path,
        runs=(Run("bare", False, tuple(laps)), Run("compensated", True)),
        compensation=Compensation(index_error=2e-3, map_noise=1e-5),
        hand=hand or Hand(rendered_force=3.0, thresholds=read_thresholds()),
        **timed,
    )


def notes(met) -> str:
    return "\n".join(met.warnings)


@pytest.fixture(scope="module")
def met():
    return feel(trial_of(), members=40)


def test_the_rattle_is_named_by_joint_and_order(met):
    for state in met.states:
        assert {(line.joint, line.order) for line in state.ripple.lines[:2]} == {("shoulder", 84), ("elbow", 84)}
    peaks = met.bare.per_second.peaks
    assert {(peak.joint, peak.order) for peak in peaks} <= {("shoulder", 84), ("elbow", 84)}
    assert sum(met.bare.ripple.share) == pytest.approx(1.0)


def test_the_lines_leave_nothing_of_a_map_that_has_no_more(met):
    assert met.bare.ripple.rest_rms < 1e-3 * met.bare.ripple.rms


def test_what_compensation_leaves_is_what_its_index_error_leaves(met):
    # One harmonic, out of step by d: 2 sin(84 d / 2) of it stays, over many detents; this path has some fifteen.
    share = 2.0 * np.sin(84 * 2e-3 / 2.0)
    by_index = {part.cause: part.rms for part in met.compensated.left}["index error"]
    assert by_index == pytest.approx(share * met.bare.ripple.rms, rel=0.1)
    assert met.compensated.left[0].cause == "index error"
    assert 1.0 - met.reduction == pytest.approx(share, rel=0.15)


def test_members_spread_about_what_their_index_error_leaves(met):
    low, high = met.compensated.spread.interval
    assert low < met.compensated.ripple.rms < high
    assert np.array_equal(feel(trial_of(), members=40).compensated.spread.rms, met.compensated.spread.rms)


def test_a_planar_arm_has_no_figure_across_its_plane(met):
    document = met.to_document()
    assert document["motion"]["tip_directions"] == 2
    assert np.abs(document["motion"]["without_figure"]) == pytest.approx([0.0, 0.0, 1.0])
    assert "there is no figure" in notes(met)
    assert np.abs(met.bare.force.total[:, 2]).max() < 1e-12


def test_the_document_is_strict_json_with_its_cautions(met):
    document = json.loads(met.to_json())
    assert document["schema"] == "armeval/feel/1"
    assert CAUTION in document["warnings"]
    assert any("not imperceptible" in warning for warning in document["warnings"])
    assert [state["name"] for state in document["states"]] == ["bare", "compensated"]
    assert {"continuous_force_N", "wall_by_damping_N_m"} <= {entry["figure"] for entry in document["abilities"]}


def test_tables_hold_what_the_document_holds(met):
    assert len(met.to_frame()) == 12
    assert set(met.lines_frame()["state"]) == {"bare", "compensated"}
    along = met.along_frame()
    assert len(along) == len(met.motion.time)
    assert np.allclose(along["bare_total_along_N"], met.bare.force.along(met.bare.force.total), equal_nan=True)


def test_ripple_is_held_against_what_is_noticed_of_the_rendered_force(met):
    number = 0
    line, seen = met.bare.ripple.lines[number], met.bare.noticed[number]
    assert seen.by == "force"
    assert seen.force == pytest.approx(0.07 * 3.0)
    assert met.bare.ratio(number) == pytest.approx(np.sqrt(2.0) * line.rms / 0.21)


def test_without_a_hand_table_nothing_is_judged_and_that_is_said():
    found = feel(replace(trial_of(), hand=None), members=8)
    assert all(np.isnan(seen.force) for seen in found.bare.noticed)
    assert "rendered_force" in notes(found)
    assert found.bare.ripple.rms > 0.0


def test_without_a_torque_limit_there_is_no_continuous_force_and_the_rest_is_given():
    found = feel(trial_of(torque_limit=np.inf), members=8)
    assert "torque_limit" in notes(found)
    assert np.isnan(found.abilities.continuous_force).all()
    assert np.isnan(found.abilities.dynamic_range).all()
    assert np.isfinite(found.abilities.mass_most).all()
    assert json.loads(found.to_json())["abilities"][0]["median"] is None


def test_without_rotor_inertia_the_apparent_mass_is_said_to_be_too_small():
    trial = trial_of()
    chain = replace(trial.arm.chain, inertia=np.tile(1e-4 * np.eye(3), (2, 1, 1)), mass=np.full(2, 0.1))
    drives = tuple(replace(drive, rotor_inertia=0.0) for drive in trial.arm.drives)
    found = feel(replace(trial, arm=replace(trial.arm, chain=chain, drives=drives)), members=8)
    assert "rotor_inertia" in notes(found)
    assert "too small" in notes(found)
    assert np.isfinite(found.abilities.mass_most).all()


def test_a_motion_without_any_inertia_is_refused_in_words():
    with pytest.raises(InputError, match="rotor_inertia"):
        feel(trial_of(rotor_inertia=0.0), members=8)


def rest_log(samples: int = 400) -> JointLog:
    time = np.arange(samples) * 1e-3
    return JointLog(time, np.tile([-0.6, 1.6], (samples, 1)), source="led.csv")


def test_a_hand_that_rests_has_no_direction_and_no_spectrum_and_the_rest_is_given():
    hand = Hand(rendered_force=3.0, run="bare", thresholds=read_thresholds())
    found = feel(trial_of(hand=hand, laps=[rest_log()]), members=8)
    assert "does not move" in notes(found)
    assert found.bare.per_metre is None
    assert found.bare.per_second is None
    assert found.bare.force.band.max() > 0.0
    assert np.isfinite(found.abilities.continuous_force).all()
    json.loads(found.to_json())


def test_near_a_singular_pose_the_figure_is_withheld_and_the_rest_of_the_path_is_given():
    out = PlannedPath(np.array([[0.3, 0.0, 0.0], [0.39995, 0.0, 0.0]]))
    found = feel(trial_of(path=out), members=8)
    assert "singular" in notes(found)
    withheld = np.isnan(found.bare.force.total[:, 0])
    assert withheld.any()
    assert not withheld.all()
    assert (found.motion.tip[withheld, 0] > 0.39).all()
    assert np.isfinite(found.bare.ripple.rms)
    assert found.bare.per_metre is None
    assert json.loads(found.to_json())["motion"]["near_singular"][0]["end_m"] == pytest.approx(0.09995, abs=1e-4)


def test_where_a_trajectory_steps_inertia_is_withheld_and_the_rest_given():
    points = np.array([[0.25, -0.05, 0.0], [0.25, 0.0, 0.0], [0.25, 0.03, 0.0], [0.25, 0.06, 0.0]])
    stepped = PlannedPath(points, time=np.array([0.0, 1.0, 1.001, 2.0]))
    found = feel(trial_of(path=stepped), members=8)
    assert "steps" in notes(found)
    inertia, cogging = found.bare.force.part("inertia"), found.bare.force.part("cogging")
    assert np.isnan(inertia).any(axis=1).sum() == pytest.approx(100, abs=10)
    assert np.isfinite(cogging).all()


def test_a_run_that_the_hand_led_must_have_a_log():
    with pytest.raises(InputError, match="no log"):
        feel(trial_of(hand=Hand(run="bare")), members=8)


def test_a_run_that_is_not_there_is_named_with_those_that_are():
    with pytest.raises(InputError, match="`bare`, `compensated`"):
        trial_of(hand=Hand(run="led"))


def test_weight_that_the_drives_do_not_carry_is_the_hand_s():
    trial = trial_of(hand=Hand(gravity_feedforward=False))
    arm = replace(
        trial.arm,
        chain=replace(trial.arm.chain, mass=np.array([0.0, 0.1]), center=np.array([[0.0, 0, 0], [0.2, 0, 0]])),
        gravity=np.array([0.0, -9.80665, 0.0]),
    )
    found = feel(replace(trial, arm=arm), members=8)
    gravity = found.bare.force.part("gravity")
    assert gravity[:, 1] == pytest.approx(0.1 * 9.80665)  # a weight at the tip itself
    assert np.abs(gravity[:, 0]).max() < 1e-9
    assert not found.bare.force.carries_weight


def test_a_redundant_arm_s_inner_motion_is_its_own_and_differs_between_states():
    trial = trial_of(lengths=(0.15, 0.15, 0.12), rest=(-0.5, 0.9, 0.8))
    found = feel(trial, members=8)
    bare, compensated = (state.force.motion for state in found.states)
    assert np.abs(bare.tip - compensated.tip).max() < 1e-6
    assert np.abs(bare.joint - compensated.joint).max() > 1e-3
    assert "redundant" in notes(found)


@pytest.fixture(scope="module")
def demo(tmp_path_factory):
    return read_trial(write_demo(tmp_path_factory.mktemp("feel") / "demo", trial="feel"))


def test_the_demo_says_what_another_engine_measured_on_the_hand(demo):
    from tests.plant.make_feel_demo import TRUTH

    truth, found = json.loads(TRUTH.read_text(encoding="utf-8")), feel(demo, members=60)
    assert found.motion.duration == pytest.approx(truth["duration_s"], abs=0.01)
    assert found.motion.length == pytest.approx(truth["length_m"], rel=0.02)
    # The arm that was led has cogging 5.5 % weaker than its files, and friction of its own.
    assert found.bare.ripple.rms == pytest.approx(truth["bare"]["cogging_rms_N"], rel=0.15)
    low, high = found.compensated.spread.interval
    assert low < truth["compensated"]["cogging_rms_N"] < high


def test_the_demo_s_motion_is_the_logged_one(demo):
    assert feel(demo, members=8).motion.source == "run led, lap 1"


def test_an_arm_whose_tip_moves_in_a_curved_surface_has_no_map_and_all_else():
    rng = np.random.default_rng(3)
    chain = chain_of(random_urdf(rng, 2, prismatic=0.0))
    drives = tuple(Drive(joint, **DRIVE) for joint in chain.joints)
    arm = Arm("two", chain, drives, Servo("joint_pd", 1e-3), np.zeros(3))
    path = PlannedPath(np.array([[0.3, 0.4], [0.9, 1.0]]), space="joint")
    trial = trial_of(path=path)
    found = feel(replace(trial, arm=arm), members=8, workspace=True)
    assert found.workspace is None
    assert "no maps of the workspace" in notes(found)
    assert found.bare.force.directions.count == 2
    assert found.to_document()["motion"]["without_figure"] is None
    assert found.bare.ripple.rms > 0.0


def test_steps_without_end_are_told_in_one_line():
    zigzag = np.column_stack([0.25 + 0.02 * (np.arange(60) % 2), 0.003 * np.arange(60) - 0.08, np.zeros(60)])
    found = feel(trial_of(path=PlannedPath(zigzag, time=0.1 * np.arange(60.0))), members=8)
    assert sum("steps" in warning for warning in found.warnings) == 1
    assert "smoothing" in notes(found)
