"""An arm in MuJoCo: an independent plant that makes logs whose truth is known.

It shares nothing with the package under test but the definitions: its own reading of the URDF (MuJoCo's), its own
dynamics, friction, cogging and firmware. Everything is SI and radians.

Friction is MuJoCo's ``frictionloss``, a bound on a regularised friction torque, refreshed at every step with the
Stribeck curve Fc + (Fs - Fc) exp(-(v / vs)^2). With the engine's default settings a stuck joint creeps; with the stiff
ones used here it creeps at some 1e-6 rad/s (MuJoCo manual, "Friction loss").
"""

from __future__ import annotations

import re
from collections.abc import Sequence
from dataclasses import dataclass

import mujoco
import numpy as np
import numpy.typing as npt

from tests.plant.firmware import Firmware
from tests.plant.plant_drive import PlantDrive, PlantServo

__all__ = ["STANDARD_GRAVITY", "Plant", "PlantDrive", "PlantLap", "PlantServo"]

FloatArray = npt.NDArray[np.float64]

STANDARD_GRAVITY = 9.80665


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
        firmware = Firmware(self, compensated, np.random.default_rng(seed))
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
        self, data: mujoco.MjData, firmware: Firmware, q: FloatArray, qd: FloatArray, qdd: FloatArray
    ) -> tuple[FloatArray, FloatArray]:
        counts, commanded = firmware.answer(data.qpos, q, qd, qdd)
        for _ in range(self.substeps):
            self.step(data, firmware.drive_torque())
        return counts, commanded
