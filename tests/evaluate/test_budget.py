"""The error budget against closed forms, and against what must hold for every budget."""

import json
import math
from dataclasses import replace

import numpy as np
import pytest

from armeval.errors import InputError
from armeval.evaluate.budget import budget
from armeval.evaluate.cogging.modelled_arm import modelled
from armeval.evaluate.measuring.tracks import tips
from armeval.evaluate.plan import plan_trial
from armeval.evaluate.replaying.cause_replays import CauseReplays
from armeval.evaluate.replaying.owen_value import coalitions
from armeval.evaluate.replaying.replay import replay
from armeval.model.arm import Arm
from armeval.model.causes import Causes
from armeval.model.planned_path import PlannedPath
from armeval.model.servo import Servo
from armeval.model.trial import Compensation, Run, Trial
from tests.planar_arms import harmonic_map, planar_arm
from tests.slides import slides

BARE = (Run("bare", compensated=False),)
BOTH = (*BARE, Run("smoothed", compensated=True))


def turning(arm, seconds, *angles, runs=BARE, **more):
    """A trial in which all joints turn through the given angles [rad] at even speed."""
    points = np.repeat(np.array(angles)[:, None], len(arm.joints), axis=1)
    path = PlannedPath(points, space="joint", time=np.linspace(0.0, seconds, len(angles)))
    return Trial("turning", arm, path, runs, **more)


def cogging_arm(**more):
    """Two joints with everything that can move the tip."""
    servo = Servo("joint_pd", 1e-3, delay=1e-3, speed_cutoff=80.0)
    settings = {
        "stiffness": 3.0,
        "damping": 0.05,
        "rotor_inertia": 3e-4,
        "coulomb_friction": 4e-3,
        "static_friction": 5e-3,
        "viscous_friction": 1e-3,
        "encoder_counts": 8192.0,
        "torque_step": 5e-4,
        "torque_limit": 0.024,
        "cog_map": replace(harmonic_map(84, 0.02), noise=2e-4),
    }
    return planar_arm((0.2, 0.15), (0.2, 0.9), servo=servo, **{**settings, **more})


CASE = turning(cogging_arm(), 1.5, 0.3, 0.6, 0.4, runs=BOTH, compensation=Compensation(128, index_error=0.002))


@pytest.fixture(scope="module")
def found():
    return budget(CASE)


def test_the_parts_add_up_to_the_whole(found):
    for state in found.budgets:
        for error in ("tracking", "deviation"):
            whole = getattr(state.whole, error)
            parts = sum(getattr(cause.part, error) for cause in state.causes)
            assert parts + getattr(state.left, error) == pytest.approx(whole, rel=1e-12)
            for cause in state.causes[:2]:
                by_joint = sum(getattr(part, error) for _, part in cause.joints)
                assert by_joint == pytest.approx(getattr(cause.part, error), rel=1e-12, abs=1e-12 * whole)


@pytest.mark.parametrize("run", BOTH, ids=lambda run: run.name)
def test_the_whole_is_the_error_of_a_single_replay_and_what_is_left_that_without_causes(found, run):
    plan, arm = plan_trial(CASE), modelled(CASE.arm)
    nothing = Causes(0.0, 0.0, servo_lag=False, encoder=False, torque_resolution=False, saturation=False)

    def mean_square(**more):
        lap = replay(arm, plan, compensated=run.compensated, compensation=CASE.compensation, **more)
        return np.mean(np.sum((tips(arm, lap.angle) - plan.tip) ** 2, axis=1))

    state = found.run(run.name)
    # A lane of eight and a replay alone round differently here and there.
    assert state.whole.tracking == pytest.approx(mean_square(), rel=1e-6)
    if not run.compensated:
        assert state.left.tracking == pytest.approx(mean_square(causes=nothing), rel=1e-6)


def test_without_cogging_there_is_nothing_to_compensate(found):
    bare, smoothed = found.budgets
    assert smoothed.left == bare.left
    assert smoothed.causes[0].without == bare.causes[0].without
    assert smoothed.causes[0].part.tracking < bare.causes[0].part.tracking


def test_replays_spared_because_no_torque_was_cut_are_those_that_would_have_been_the_same(found):
    # A limit that is reached in some sets of causes and not in others, and one that is never reached.
    plan = plan_trial(CASE)
    replays = CauseReplays(modelled(CASE.arm), plan, compensated=False, compensation=CASE.compensation)
    sizes = [group.size for group in replays.acting]
    sets = [c for c in coalitions(sizes) if not c[-1]]
    unlimited = CauseReplays(
        replace(replays.arm, drives=tuple(replace(d, torque_limit=math.inf) for d in replays.arm.drives)),
        plan,
        compensated=False,
        compensation=CASE.compensation,
    )
    worth, free = replays.worths(sets), unlimited.worths([c[:-1] for c in sets])
    assert all(np.array_equal(worth[c], free[c[:-1]]) for c in sets)
    assert found.run("bare").causes[-1].part.tracking != 0.0


def test_a_cause_that_does_nothing_has_exactly_nothing():
    far = turning(cogging_arm(torque_limit=50.0, encoder_counts=0.0), 0.5, 0.3, 0.45)
    causes = {cause.cause: cause for cause in budget(far).budgets[0].causes}
    assert causes["saturation"].acts
    assert not causes["encoder"].acts
    for name in ("saturation", "encoder"):
        assert (causes[name].part.tracking, causes[name].part.deviation) == (0.0, 0.0)


def test_two_like_joints_have_like_shares():
    # Two crossed slides that carry one mass, moved along the diagonal.
    arm = slides()
    chain = replace(arm.chain, mass=np.array([0.0, 0.0, 1.0]))
    drive = {
        "stiffness": 2000.0,
        "damping": 60.0,
        "gear_ratio": 100.0,
        "coulomb_friction": 0.5,
        "static_friction": 0.6,
        "encoder_counts": 4096.0,
        "cog_map": harmonic_map(12, 0.05),
    }
    drives = tuple(replace(given, slides=True, **drive) for given in arm.drives)
    arm = Arm("crossed slides", chain, drives, arm.servo, np.zeros(3))
    path = PlannedPath(np.array([[0.0, 0.0, 0.0], [0.06, 0.06, 0.0]]), time=np.array([0.0, 1.0]))
    causes = budget(Trial("diagonal", arm, path, BARE)).budgets[0].causes
    for cause in causes[:2]:
        parts = dict(cause.joints)
        assert parts["east"].tracking > 0.0
        assert parts["north"].tracking == pytest.approx(parts["east"].tracking, rel=1e-9)


def test_friction_alone_has_the_square_of_the_dead_band():
    # Common practice, no source: a dragged joint trails by friction over stiffness, here 1 mrad, 0.3 mm at 0.3 m. It
    # does so from when the target has gone that far.
    K, friction, lever, seconds, way = 20.0, 0.02, 0.3, 4.0, 0.02
    arm = planar_arm((lever,), (0.0,), stiffness=K, damping=0.1, coulomb_friction=friction, rotor_inertia=1e-3)
    state = budget(turning(arm, seconds, 0.0, way)).budgets[0]
    band = friction / K
    expected = (lever * band) ** 2 * (1.0 - 2.0 / 3.0 * band / way)
    parts = {cause.cause: cause.part.tracking for cause in state.causes}
    assert parts["friction"] == pytest.approx(expected, rel=0.02)
    assert state.causes[1].joints[0][1].tracking == parts["friction"]
    assert parts["cogging"] == parts["encoder"] == parts["torque resolution"] == parts["saturation"] == 0.0
    assert abs(parts["servo lag"]) < 0.02 * expected


def test_a_weight_that_is_not_fed_forward_is_lag_and_sags_by_weight_over_stiffness():
    # 0.2 kg at half of 0.3 m turn a joint of 3 N m/rad held level; without lag only the sudden start is left.
    K, weight = 3.0, 0.2 * 9.80665 * 0.15
    servo = Servo("joint_pd", 1e-3, gravity_feedforward=False)
    arm = planar_arm((0.3,), (0.0,), servo=servo, stiffness=K, damping=0.1, rotor_inertia=1e-3)
    chain = replace(arm.chain, mass=np.array([0.2]), center=np.array([[0.15, 0.0, 0.0]]))
    arm = replace(arm, chain=chain, gravity=np.array([0.0, -9.80665, 0.0]))
    state = budget(turning(arm, 1.0, 0.0, 0.02)).budgets[0]
    lag = next(cause for cause in state.causes if cause.cause == "servo lag")
    assert state.tracking_rms == pytest.approx(2.0 * 0.3 * math.sin(0.5 * weight / K), rel=0.02)
    assert lag.part.tracking == pytest.approx(state.whole.tracking, rel=1e-4)
    assert state.left.tracking < 1e-5 * state.whole.tracking


def test_an_encoder_alone_leaves_the_joint_at_the_edge_of_a_count():
    # Worked out by hand. A heavily damped joint without friction stands at the edge of the count c in which its target
    # lies, for there its servo pushes it back from either side: error c + r/2 - target. When the target, at speed v,
    # has passed the middle of the count, the servo pushes with K v t against the damping b, and the joint is at the
    # next edge after the time sqrt(2 b r / K v). Without that time the mean square would be r^2 / 12.
    counts, lever, K, b, seconds, passed = 1000.0, 0.3, 1.0, 0.1, 160.0, 6
    r = 2.0 * math.pi / counts
    v = passed * r / seconds
    arm = planar_arm((lever,), (0.0,), stiffness=K, viscous_friction=b, rotor_inertia=1e-6, encoder_counts=counts)
    state = budget(turning(arm, seconds, 0.0, passed * r)).budgets[0]
    t = np.linspace(0.0, r / v, 10_001)
    error = np.minimum(0.5 * K * v / b * t**2 - 0.5 * r, 0.5 * r) - v * t
    parts = {cause.cause: cause.part.tracking for cause in state.causes}
    assert parts["encoder"] == pytest.approx(lever**2 * np.mean(error**2), rel=0.03)
    assert parts["friction"] == 0.0
    assert abs(parts["servo lag"]) < 0.02 * parts["encoder"]


def test_the_numbers_do_not_depend_on_the_threads(found):
    assert budget(CASE, threads=1) == budget(CASE, threads=3) == found


def test_runs_in_the_same_state_share_one_budget():
    trial = replace(CASE, runs=(*BOTH, Run("bare again", compensated=False)))
    assert [state.runs for state in budget(trial).budgets] == [("bare", "bare again"), ("smoothed",)]


def test_an_unstable_loop_is_told_with_what_was_out():
    shaking = turning(cogging_arm(stiffness=900.0, torque_limit=math.inf), 0.5, 0.3, 0.4)
    with pytest.raises(InputError, match="grows beyond all bounds"):
        budget(shaking)


def test_an_unknown_run_names_the_known_ones(found):
    with pytest.raises(InputError, match="no run `other`") as error:
        found.run("other")
    assert "`bare`, `smoothed`" in error.value.findings[0].mend


def test_document_and_table_tell_the_same(found):
    told = json.loads(found.to_json())
    assert told["schema"] == "armeval/budget/1"
    table = found.to_frame()
    for entry, state in zip(told["budgets"], found.budgets, strict=True):
        assert entry["tracking_rms_m"] ** 2 == pytest.approx(state.whole.tracking)
        shares = [cause["tracking_share"] for cause in entry["causes"]] + [entry["left"]["tracking_share"]]
        assert sum(shares) == pytest.approx(1.0)
        rows = table[(table["runs"] == state.label) & (table["joint"] == "")]
        assert rows["tracking_share"].tolist() == pytest.approx(shares)


def test_progress_comes_to_its_end():
    told = []
    budget(turning(cogging_arm(), 0.2, 0.3, 0.35), progress=lambda *step: told.append(step))
    assert told
    for what in {step[0] for step in told}:
        assert [done for name, done, _ in told if name == what][-1] == next(
            total for name, _, total in told if name == what
        )
