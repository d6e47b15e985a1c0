# ruff: noqa: T201  (the figures are the point)
"""What a step of a replay costs, against what a user would write: a Python loop over a physics engine.

All on the same arms and targets in one process. Times are the best of some runs; the ratios are what counts.
Run with ``pytest tests/benchmarks/test_replay_speed.py --benchmark-only -s``.
"""

from __future__ import annotations

import time
from collections.abc import Callable
from concurrent.futures import ThreadPoolExecutor
from typing import Any

import mujoco
import numpy as np
import pinocchio
import pytest

from armeval.evaluate.replaying.members import clean_tables, drawn_member
from armeval.evaluate.replaying.replay_input import ReplayInput, replay_input, with_members
from armeval.kernels.chain import tip_positions
from armeval.kernels.lanes import WIDTH
from armeval.kernels.replay import replay_lap
from armeval.model.arm import Arm
from armeval.model.causes import Causes
from armeval.model.cogmap import CogMap
from armeval.model.drive import Drive
from armeval.model.servo import Servo
from armeval.model.spreads import Spreads
from armeval.model.trajectory import Trajectory
from armeval.model.trial import Compensation
from tests.plant.mujoco_plant import Plant, PlantDrive, PlantServo
from tests.random_arms import TIP, chain_of, pinocchio_model, random_urdf

PERIOD = 1e-3
STIFFNESS, DAMPING = 3.0, 0.04


def cogging(angle: np.ndarray) -> np.ndarray:
    return 0.012 * np.sin(84 * angle) + 0.003 * np.sin(12 * angle)


COMPENSATION = Compensation(map_noise=2e-4, index_error=2e-3)


def case(joints: int, periods: int) -> tuple[Arm, Trajectory, str]:
    rng = np.random.default_rng(joints)
    urdf = random_urdf(rng, joints, prismatic=0.0, continuous=1.0, fixed=0.0)
    chain = chain_of(urdf)
    t = PERIOD * np.arange(periods)
    rate, phase = rng.uniform(0.5, 1.5, joints), rng.uniform(0, 6.28, joints)
    q, v = 0.4 * np.sin(rate * t[:, None] + phase), 0.4 * rate * np.cos(rate * t[:, None] + phase)
    tip = tip_positions(chain.arrays, q)
    ends = np.array([0.0, 1.0])
    trajectory = Trajectory(t, np.linspace(0, 1, periods), tip, q, v, np.zeros_like(q), tip[[0, -1]], ends, ends)
    drives = tuple(
        Drive(
            joint, stiffness=STIFFNESS, damping=DAMPING, torque_limit=5.0, torque_step=2e-4, rotor_inertia=1e-5,
            coulomb_friction=3e-3, static_friction=4e-3, viscous_friction=1e-3, encoder_counts=16384,
            cog_map=CogMap(cogging(2 * np.pi * np.arange(4096) / 4096)),
        )
        for joint in chain.joints
    )  # fmt: skip
    servo = Servo("joint_pd", PERIOD, delay=PERIOD, speed_cutoff=150.0)
    return Arm("random", chain, drives, servo, np.array([0.0, 0.0, -9.80665])), trajectory, urdf


def prepared(joints: int, periods: int, lanes: int) -> ReplayInput:
    arm, trajectory, _ = case(joints, periods)
    tables, start = clean_tables(arm, COMPENSATION), trajectory.joint[0]
    members = [
        drawn_member(arm, COMPENSATION, Spreads(), start, tables, np.random.default_rng([1, m])) for m in range(lanes)
    ]
    given = replay_input(
        arm,
        trajectory,
        members[:1],
        compensated=True,
        compensation=COMPENSATION,
        causes=Causes(),
        substeps=1,
        settle=0.0,
    )
    return with_members(given, arm, members, Causes())


def best(run: Callable[[], object], rounds: int = 5, clock: Callable[[], float] = time.thread_time) -> float:
    """Shortest time [s] of some runs after a first one, which compiles: processor time, or by another clock."""
    run()
    times = []
    for _ in range(rounds):
        begin = clock()
        run()
        times.append(clock() - begin)
    return min(times)


def fresh(given: ReplayInput) -> Callable[[], int]:
    """A replay from the same start each time."""
    start = given.joints.copy()

    def run() -> int:
        given.joints[:] = start
        return replay_lap(*given)

    return run


def replay_step(joints: int, periods: int = 20_000) -> float:
    return best(fresh(prepared(joints, periods, 1))) / periods


def plant_step(joints: int, periods: int = 1000) -> float:
    """The same case in Python over MuJoCo: firmware with encoder counts, filter, delay, table; cogging and friction."""
    _, trajectory, urdf = case(joints, periods)
    table = cogging(2 * np.pi * np.arange(1024) / 1024)
    drive = PlantDrive(
        harmonics=((84, 0.012, 0.0), (12, 0.003, 0.0)), rotor_inertia=1e-5, coulomb_friction=3e-3, static_friction=4e-3,
        viscous_friction=1e-3, stiffness=STIFFNESS, damping=DAMPING, torque_limit=5.0, torque_step=2e-4,
        encoder_counts=16384, table=table,
    )  # fmt: skip
    servo = PlantServo(period=PERIOD, delay=PERIOD, speed_cutoff=150.0)
    plant = Plant(urdf, TIP, [drive] * joints, servo, step_rate=1.0 / PERIOD)
    return best(lambda: plant.run(trajectory.joint, trajectory.joint_speed, compensated=True, settle=0.0), 3) / periods


def mujoco_step(joints: int, periods: int = 2000) -> tuple[float, float]:
    """A Python loop over MuJoCo with nothing but a position loop and cogging in Python, and bare mj_step."""
    _, trajectory, urdf = case(joints, periods)
    model = mujoco.MjModel.from_xml_string(urdf)
    model.opt.timestep = PERIOD
    model.dof_armature[:], model.dof_damping[:], model.dof_frictionloss[:] = 1e-5, 1e-3, 3e-3
    data = mujoco.MjData(model)

    def loop() -> None:
        mujoco.mj_resetData(model, data)
        data.qpos[:] = trajectory.joint[0]
        for q, v in zip(trajectory.joint, trajectory.joint_speed, strict=True):
            torque = STIFFNESS * (q - data.qpos) + DAMPING * (v - data.qvel) + data.qfrc_bias
            data.qfrc_applied[:] = torque + cogging(data.qpos)
            mujoco.mj_step(model, data)

    def bare() -> None:
        for _ in range(periods):
            mujoco.mj_step(model, data)

    return best(loop, 3) / periods, best(bare, 3) / periods


def pinocchio_step(joints: int, periods: int = 2000) -> float:
    """A Python loop over pinocchio's articulated-body algorithm, friction smoothed, cogging added in Python."""
    _, trajectory, urdf = case(joints, periods)
    model = pinocchio_model(urdf.replace('type="continuous"', 'type="revolute"').replace(
        "</axis>", "").replace('<axis', '<limit lower="-9" upper="9" effort="1" velocity="1"/><axis'))  # fmt: skip
    model.armature = np.full(joints, 1e-5)
    data = model.createData()

    def loop() -> None:
        angle, speed = trajectory.joint[0].copy(), trajectory.joint_speed[0].copy()
        for q, v in zip(trajectory.joint, trajectory.joint_speed, strict=True):
            torque = (
                STIFFNESS * (q - angle)
                + DAMPING * (v - speed)
                + pinocchio.computeGeneralizedGravity(model, data, angle)
            )
            torque += cogging(angle) - 3e-3 * np.tanh(speed / 1e-2) - 1e-3 * speed
            speed += PERIOD * pinocchio.aba(model, data, angle, speed, torque)
            angle += PERIOD * speed

    return best(loop, 3) / periods


def ensemble_step(joints: int, threads: int, periods: int = 5000, blocks: int = 8) -> float:
    """Time a member and step, by the clock on the wall, of blocks of eight members spread over threads."""
    runs = [fresh(prepared(joints, periods, WIDTH)) for _ in range(blocks)]
    with ThreadPoolExecutor(threads) as pool:
        everything = best(lambda: list(pool.map(lambda run: run(), runs)), clock=time.perf_counter)
    return everything / (periods * WIDTH * blocks)


@pytest.mark.benchmark
def test_a_replayed_step_against_a_python_loop_over_an_engine(benchmark: Any) -> None:
    run = fresh(prepared(3, 20_000, 1))
    run()
    benchmark(run)
    ours, same, (loop, bare), other = replay_step(3), plant_step(3), mujoco_step(3), pinocchio_step(3)
    print(f"\n3 joints, one core: replay {ours * 1e6:.3f} us a step")
    print(f"  the same case in Python over MuJoCo           {same * 1e6:7.2f} us: {same / ours:6.1f} times")
    print(f"  position loop and cogging only, over MuJoCo   {loop * 1e6:7.2f} us: {loop / ours:6.1f} times")
    print(f"  position loop and cogging, over pinocchio ABA {other * 1e6:7.2f} us: {other / ours:6.1f} times")
    print(f"  bare mj_step                                  {bare * 1e6:7.2f} us: {bare / ours:6.1f} times")
    one, two = ensemble_step(3, 1), ensemble_step(3, 2)
    print(f"  ensemble, one core: {one * 1e6:.4f} us a member and step, the same case in Python {same / one:.0f} times")
    print(f"  ensemble, two cores: {two * 1e6:.4f} us, {100 * one / two / 2:.0f} % efficiency")


@pytest.mark.benchmark
def test_growth_with_the_number_of_joints(benchmark: Any) -> None:
    counts = (2, 3, 4, 7)
    single = {n: replay_step(n) for n in counts}
    lanes = {n: ensemble_step(n, 1) for n in counts}
    benchmark(fresh(prepared(7, 5000, 1)))
    print("\njoints  replay [us a step]  over 3 joints  ensemble [us a member and step]  over 3 joints")
    for n in counts:
        one, many = single[n], lanes[n]
        print(f"{n:6d} {one * 1e6:19.3f} {one / single[3]:14.2f} {many * 1e6:32.4f} {many / lanes[3]:14.2f}")
