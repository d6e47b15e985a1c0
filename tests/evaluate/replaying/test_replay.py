"""What a replay does with each thing that it knows of an arm."""

from __future__ import annotations

import math
import os
import subprocess
import sys
from dataclasses import replace

import numpy as np
import pinocchio
import pytest

from armeval.errors import InputError
from armeval.evaluate.cogging.cog_loss import order_residual
from armeval.evaluate.replaying.ensemble import ensemble
from armeval.evaluate.replaying.replay import Replay, replay
from armeval.evaluate.replaying.step_error import step_error
from armeval.kernels.chain import tip_positions
from armeval.model.arm import Arm
from armeval.model.causes import Causes
from armeval.model.cogmap import CogMap
from armeval.model.drive import Drive
from armeval.model.servo import Servo
from armeval.model.spreads import Spreads
from armeval.model.trajectory import Trajectory
from armeval.model.trial import Compensation
from tests.one_slide import run, slide, targets
from tests.random_arms import chain_of, pinocchio_model, pinocchio_pose, random_urdf

ORDER = 84


def wave(amplitude: float, order: int = ORDER) -> CogMap:
    return CogMap(amplitude * np.sin(order * 2 * np.pi * np.arange(4096) / 4096 + 0.4))


def three_joints(**drive: object) -> tuple[Arm, Trajectory, str]:
    """A random arm of turning joints with all imperfections, on a smooth motion."""
    rng = np.random.default_rng(11)
    urdf = random_urdf(rng, 3, prismatic=0.0, continuous=1.0, fixed=0.0)
    chain = chain_of(urdf)
    t = 1e-3 * np.arange(1500)
    rate = np.array([1.0, 1.7, 2.3])
    phase = rate * t[:, None]
    q, v, a = 0.3 * (1.0 - np.cos(phase)), 0.3 * rate * np.sin(phase), 0.3 * rate**2 * np.cos(phase)
    tip = tip_positions(chain.arrays, q)
    arc = np.concatenate([[0.0], np.cumsum(np.linalg.norm(np.diff(tip, axis=0), axis=1))])
    trajectory = Trajectory(t, arc, tip, q, v, a, tip[::50], arc[::50], arc[[0, -50]])
    settings = {
        "stiffness": 3.0, "damping": 0.05, "torque_limit": 2.0, "torque_step": 2e-4, "dead_time_torque": 5e-4,
        "rotor_inertia": 1e-5, "coulomb_friction": 4e-3, "static_friction": 5e-3, "viscous_friction": 1e-3,
        "encoder_counts": 16384.0, "cog_map": wave(0.01),
    }  # fmt: skip
    drives = tuple(Drive(joint, **(settings | drive)) for joint in chain.joints)  # type: ignore[arg-type]
    servo = Servo("joint_pd", 1e-3, delay=1e-3, speed_cutoff=150.0)
    return Arm("random", chain, drives, servo, np.array([0.0, 0.0, -9.80665])), trajectory, urdf


def tracking_rms(arm: Arm, trajectory: Trajectory, moved: Replay) -> float:
    off = tip_positions(arm.chain.arrays, moved.angle) - trajectory.tip
    return float(np.sqrt(np.mean(np.sum(off**2, axis=1))))


@pytest.mark.parametrize("delay", [0.0, 0.3e-3, 1e-3, 2.75e-3])
@pytest.mark.parametrize("substeps", [1, 4])
def test_a_torque_acts_for_just_the_time_since_its_delay(delay: float, substeps: int) -> None:
    """A constant force, from the second period on: speed = force * time / mass, whatever part of a step it began in."""
    arm = slide(2.0, period=1e-3, stiffness=1e-9)
    arm = replace(arm, servo=replace(arm.servo, delay=delay))
    force = 1e-9 * 1e9
    position = np.full(20, 1e9)
    position[0] = 0.0
    moved = run(arm, targets(position, 1e-3), substeps=substeps)
    expected = np.maximum(moved.time - 1e-3 - delay, 0.0) * force / 2.0
    np.testing.assert_allclose(moved.speed[:, 0], expected, rtol=1e-12, atol=1e-18)


def test_the_servo_sees_whole_counts_and_commands_whole_steps_within_the_limit() -> None:
    arm = slide(1.0, period=1e-3, stiffness=1000.0, damping=0.0, encoder_counts=100.0, encoder_on="joint",
                coulomb_friction=50.0, torque_step=0.5, torque_limit=30.2)  # fmt: skip
    count = arm.drives[0].resolution
    for start in (0.3 * count, -0.4 * count):  # seen as 0
        assert (run(arm, targets(np.zeros(3), 1e-3), start=start).torque == 0.0).all()
    seen = run(arm, targets(np.zeros(3), 1e-3), start=0.6 * count).torque
    assert seen[0, 0] == pytest.approx(max(-1000.0 * count, -30.2), abs=0.25)
    moved = run(arm, targets(np.linspace(0.0, 0.05, 500), 1e-3))
    assert np.allclose(moved.torque % 0.5 % 0.5, 0.0, atol=1e-9) or (np.abs(moved.torque / 0.5 % 1) < 1e-9).all()
    assert np.abs(moved.torque).max() <= 30.2 + 0.25
    assert moved.saturated[-1, 0]


def test_dead_time_takes_torque_away_and_never_turns_it_round() -> None:
    for command, force in ((3.0, 2.0), (-3.0, -2.0), (0.6, 0.0), (-0.6, 0.0)):
        arm = slide(1.0, period=1e-3, stiffness=1e-9, dead_time_torque=1.0)
        moved = run(arm, targets(np.full(10, command * 1e9), 1e-3))
        assert moved.speed[-1, 0] == pytest.approx(force * moved.time[-1], abs=1e-12)


@pytest.mark.parametrize("gear", [1.0, -1.0, 5.0, -6.0])
def test_both_signs_of_a_gear_move_the_joint_the_same_way_but_for_its_cogging(gear: float) -> None:
    """Mirroring the motor mirrors its map: the joint cannot tell."""
    t = 1e-3 * np.arange(2000)
    position = 0.2 * np.sin(2.0 * t)

    def moved(sign: float) -> np.ndarray:
        angle = 2 * np.pi * np.arange(4096) / 4096
        cogging = CogMap(sign * 0.05 * np.sin(ORDER * sign * angle + 0.4))
        arm = slide(0.1, period=1e-3, stiffness=40.0, damping=0.4, gear_ratio=sign * gear, cog_map=cogging,
                    coulomb_friction=0.01, encoder_counts=65536.0, rotor_inertia=1e-4)  # fmt: skip
        return run(arm, targets(position, 1e-3, 0.4 * np.cos(2.0 * t)), start=position[0]).angle

    np.testing.assert_allclose(moved(1.0), moved(-1.0), rtol=0, atol=1e-9)


@pytest.mark.parametrize("offset", [0.1, 0.5])
@pytest.mark.parametrize("bins", [4096, 840])
def test_what_compensation_leaves_is_what_the_closed_form_leaves(bins: int, offset: float) -> None:
    """Dragged slowly by a stiff loop, the joint's error is the torque left over stiffness; index error and bins as in
    the closed form 2 sin(N d / 2) and the transform of the interpolating triangle."""
    # a servo fast enough that the joint moves next to nothing in a period
    period, speed = 1e-4, 0.2
    position = speed * period * np.arange(80_000)
    arm = slide(1e-3, period=period, stiffness=40.0, damping=0.2, cog_map=wave(0.02))

    def error(compensated: bool) -> float:
        moved = replay(
            arm, targets(position, period, np.full(len(position), speed)), compensated=compensated, settle=0.0,
            compensation=Compensation(table_bins=bins, index_error=math.radians(offset), map_noise=0.0),
        )  # fmt: skip
        return float(np.std(moved.angle[10_000:, 0] - position[10_000:]))

    expected = order_residual(ORDER, bins=bins, angle_error=math.radians(offset))
    assert error(True) / error(False) == pytest.approx(expected, rel=0.02)


def test_a_compensated_prediction_is_not_the_map_against_itself() -> None:
    arm, trajectory, _ = three_joints(
        coulomb_friction=0.0, static_friction=0.0, cog_map=replace(wave(0.01), noise=4e-4)
    )
    clean = replay(arm, trajectory, compensated=False, causes=Causes(cogging=0.0))
    noisy = replay(arm, trajectory, compensated=True, compensation=Compensation())
    assert np.abs(noisy.angle - clean.angle).max() > 1e-5
    other = replay(arm, trajectory, compensated=True, compensation=Compensation(), seed=1)
    again = replay(arm, trajectory, compensated=True, compensation=Compensation())
    assert np.abs(noisy.angle - other.angle).max() > 0.0
    assert np.array_equal(noisy.angle, again.angle)


def test_without_any_cause_the_arm_follows_its_targets() -> None:
    arm, trajectory, _ = three_joints()
    none = Causes(cogging=0.0, friction=0.0, servo_lag=False, encoder=False, torque_resolution=False, saturation=False)
    everything = tracking_rms(arm, trajectory, replay(arm, trajectory, compensated=False))
    nothing = tracking_rms(arm, trajectory, replay(arm, trajectory, compensated=False, causes=none, substeps=4))
    assert nothing < 0.02 * everything


@pytest.mark.parametrize("cause", ["cogging", "friction"])
def test_a_cause_can_be_taken_out_of_one_joint(cause: str) -> None:
    arm, trajectory, _ = three_joints()
    one = replay(arm, trajectory, compensated=False, causes=Causes(**{cause: (1.0, 0.0, 1.0)}))  # type: ignore[arg-type]
    drives = list(arm.drives)
    gone = {"cog_map": None} if cause == "cogging" else {"coulomb_friction": 0.0, "static_friction": 0.0}
    drives[1] = replace(drives[1], **gone)  # type: ignore[arg-type]
    without = replay(replace(arm, drives=tuple(drives)), trajectory, compensated=False)
    assert np.array_equal(one.angle, without.angle)


@pytest.mark.parametrize("kind", [0.0, 1.0, 0.4])
def test_without_drive_and_friction_energy_drifts_little_and_less_with_a_finer_step(kind: float) -> None:
    rng = np.random.default_rng(3)
    urdf = random_urdf(rng, 3, prismatic=kind, continuous=1.0, fixed=0.0).replace('lower="-0.3"', 'lower="-1e9"')
    urdf = urdf.replace('upper="0.3"', 'upper="1e9"')
    chain, model = chain_of(urdf), pinocchio_model(urdf)
    # slides fall freely: then energy is no bound on the swing, and gravity is left out
    gravity = np.array([0.0, 0.0, -9.81 if kind == 0.0 else 0.0])
    model.gravity.linear = gravity
    data = model.createData()
    drives = tuple(Drive(joint, stiffness=2.0 if kind else 0.0) for joint in chain.joints)
    arm = Arm("free", chain, drives, Servo("joint_pd", 1e-4, gravity_feedforward=False), gravity)
    start = rng.uniform(-0.2, 0.2, 3)
    k = 20_000
    q = np.tile(start if not kind else np.zeros(3), (k, 1))
    tip = tip_positions(chain.arrays, q)
    ends = np.array([0.0, 1.0])
    still = Trajectory(1e-4 * np.arange(k), np.linspace(0, 1, k), tip, q, 0 * q, 0 * q, np.eye(3)[:2], ends, ends)

    def energy(angle: np.ndarray, speed: np.ndarray) -> float:
        pose = pinocchio_pose(model, angle)
        mechanical = pinocchio.computeMechanicalEnergy(model, data, pose, speed)
        return float(mechanical + (np.sum(angle**2) if kind else 0.0))

    drifts = []
    for substeps in (1, 2, 4):
        moved = replay(arm, still, compensated=False, settle=0.0, start=start, substeps=substeps)
        values = [energy(a, v) for a, v in zip(moved.angle[::100], moved.speed[::100], strict=True)]
        scale = max(abs(v) for v in values) + np.ptp(values)
        drifts.append(np.abs(np.array(values) - values[0]).max() / scale)
    assert drifts[0] < 0.03
    if not kind:  # the loop's spring is held over the period, which substeps do not mend
        assert drifts[2] < 0.6 * drifts[0]


def test_an_unstable_loop_is_an_error_that_says_when() -> None:
    arm = slide(1e-3, period=1e-3, stiffness=1e5, damping=0.0)
    with pytest.raises(InputError, match=r"beyond all bounds at \d.*not stable"):
        run(arm, targets(np.zeros(20_000), 1e-3), start=1e-3)


def test_a_trajectory_of_another_arm_or_rate_is_refused() -> None:
    arm, trajectory, _ = three_joints()
    with pytest.raises(InputError, match="3 joints, the arm has 1"):
        replay(slide(1.0, period=1e-3), trajectory, compensated=False)
    with pytest.raises(InputError, match=r"not sampled at the servo.s period of 0\.002 s"):
        replay(replace(arm, servo=replace(arm.servo, period=2e-3)), trajectory, compensated=False)
    with pytest.raises(InputError, match="0 steps a servo period"):
        replay(arm, trajectory, compensated=False, substeps=0)


def test_a_step_that_is_too_coarse_is_told_and_a_fine_one_is_not() -> None:
    period, ends = 5e-3, {"compensated": False, "settle": 0.0}
    trajectory = targets(0.3 * period * np.arange(400), period)
    fast = slide(1e-3, period=period, stiffness=20.0, viscous_friction=0.3, cog_map=wave(0.5))
    judged = [
        step_error(fast, trajectory, replay(fast, trajectory, substeps=s, **ends), substeps=s, **ends)  # type: ignore[arg-type]
        for s in (1, 64)
    ]
    assert "--substeps 2" in judged[0].warning
    assert judged[1].warning == ""
    assert judged[1].rms < judged[0].rms


@pytest.mark.parametrize("joints", [1, 8, 9])
def test_any_number_of_joints_moves_alone_as_it_does_among_eight(joints: int) -> None:
    """Eight is also the number of lanes: the two must not be taken for each other."""
    rng = np.random.default_rng(joints)
    chain = chain_of(random_urdf(rng, joints, prismatic=0.3, continuous=0.3))
    t = 1e-3 * np.arange(300)
    phase = rng.uniform(1.0, 2.0, joints) * t[:, None]
    q, v = 0.1 * (1.0 - np.cos(phase)), 0.1 * np.gradient(1.0 - np.cos(phase), 1e-3, axis=0)
    tip = tip_positions(chain.arrays, q)
    ends = np.array([0.0, 1.0])
    trajectory = Trajectory(t, np.linspace(0, 1, 300), tip, q, v, 0 * q, tip[[0, -1]], ends, ends)
    drives = tuple(
        Drive(joint, stiffness=3.0, damping=0.05, coulomb_friction=3e-3, cog_map=wave(0.01)) for joint in chain.joints
    )
    arm = Arm("many", chain, drives, Servo("joint_pd", 1e-3), np.array([0.0, 0.0, -9.80665]))
    moved = replay(arm, trajectory, compensated=True, compensation=Compensation(map_noise=0.0), settle=0.0)
    spreads = Spreads(rotor_index=0.0, friction=0.0, torque_constant=0.0, start=0.0)
    found = ensemble(
        arm,
        trajectory,
        compensated=True,
        compensation=Compensation(map_noise=0.0),
        settle=0.0,
        spreads=spreads,
        members=2,
    )
    np.testing.assert_allclose(found.tracking, tracking_rms(arm, trajectory, moved), rtol=1e-7)


SCRIPT = """
import numpy as np
from tests.evaluate.replaying.test_replay import three_joints
from armeval.evaluate.replaying.ensemble import ensemble
from armeval.evaluate.replaying.replay import replay
from armeval.model.trial import Compensation
arm, trajectory, _ = three_joints()
import armeval.model.trajectory as t
rows = ("arc", "tip", "joint", "joint_speed", "joint_acceleration")
short = t.Trajectory(trajectory.time[:80], *(getattr(trajectory, name)[600:680] for name in rows), trajectory.path,
    trajectory.path_arc, trajectory.corners)
moved = replay(arm, short, compensated=True, compensation=Compensation(table_bins=256), settle=0.0)
np.save("{file}", np.hstack([moved.angle, moved.speed, moved.torque, moved.resting]))
"""


def test_compiled_and_uncompiled_kernels_give_the_same_motion(tmp_path) -> None:  # type: ignore[no-untyped-def]
    found = []
    for disabled in ("0", "1"):
        file = tmp_path / f"motion{disabled}.npy"
        script = SCRIPT.format(file=file)
        environment = os.environ | {"NUMBA_DISABLE_JIT": disabled}
        done = subprocess.run(
            [sys.executable, "-c", script], env=environment, capture_output=True, text=True, check=False
        )
        assert done.returncode == 0, done.stderr
        found.append(np.load(file))
    np.testing.assert_allclose(found[0], found[1], rtol=1e-9, atol=1e-12)
    assert np.ptp(found[0], axis=0)[:3].min() > 0.0
