"""Random arms that stick, moved by the MuJoCo plant: what a logger saw, what truly happened, what the arm's files say.

The links are those of an invented arm; motors, friction, servo, encoders and path are drawn at random from a seed. The
arm that the package is given differs from the plant as a user's would: friction within a quarter, cogging within five
percent.
"""

from __future__ import annotations

import math
from dataclasses import dataclass, replace
from functools import cache

import numpy as np
import numpy.typing as npt

import armeval
from armeval.evaluate.lap_track import LapTrack
from armeval.model.arm import Arm
from armeval.model.cogmap import CogMap
from armeval.model.drive import Drive
from armeval.model.trajectory import Trajectory
from tests.plant import shipped
from tests.plant.mujoco_plant import Plant, PlantDrive, PlantLap, PlantServo
from tests.plant.planner import Plan, plan
from tests.plant.truth import TrueRest, rests

FloatArray = npt.NDArray[np.float64]

PERIOD = 1e-3
LENGTH = 0.4  # m of path


@dataclass(frozen=True, eq=False)
class StickingLap:
    """One lap of a random arm.

    Attributes
    ----------
    seed
        Of the arm and its motion.
    arm
        What the package is told of the arm.
    drives
        What the joints truly are.
    target, target_speed, arc
        Shape (k, n) [rad], [rad/s], and (k,) [m] along the path.
    lap
        What the plant recorded.
    planned
        The plan that it followed.
    """

    seed: int
    arm: Arm
    drives: tuple[PlantDrive, ...]
    target: FloatArray
    target_speed: FloatArray
    arc: FloatArray
    lap: PlantLap
    planned: Plan

    @property
    def angle(self) -> FloatArray:
        """Encoder angles (k, n) [rad]."""
        return self.lap.counts * self.arm.resolution

    @property
    def true_rests(self) -> list[TrueRest]:
        return rests(self.lap.true_angle, self.lap.true_speed, self.target_speed, PERIOD)

    def counts_moved(self, rest: TrueRest) -> float:
        """How many counts the target moved during a rest."""
        moved = abs(self.target[rest.last, rest.joint] - self.target[rest.first, rest.joint])
        return float(moved / self.arm.resolution[rest.joint])

    def truly_slow(self, joint: int, first: int, last: int) -> bool:
        """Whether the joint's true speed stayed below a tenth of its target's for 15 ms within some samples."""
        rows = slice(first, last + 1)
        slow = np.abs(self.lap.true_speed[rows, joint]) < 0.1 * np.abs(self.target_speed[rows, joint])
        edges = np.diff(np.concatenate([[0], slow.astype(int), [0]]))
        lengths = np.flatnonzero(edges == -1) - np.flatnonzero(edges == 1)
        return len(lengths) > 0 and bool(lengths.max() * PERIOD >= 0.015 - 1e-9)

    def tips(self, row: int, angle: float, joint: int) -> FloatArray:
        """Where the tip is [m] with one joint at an angle [rad] and the others as they truly were."""
        from armeval.kernels.chain import tip_positions

        pose = self.lap.true_angle[row : row + 1].copy()
        pose[0, joint] = angle
        return tip_positions(self.arm.chain.arrays, pose)[0]

    @property
    def true_arm(self) -> Arm:
        """The arm as it truly is, for a replay with the plant's own parameters."""
        angle = 2.0 * math.pi * np.arange(4096) / 4096
        drives = tuple(
            replace(
                given,
                cog_map=CogMap(sum(a * np.sin(n * angle + phase) for n, a, phase in true.harmonics)),
                coulomb_friction=true.coulomb_friction,
                static_friction=true.static_friction,
            )
            for given, true in zip(self.arm.drives, self.drives, strict=True)
        )
        return replace(self.arm, drives=drives)

    @property
    def trajectory(self) -> Trajectory:
        """The plan as the package takes it."""
        steps = np.concatenate([[True], np.diff(self.planned.arc) > 0.0])
        return Trajectory(
            time=self.planned.time - self.planned.time[0],
            arc=self.planned.arc,
            tip=self.planned.tip,
            joint=self.planned.angle,
            joint_speed=self.planned.speed,
            joint_acceleration=self.planned.acceleration,
            path=self.planned.tip[steps],
            path_arc=self.planned.arc[steps],
            corners=np.array([0.0, self.planned.arc[-1]]),
        )

    def track(self, every: int = 1, lap: int = 1) -> LapTrack:
        """The lap as the package measures it, logged every so many servo periods."""
        from armeval.kernels.chain import tip_positions

        rows = slice(None, None, every)
        angle, target = np.ascontiguousarray(self.angle[rows]), np.ascontiguousarray(self.target[rows])
        chain = self.arm.chain.arrays
        tip, target_tip = tip_positions(chain, angle), tip_positions(chain, target)
        along = np.gradient(target_tip, axis=0)
        along /= np.maximum(np.linalg.norm(along, axis=1), 1e-12)[:, None]
        return LapTrack(
            run="bare",
            compensated=False,
            source="log",
            lap=lap,
            file=None,
            time=self.lap.time[rows],
            arc=self.arc[rows],
            angle=angle,
            target=target,
            tip=tip,
            target_tip=target_tip,
            deviation=np.linalg.norm(tip - target_tip, axis=1),
            lag=np.einsum("kc,kc->k", target_tip - tip, along),
            resolution=self.arm.resolution,
        )


def sticking_lap(seed: int, counts: int, *, jitter: float = 0.0, smooth: int | None = None) -> StickingLap:
    """Draw an arm and a motion and let the plant move it; the joint ``smooth`` has no true cogging torque."""
    rng = np.random.default_rng(seed)
    shape = armeval.read_arm(shipped.FOLDER / "tern" / "arm.toml")
    given, true = [], []
    for j, drive in enumerate(shape.drives):
        one, other = _drive(drive, rng, counts, jitter, 0.0 if j == smooth else 1.0)
        given.append(one)
        true.append(other)
    cutoff, delay = rng.uniform(80.0, 200.0), float(rng.choice([0.0, PERIOD]))
    servo = replace(shape.servo, period=PERIOD, delay=delay, speed_cutoff=cutoff)
    arm = Arm(shape.name, shape.chain, tuple(given), servo, shape.gravity)
    firmware = PlantServo(
        period=PERIOD, delay=delay, speed_cutoff=cutoff, inertia_feedforward=servo.inertia_feedforward
    )
    plant = Plant(shipped.urdf_text("tern"), "stylus_tip", true, firmware)
    planned = _planned(seed, tuple(arm.rest))
    (lap,) = plant.run(planned.angle, planned.speed, planned.acceleration, seed=seed)
    return StickingLap(seed, arm, tuple(true), planned.angle, planned.speed, planned.arc, lap, planned)


def _drive(
    shape: Drive, rng: np.random.Generator, counts: int, jitter: float, cogging: float
) -> tuple[Drive, PlantDrive]:
    order = int(rng.choice([36, 42, 60, 84, 100, 200]))
    stiffness = math.exp(rng.uniform(math.log(0.8), math.log(5.0)))
    damping = stiffness * rng.uniform(0.012, 0.03)
    amplitude = min(rng.uniform(0.0, 5.0) * stiffness / order, 0.05)
    harmonics = (
        (order, amplitude, rng.uniform(0.0, 6.0)),
        (2 * order, amplitude * rng.uniform(0.0, 0.25), rng.uniform(0.0, 6.0)),
        (14, amplitude * rng.uniform(0.0, 0.3), rng.uniform(0.0, 6.0)),
    )
    coulomb = math.exp(rng.uniform(math.log(1e-3), math.log(8e-3)))
    static = coulomb * rng.uniform(1.0, 1.4)
    doubt = rng.uniform(0.8, 1.25)
    angle = 2.0 * math.pi * np.arange(4096) / 4096
    believed = sum(a * (1.0 + 0.05 * rng.standard_normal()) * np.sin(n * angle + phase) for n, a, phase in harmonics)
    common = {
        "stiffness": stiffness,
        "damping": damping,
        "torque_limit": 1.0,
        "rotor_inertia": shape.rotor_inertia,
        "stribeck_speed": rng.uniform(0.03, 0.07),
        "viscous_friction": shape.viscous_friction,
        "encoder_counts": float(counts),
    }
    given = replace(
        shape, cog_map=CogMap(believed), coulomb_friction=coulomb * doubt, static_friction=static * doubt,
        index_offset=0.0, torque_step=0.0, dead_time_torque=0.0, gear_ratio=1.0, **common
    )  # fmt: skip
    true = PlantDrive(
        harmonics=tuple((n, cogging * a, phase) for n, a, phase in harmonics),
        coulomb_friction=coulomb,
        static_friction=static,
        encoder_jitter=jitter,
        **common,
    )
    return given, true


@cache
def _planned(seed: int, rest: tuple[float, ...]) -> Plan:
    """Plan a path of straight stretches over the table before the arm, at the feed of a hand that is led."""
    rng = np.random.default_rng([seed, 1])
    low, high = np.array([0.18, -0.12]), np.array([0.30, 0.12])
    points = [rng.uniform(low, high)]
    length = 0.0
    while length < LENGTH:
        way = rng.uniform(0.0, 2.0 * math.pi)
        there = np.clip(points[-1] + rng.uniform(0.02, 0.08) * np.array([math.cos(way), math.sin(way)]), low, high)
        leg = float(np.linalg.norm(there - points[-1]))
        if leg > 0.015:
            points.append(there)
            length += leg
    corners = np.column_stack([points, np.full(len(points), 0.03)])
    plant = shipped.plant("tern")
    return plan(plant, corners, np.array(rest), feed=rng.uniform(0.03, 0.10), acceleration=rng.uniform(0.4, 1.0))
