"""An arm in MuJoCo: an independent plant that makes logs whose truth is known.

It shares nothing with the package under test but the definitions: its own reading of the URDF (MuJoCo's), its own
dynamics, friction, cogging and firmware. Everything is SI and radians.

Friction is MuJoCo's ``frictionloss``, a bound on a regularised friction torque, refreshed at every step with the
Stribeck curve Fc + (Fs - Fc) exp(-(v / vs)^2). With the engine's default settings a stuck joint creeps; with the stiff
ones used here it creeps at some 1e-6 rad/s (MuJoCo manual, "Friction loss").
"""

from __future__ import annotations

import math
import re
from collections import deque
from collections.abc import Sequence
from dataclasses import dataclass

import mujoco
import numpy as np
import numpy.typing as npt

FloatArray = npt.NDArray[np.float64]
IntArray = npt.NDArray[np.int64]

STANDARD_GRAVITY = 9.80665


@dataclass(frozen=True, eq=False)
class PlantDrive:
    """One joint's drive: the truth of motor, friction and encoder, and what its firmware is told.

    Values are at the joint unless said to be on the motor side; the motor's true angle is
    ``gear_ratio * q + index_offset``.

    Attributes
    ----------
    harmonics
        True cogging torque on the rotor: (order, amplitude [N m], phase [rad]) of amplitude*sin(order*angle+phase).
    stiffness, damping
        Gains of ``joint_pd``; ``tip_impedance`` does not use them.
    encoder_jitter
        One sigma of a reading [counts] before it is rounded to a whole count.
    encoder_counts
        0 for an ideal encoder, whose "counts" are then the joint angle itself.
    table
        What the firmware stored of the cogging torque, motor side [N m], entry k at 2 pi k / bins; None: nothing.
    table_offset
        Where the firmware believes the index to be, motor side [rad]; None: at the true ``index_offset``.
    dead_time_torque
        Torque [N m] lost against the sign of the commanded one.
    """

    harmonics: tuple[tuple[int, float, float], ...] = ()
    gear_ratio: float = 1.0
    index_offset: float = 0.0
    rotor_inertia: float = 0.0
    coulomb_friction: float = 0.0
    static_friction: float | None = None
    stribeck_speed: float = 0.05
    viscous_friction: float = 0.0
    stiffness: float = 0.0
    damping: float = 0.0
    torque_limit: float = math.inf
    torque_step: float = 0.0
    dead_time_torque: float = 0.0
    encoder_counts: float = 0.0
    encoder_on: str = "motor"
    encoder_jitter: float = 0.0
    table: FloatArray | None = None
    table_offset: float | None = None

    @property
    def resolution(self) -> float:
        """Joint angle of one count [rad], with the gear's sign; 1 for an ideal encoder."""
        if self.encoder_counts == 0.0:
            return 1.0
        return 2.0 * math.pi / self.encoder_counts / (self.gear_ratio if self.encoder_on == "motor" else 1.0)


@dataclass(frozen=True)
class PlantServo:
    """The firmware's loop over all joints; stiffness and damping at the tip in N/m and N s/m."""

    law: str = "joint_pd"
    period: float = 1e-3
    delay: float = 0.0
    speed_cutoff: float = math.inf
    gravity_feedforward: bool = True
    inertia_feedforward: bool = False
    tip_stiffness: tuple[float, float, float] = (0.0, 0.0, 0.0)
    tip_damping: tuple[float, float, float] = (0.0, 0.0, 0.0)


@dataclass(frozen=True, eq=False)
class PlantLap:
    """One lap at the servo's rate: what a logger saw, and the truth.

    Attributes
    ----------
    time
        Shape (k,) [s] since the run began; the next laps go on counting.
    counts
        Shape (k, n). Encoder readings (whole numbers, or rad where the encoder is ideal).
    torque
        Shape (k, n) [N m]. Commanded at the joint, after limit and rounding.
    true_angle, true_speed
        Shape (k, n) [rad], [rad/s].
    """

    time: FloatArray
    counts: FloatArray
    torque: FloatArray
    true_angle: FloatArray
    true_speed: FloatArray


class Plant:
    """A serial chain from a URDF, with drives and firmware.

    Parameters
    ----------
    urdf_text
        The URDF. Its joint limits hold; its ``dynamics`` (damping, friction) are replaced by the drives'.
    tip
        Name of the link whose origin is the tip.
    drives
        One a moving joint, from base to tip.
    servo
        The firmware's loop.
    gravity
        Acceleration of free fall in the base frame [m/s^2].
    step_rate
        Time steps a second, rounded to a whole number a servo period.
    """

    def __init__(
        self,
        urdf_text: str,
        tip: str,
        drives: Sequence[PlantDrive],
        servo: PlantServo | None = None,
        *,
        gravity: tuple[float, float, float] = (0.0, 0.0, -STANDARD_GRAVITY),
        step_rate: float = 8000.0,
    ) -> None:
        self.drives, self.servo = tuple(drives), servo or PlantServo()
        keep_frames = '<mujoco><compiler fusestatic="false" discardvisual="true"/></mujoco>'
        urdf_text = re.sub(r"(<robot\b[^>]*>)", rf"\1{keep_frames}", urdf_text, count=1)
        self.model = mujoco.MjModel.from_xml_string(urdf_text)
        n = self.model.nv
        if len(self.drives) != n:
            raise ValueError(f"{len(self.drives)} drives for {n} joints")
        self.substeps = max(1, round(step_rate * self.servo.period))
        self.model.opt.timestep = self.servo.period / self.substeps
        self.model.opt.gravity[:] = gravity
        self.model.opt.tolerance = 1e-14
        self.model.dof_solref[:] = (1e-3, 1.0)
        self.model.dof_solimp[:] = (0.9999, 0.9999, 0.001, 0.5, 2.0)
        self.gear = np.array([drive.gear_ratio for drive in self.drives])
        self.model.dof_armature[:] = self.gear**2 * [drive.rotor_inertia for drive in self.drives]
        self.model.dof_damping[:] = [drive.viscous_friction for drive in self.drives]
        self._coulomb = np.array([drive.coulomb_friction for drive in self.drives])
        static = [d.coulomb_friction if d.static_friction is None else d.static_friction for d in self.drives]
        self._extra = np.array(static) - self._coulomb
        self._stribeck = np.array([drive.stribeck_speed for drive in self.drives])
        terms = max(1, *(len(drive.harmonics) for drive in self.drives))
        self._harmonics = np.zeros((3, n, terms))
        for j, drive in enumerate(self.drives):
            self._harmonics[:, j, : len(drive.harmonics)] = np.array(drive.harmonics).reshape(-1, 3).T
        self._offset = np.array([drive.index_offset for drive in self.drives])
        self._tip = mujoco.mj_name2id(self.model, mujoco.mjtObj.mjOBJ_BODY, tip)
        if self._tip < 0:
            raise ValueError(f"no link `{tip}`")
        self._scratch = mujoco.MjData(self.model)

    @property
    def count(self) -> int:
        """Number of joints."""
        return int(self.model.nv)

    def _pose(self, q: FloatArray) -> mujoco.MjData:
        data = self._scratch
        data.qpos[:] = q
        data.qvel[:] = 0.0
        mujoco.mj_kinematics(self.model, data)
        mujoco.mj_comPos(self.model, data)
        return data

    def tip(self, q: FloatArray) -> FloatArray:
        """Tip of each pose: (k, n) gives (k, 3) [m]."""
        return np.array([self._pose(row).xpos[self._tip].copy() for row in np.atleast_2d(q)])

    def jacobian(self, q: FloatArray) -> FloatArray:
        """Jacobian of the tip's position in one pose, shape (3, n)."""
        jacobian = np.empty((3, self.count))
        mujoco.mj_jacBody(self.model, self._pose(q), jacobian, None, self._tip)
        return jacobian

    def gravity_torque(self, q: FloatArray) -> FloatArray:
        """Torque that holds one pose against gravity, shape (n,) [N m]."""
        data = self._pose(q)
        mujoco.mj_comVel(self.model, data)
        torque = np.empty(self.count)
        mujoco.mj_rne(self.model, data, 0, torque)
        return torque

    def inertia_torque(self, q: FloatArray, acceleration: FloatArray) -> FloatArray:
        """M(q) times acceleration in one pose, rotors included, shape (n,) [N m]."""
        data = self._pose(q)
        mujoco.mj_makeM(self.model, data)
        torque = np.empty(self.count)
        mujoco.mj_mulM(self.model, data, torque, np.ascontiguousarray(acceleration))
        return torque

    def cogging(self, q: FloatArray) -> FloatArray:
        """True cogging torque at the joints in one pose, shape (n,) [N m]."""
        order, amplitude, phase = self._harmonics
        angle = self.gear * q + self._offset
        return self.gear * (amplitude * np.sin(order * angle[:, None] + phase)).sum(axis=1)

    def friction_bound(self, speed: FloatArray) -> FloatArray:
        """Largest dry friction at each joint's speed, shape (n,) [N m]."""
        return self._coulomb + self._extra * np.exp(-((speed / self._stribeck) ** 2))

    def step(self, data: mujoco.MjData, torque: FloatArray) -> None:
        """Go one time step on, under drive torques of shape (n,) [N m]."""
        self.model.dof_frictionloss[:] = self.friction_bound(data.qvel)
        data.qfrc_applied[:] = torque + self.cogging(data.qpos)
        mujoco.mj_step(self.model, data)

    def run(
        self,
        q_target: FloatArray,
        qd_target: FloatArray,
        qdd_target: FloatArray | None = None,
        *,
        compensated: bool = False,
        laps: int = 1,
        settle: float = 0.5,
        start: FloatArray | None = None,
        seed: int = 0,
    ) -> tuple[PlantLap, ...]:
        """Let the firmware follow joint targets.

        Parameters
        ----------
        q_target, qd_target, qdd_target
            Shape (k, n), one row a servo period. Accelerations are used by the inertia feed-forward only.
            ``tip_impedance`` aims at the tip position and tip speed that they stand for.
        compensated
            Whether the firmware takes its stored table off.
        laps
            The targets are gone through so many times without a break in the motion; more than one asks for a
            closed trajectory.
        settle
            Time [s] at the first target before each lap; not logged.
        start
            Joint angles (n,) at the start of the first settling; default: the first target.
        seed
            Of the encoder's jitter.
        """
        if laps > 1 and np.abs(q_target[-1] - q_target[0]).max() > 1e-3:
            raise ValueError("several laps need a trajectory that ends where it starts")
        data = mujoco.MjData(self.model)
        data.qpos[:] = q_target[0] if start is None else start
        firmware = _Firmware(self, compensated, np.random.default_rng(seed))
        still = np.zeros(self.count)
        accelerations = np.zeros_like(q_target) if qdd_target is None else qdd_target
        recorded = []
        tick = 0
        for _ in range(laps):
            for _ in range(round(settle / self.servo.period)):
                self._tick(data, firmware, q_target[0], still, still)
                tick += 1
            rows = []
            for target, speed, acceleration in zip(q_target, qd_target, accelerations, strict=True):
                truth = data.qpos.copy(), data.qvel.copy()
                counts, torque = self._tick(data, firmware, target, speed, acceleration)
                rows.append((counts, torque, *truth))
            columns = [np.array(column) for column in zip(*rows, strict=True)]
            recorded.append(PlantLap((tick + np.arange(len(rows))) * self.servo.period, *columns))
            tick += len(rows)
        return tuple(recorded)

    def _tick(
        self, data: mujoco.MjData, firmware: _Firmware, q: FloatArray, qd: FloatArray, qdd: FloatArray
    ) -> tuple[FloatArray, FloatArray]:
        counts, commanded = firmware.answer(data.qpos, q, qd, qdd)
        for _ in range(self.substeps):
            self.step(data, firmware.drive_torque())
        return counts, commanded


class _Firmware:
    """What runs in the drives once a period: it knows encoder counts, targets, its table and its model of the arm."""

    def __init__(self, plant: Plant, compensated: bool, rng: np.random.Generator) -> None:
        drives, servo, n = plant.drives, plant.servo, plant.count
        self.plant, self.servo, self.rng = plant, servo, rng
        self.compensated = compensated and any(drive.table is not None for drive in drives)
        self.resolution = np.array([drive.resolution for drive in drives])
        self.ideal = np.array([drive.encoder_counts == 0.0 for drive in drives])
        self.jitter = np.array([drive.encoder_jitter for drive in drives])
        self.stiffness = np.array([drive.stiffness for drive in drives])
        self.damping = np.array([drive.damping for drive in drives])
        self.limit = np.array([drive.torque_limit for drive in drives])
        self.quantum = np.array([drive.torque_step for drive in drives])
        self.dead = np.array([drive.dead_time_torque for drive in drives])
        self.blend = -math.expm1(-2.0 * math.pi * servo.speed_cutoff * servo.period)
        self.seen: FloatArray | None = None
        self.speed = np.zeros(n)
        # Torques on their way from the loop to the motor, one a plant step; the last one is held.
        self.delay = round(servo.delay / servo.period * plant.substeps)
        self.queue: deque[FloatArray] = deque()
        self.newest = np.zeros(n)

    def answer(
        self, q: FloatArray, target: FloatArray, target_speed: FloatArray, target_acceleration: FloatArray
    ) -> tuple[FloatArray, FloatArray]:
        """Read the encoders at the true angles ``q`` and command torques; both of shape (n,)."""
        reading = q / self.resolution + self.jitter * self.rng.standard_normal(len(q))
        counts = np.where(self.ideal, reading, np.rint(reading))
        seen = counts * self.resolution
        first = self.seen is None
        last = seen if self.seen is None else self.seen
        self.speed = self.speed + self.blend * ((seen - last) / self.servo.period - self.speed)
        self.seen = seen
        if self.servo.law == "joint_pd":
            torque = self.stiffness * (target - seen) + self.damping * (target_speed - self.speed)
        else:
            torque = self._tip_impedance(seen, target, target_speed)
        if self.servo.gravity_feedforward:
            torque = torque + self.plant.gravity_torque(seen)
        if self.servo.inertia_feedforward:
            torque = torque + self.plant.inertia_torque(target, target_acceleration)
        if self.compensated:
            torque = torque - self._table(seen)
        torque = np.clip(torque, -self.limit, self.limit)
        stepped = np.where(self.quantum > 0.0, self.quantum, 1.0)
        torque = np.where(self.quantum > 0.0, np.rint(torque / stepped) * stepped, torque)
        self.newest = np.sign(torque) * np.maximum(np.abs(torque) - self.dead, 0.0)
        if first:  # as if it had held the arm there before
            self.queue.extend([self.newest] * self.delay)
        return counts, torque

    def _tip_impedance(self, seen: FloatArray, target: FloatArray, target_speed: FloatArray) -> FloatArray:
        wanted, wanted_speed = self.plant.tip(target)[0], self.plant.jacobian(target) @ target_speed
        jacobian = self.plant.jacobian(seen)
        error, error_speed = wanted - self.plant.tip(seen)[0], wanted_speed - jacobian @ self.speed
        stiffness, damping = np.array(self.servo.tip_stiffness), np.array(self.servo.tip_damping)
        return jacobian.T @ (stiffness * error + damping * error_speed)

    def _table(self, seen: FloatArray) -> FloatArray:
        """Joint torque of the stored table at the angle seen, linear between entries."""
        torque = np.zeros(len(seen))
        for j, drive in enumerate(self.plant.drives):
            if drive.table is not None:
                offset = drive.index_offset if drive.table_offset is None else drive.table_offset
                bins = len(drive.table)
                place = (drive.gear_ratio * seen[j] + offset) / (2.0 * math.pi) * bins
                below = math.floor(place)
                part = place - below
                low, high = drive.table[below % bins], drive.table[(below + 1) % bins]
                torque[j] = drive.gear_ratio * ((1.0 - part) * low + part * high)
        return torque

    def drive_torque(self) -> FloatArray:
        """Torque at the joints during the next plant step."""
        if self.delay == 0:
            return self.newest
        self.queue.append(self.newest)
        return self.queue.popleft()
