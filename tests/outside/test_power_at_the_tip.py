"""What a hand puts in comes out: power for arms that pinocchio knows, work for motions that end where they began."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pinocchio
import pytest

from armeval.evaluate.feeling.hand_force import PARTS, hand_force
from armeval.evaluate.feeling.hand_motion import planned_motion
from armeval.evaluate.feeling.inner_motion import with_inner_motion
from armeval.evaluate.feeling.tip_directions import tip_directions
from armeval.evaluate.plan import plan
from armeval.model.arm import Arm
from armeval.model.drive import Drive
from armeval.model.planned_path import PlannedPath
from armeval.model.servo import Servo
from armeval.model.trial import Compensation
from tests.planar_arms import harmonic_map, planar_arm
from tests.random_arms import TIP, chain_of, pinocchio_model, pinocchio_pose, random_pose, random_urdf

ROTOR = 2e-4


@pytest.mark.parametrize("joints", [2, 3, 4, 5, 6, 7])
@pytest.mark.parametrize("seed", range(5))
def test_the_hand_s_force_moves_the_tip_as_the_hand_wants_and_its_power_is_the_joints_power(joints, seed):
    rng = np.random.default_rng([joints, seed])
    urdf = random_urdf(rng, joints)
    chain, model = chain_of(urdf), pinocchio_model(urdf)
    drives = tuple(
        Drive(name, rotor_inertia=ROTOR, slides=bool(s)) for name, s in zip(chain.joints, chain.prismatic, strict=True)
    )
    arm = Arm("random", chain, drives, Servo("joint_pd", 1e-3), np.array([0.0, 0.0, -9.80665]))
    poses = np.array([random_pose(rng, chain) for _ in range(20)])
    q, v = poses[np.argmax(tip_directions(arm, poses).lever)], rng.normal(size=joints)
    wanted, torque = rng.normal(size=joints), rng.normal(size=joints)

    data = model.createData()
    pose = pinocchio_pose(model, q)
    M = pinocchio.crba(model, data, pose)
    M = np.triu(M) + np.triu(M, 1).T + ROTOR * np.eye(joints)
    h = pinocchio.nonLinearEffects(model, data, pose, v)
    frame = model.getFrameId(TIP)
    J = pinocchio.computeFrameJacobian(model, data, pose, frame, pinocchio.LOCAL_WORLD_ALIGNED)[:3]

    at = tip_directions(arm, q[None])
    assert not at.singular[0]
    asked = M @ wanted + h + torque
    force = at.torque_to_force[0] @ asked
    moved = np.linalg.solve(M, J.T @ force - h - torque)
    assert pytest.approx(J @ wanted, rel=1e-8, abs=1e-8) == J @ moved
    assert force @ (J @ v) == pytest.approx(v @ (M @ moved + h + torque), rel=1e-8, abs=1e-10)
    if joints == 2:
        assert abs(force @ np.cross(J[:, 0], J[:, 1])) < 1e-9 * np.linalg.norm(force)


def loop(radius: float = 0.04) -> PlannedPath:
    turn = np.linspace(0.0, 2.0 * np.pi, 361)
    return PlannedPath(np.column_stack([0.25 + radius * np.cos(turn), radius * np.sin(turn), 0.0 * turn]))


def arm_of(lengths, rest, **drive):
    settings = {"rotor_inertia": 1e-3, "cog_map": harmonic_map(30, 0.02), **drive}
    return planar_arm(lengths, rest, **settings)


def works(force):
    """Work of the hand by part [J], over the whole motion."""
    way = np.gradient(force.motion.tip, axis=0)
    return {part: float(np.einsum("kr,kr->", force.part(part), way)) for part in PARTS}


def test_round_a_loop_cogging_inertia_and_weight_give_back_what_they_took():
    arm = replace(arm_of((0.2, 0.2), (0.4, 1.2)), gravity=np.array([0.0, -9.80665, 0.0]))
    motion = planned_motion(arm, plan(arm, loop(), feed=0.06, acceleration=0.5), bandwidth=10.0)
    work = works(hand_force(arm, motion, carries_weight=False))
    size = 0.02 / 0.2 * motion.length
    assert abs(work["cogging"]) < 1e-3 * size
    assert abs(work["gravity"]) < 1e-3 * size
    assert abs(work["inertia"]) < 1e-2 * size


def test_friction_takes_its_torque_times_the_joints_way():
    arm = arm_of((0.2, 0.2), (0.4, 1.2), coulomb_friction=0.01)
    motion = planned_motion(arm, plan(arm, loop(), feed=0.06, acceleration=0.5), bandwidth=10.0)
    work = works(hand_force(arm, motion))
    assert work["friction"] == pytest.approx(0.01 * np.abs(np.diff(motion.joint, axis=0)).sum(), rel=2e-3)


def test_a_redundant_arm_takes_in_just_what_friction_and_its_own_potential_and_motion_keep():
    arm = arm_of((0.15, 0.15, 0.12), (0.6, 0.9, 0.5), coulomb_friction=0.004, viscous_friction=1e-3)
    given = planned_motion(arm, plan(arm, loop(), feed=0.06, acceleration=0.5), bandwidth=10.0)
    motion = with_inner_motion(arm, given, compensated=False, compensation=Compensation(), carries_weight=True)
    assert np.abs(motion.tip - given.tip).max() < 1e-7
    force = hand_force(arm, motion)
    put_in = sum(works(force).values())
    q, v = motion.joint, motion.joint_speed
    rubbed = np.einsum("ki,ki->", motion.dry_friction + 1e-3 * v, v) * motion.period
    potential = (-0.02 / 30.0 * np.cos(30.0 * q)).sum(axis=1)
    M = tip_directions(arm, q).inertia
    moving = 0.5 * np.einsum("ki,kij,kj->k", v, M, v)
    kept = potential[-1] - potential[0] + moving[-1] - moving[0]
    assert np.abs(motion.dry_friction).max() == pytest.approx(0.004, rel=1e-5)
    assert put_in == pytest.approx(rubbed + kept, rel=0.01)
