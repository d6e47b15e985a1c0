"""An arm in MuJoCo whose tip is led by a stiff constraint: an independent measurement of the force that a hand meets.

It shares nothing with the package under test but the definitions. The tip is tied to a body without mass or motion of
its own that stands, step by step, where the hand wants the tip (MuJoCo manual, "Equality" and "Mocap bodies"). The
constraint is a critically damped spring of a fraction of a millisecond; its force is the hand's. Since it damps the
tip's speed against a point that has none, the tip trails by twice that time; the point is led ahead by as much.
"""

from __future__ import annotations

import re
from collections.abc import Sequence
from dataclasses import dataclass

import mujoco
import numpy as np
import numpy.typing as npt
from scipy.interpolate import CubicSpline

from tests.plant.mujoco_plant import STANDARD_GRAVITY
from tests.plant.plant_drive import PlantDrive

FloatArray = npt.NDArray[np.float64]

STEP_RATE = 16000.0
FIRMNESS = 1.5e-4  # time constant of the constraint [s]


@dataclass(frozen=True, eq=False)
class LedMotion:
    """What was measured, k samples: force of the hand on the tip (k, 3), tip (k, 3), joint angles and speeds (k, n)."""

    force: FloatArray
    tip: FloatArray
    angle: FloatArray
    speed: FloatArray


def lead(
    urdf_text: str,
    tip: str,
    drives: Sequence[PlantDrive],
    points: FloatArray,
    period: float,
    start: FloatArray,
    start_speed: FloatArray,
    *,
    carries_weight: bool,
    compensated: bool = False,
) -> LedMotion:
    """Lead the tip along points (k, 3), one a period [s]; the drives carry the weight or not, compensate or not."""
    frames = '<mujoco><compiler fusestatic="false" discardvisual="true"/></mujoco>'
    spec = mujoco.MjSpec.from_string(re.sub(r"(<robot\b[^>]*>)", rf"\1{frames}", urdf_text, count=1))
    hand = spec.worldbody.add_body(name="leading_hand", mocap=True, pos=points[0])
    tie = spec.add_equality(type=mujoco.mjtEq.mjEQ_CONNECT, objtype=mujoco.mjtObj.mjOBJ_BODY)
    tie.name1, tie.name2 = tip, hand.name
    tie.data[:3] = 0.0
    tie.solref[:] = (FIRMNESS, 1.0)
    tie.solimp[:] = (0.99999, 0.99999, 0.001, 0.5, 2.0)
    model = spec.compile()
    model.eq_data[0, :6] = 0.0  # the engine would tie the points together as they lie at zero angles
    substeps = max(1, round(STEP_RATE * period))
    model.opt.timestep = period / substeps
    model.opt.gravity[:] = (0.0, 0.0, -STANDARD_GRAVITY)
    model.opt.tolerance, model.opt.iterations = 1e-14, 200
    model.dof_solref[:] = (1e-3, 1.0)
    model.dof_solimp[:] = (0.9999, 0.9999, 0.001, 0.5, 2.0)
    gear = np.array([drive.gear_ratio for drive in drives])
    model.dof_armature[:] = gear**2 * [drive.rotor_inertia for drive in drives]
    model.dof_damping[:] = [drive.viscous_friction for drive in drives]
    coulomb = np.array([drive.coulomb_friction for drive in drives])
    static = np.array([d.coulomb_friction if d.static_friction is None else d.static_friction for d in drives])
    stribeck = np.array([drive.stribeck_speed for drive in drives])
    body = mujoco.mj_name2id(model, mujoco.mjtObj.mjOBJ_BODY, tip)
    data, still = mujoco.MjData(model), mujoco.MjData(model)
    data.qpos[:], data.qvel[:] = start, start_speed
    count = len(points)
    fine = np.arange((count - 1) * substeps + 1) / substeps
    ahead = np.minimum(fine + 2.0 * FIRMNESS / period, count - 1)
    led = CubicSpline(np.arange(count), points)(ahead)  # straight between points, it would knock at every point
    rows = []
    for index, target in enumerate(led):
        data.mocap_pos[0] = target
        torque = sum_of_harmonics(drives, data.qpos)
        if compensated:
            torque = torque - table_torque(drives, data.qpos)
        if carries_weight:
            still.qpos[:], still.qvel[:] = data.qpos, 0.0
            mujoco.mj_forward(model, still)
            torque = torque + still.qfrc_bias
        data.qfrc_applied[:] = torque
        model.dof_frictionloss[:] = coulomb + (static - coulomb) * np.exp(-((data.qvel / stribeck) ** 2))
        angle, speed = data.qpos.copy(), data.qvel.copy()
        mujoco.mj_step(model, data)
        if index % substeps == 0:
            tied = data.efc_type == mujoco.mjtConstraint.mjCNSTR_EQUALITY
            rows.append((data.efc_force[tied].copy(), data.xpos[body].copy(), angle, speed))
    force, at, angle, speed = (np.array(column) for column in zip(*rows, strict=True))
    return LedMotion(force, at, angle, speed)


def sum_of_harmonics(drives: Sequence[PlantDrive], q: FloatArray) -> FloatArray:
    """True cogging torque at the joints in one pose, shape (n,) [N m]."""
    return np.array(
        [
            d.gear_ratio * sum(a * np.sin(n * (d.gear_ratio * angle + d.index_offset) + p) for n, a, p in d.harmonics)
            for d, angle in zip(drives, q, strict=True)
        ]
    )


def table_torque(drives: Sequence[PlantDrive], q: FloatArray) -> FloatArray:
    """What the drives' tables hold, linear between entries, looked up where the firmware takes the index to be."""
    torque = np.zeros(len(q))
    for i, drive in enumerate(drives):
        if drive.table is not None:
            offset = drive.index_offset if drive.table_offset is None else drive.table_offset
            turn = (drive.gear_ratio * q[i] + offset) / (2.0 * np.pi) * len(drive.table)
            torque[i] = drive.gear_ratio * np.interp(
                turn % len(drive.table), np.arange(len(drive.table) + 1), np.append(drive.table, drive.table[0])
            )
    return torque
