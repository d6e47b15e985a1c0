"""An arm, a trajectory and what is assumed of them, as the replay's kernels take them."""

from __future__ import annotations

import math
from typing import NamedTuple

import numpy as np

from armeval.arrays import FloatArray
from armeval.errors import InputError
from armeval.evaluate.cog_loss import compensation_table
from armeval.kernels.chain import tip_jacobians
from armeval.kernels.dynamics import mass_matrix_and_bias
from armeval.kernels.records import Records, joint_records, lap_records, sent_records, servo_record, target_records
from armeval.kernels.periodic import hermite_table
from armeval.model.arm import Arm
from armeval.model.causes import Causes
from armeval.model.trajectory import Trajectory
from armeval.model.trial import Compensation

COG_CELLS = 4096
"""Least number of cells a turn in which the cogging torque is kept; their cubics miss order 84 by 3e-7 of its amplitude."""


class ReplayInput(NamedTuple):
    """What :func:`armeval.kernels.replay.replay_lap` takes, in its order."""

    joints: Records
    servo: Records
    targets: Records
    substeps: int
    cogging: FloatArray
    tables: FloatArray
    sent: Records
    lap: Records


def replay_input(
    arm: Arm,
    trajectory: Trajectory,
    *,
    compensated: bool,
    compensation: Compensation,
    causes: Causes,
    substeps: int,
    settle: float,
    seeds: tuple[np.random.Generator, ...],
    start: FloatArray | None = None,
) -> ReplayInput:
    """Prepare a replay of as many members as there are random generators; the members differ in the map's noise only.

    Raises
    ------
    InputError
        If the trajectory is not for this arm or not sampled at its servo's period, or ``substeps`` is not above 0.
    """
    n, lanes, period = arm.chain.count, len(seeds), arm.servo.period
    if trajectory.joint.shape[1] != n:
        raise InputError(
            f"the trajectory is for {trajectory.joint.shape[1]} joints, the arm has {n}", "plan it for this arm"
        )
    if not np.allclose(np.diff(trajectory.time), period, rtol=1e-6, atol=0.0):
        raise InputError(f"the trajectory is not sampled at the servo's period of {period:g} s", "plan it for this arm")
    if substeps < 1:
        raise InputError(f"the replay takes {substeps} steps a servo period", "give at least 1", place="--substeps")
    drives = arm.drives
    cogging = np.stack([_cog_table(arm, i) for i in range(n)])
    tables = np.zeros((n, lanes, compensation.table_bins + 2))
    for lane, rng in enumerate(seeds):
        for i, drive in enumerate(drives):
            if compensated and drive.cog_map is not None:
                entries = compensation_table(drive.cog_map, compensation, rng)
                tables[i, lane] = np.concatenate([entries, entries[:2]])
    delay = arm.servo.delay / period if causes.servo_lag else 0.0
    whole = math.floor(delay + 1e-9)
    servo = _servo(arm, causes, compensated, compensation)
    servo["delay_share"] = max(delay - whole, 0.0)
    return ReplayInput(
        joints=_records(arm, causes, compensation, trajectory.joint[0] if start is None else start, lanes),
        servo=servo,
        targets=_targets(arm, trajectory, causes, max(math.ceil(settle / period - 1e-9), 0)),
        substeps=substeps,
        cogging=cogging,
        tables=tables,
        sent=sent_records(whole + 1, n, lanes),
        lap=lap_records(len(trajectory.time), n, lanes),
    )


def _servo(arm: Arm, causes: Causes, compensated: bool, compensation: Compensation) -> Records:
    given, servo = arm.servo, servo_record()
    servo["period"] = given.period
    servo["speed_gain"] = -math.expm1(-2.0 * math.pi * given.speed_cutoff * given.period) if causes.servo_lag else 1.0
    servo["closes_at_tip"] = given.law == "tip_impedance"
    servo["holds_weight"] = given.gravity_feedforward
    servo["compensates"] = compensated
    servo["takes_nearest"] = compensation.interpolation == "nearest"
    servo["tip_stiffness"], servo["tip_damping"] = given.tip_stiffness, given.tip_damping
    servo["free_fall"], servo["tip"] = arm.gravity, arm.chain.tip
    return servo


def _cog_table(arm: Arm, joint: int) -> FloatArray:
    """Shape (2, cells + 2): torque, and slope times the cells' width, at even motor angles; the first two come again."""
    cells = max([COG_CELLS] + [len(d.cog_map.torque) for d in arm.drives if d.cog_map is not None])
    cog_map = arm.drives[joint].cog_map
    values = np.zeros(cells) if cog_map is None else _resampled(cog_map.torque, cells)
    nodes = hermite_table(values).T * [[1.0], [2.0 * np.pi / cells]]
    return np.concatenate([nodes, nodes[:, :2]], axis=1)


def _resampled(values: FloatArray, cells: int) -> FloatArray:
    """The same trigonometric polynomial at more places of the turn."""
    if cells == len(values):
        return np.asarray(values)
    spectrum = np.fft.rfft(values)
    if len(values) % 2 == 0:
        spectrum[-1] *= 0.5
    return np.asarray(np.fft.irfft(spectrum, n=cells) * (cells / len(values)))


def _records(arm: Arm, causes: Causes, compensation: Compensation, start: FloatArray, lanes: int) -> Records:
    joints = joint_records(arm.chain.arrays, lanes)
    drives = arm.drives

    def of(name: str) -> FloatArray:
        return np.array([getattr(drive, name) for drive in drives], dtype=np.float64)

    joints["gear_ratio"] = of("gear_ratio")
    joints["reflected_inertia"] = of("gear_ratio") ** 2 * of("rotor_inertia")
    joints["stiffness"], joints["damping"] = of("stiffness"), of("damping")
    joints["torque_limit"] = of("torque_limit") if causes.saturation else np.inf
    joints["torque_step"] = of("torque_step") if causes.torque_resolution else 0.0
    joints["dead_time_torque"] = of("dead_time_torque") if causes.torque_resolution else 0.0
    joints["resolution"] = arm.resolution if causes.encoder else 0.0
    joints["stribeck_speed"] = of("stribeck_speed")
    per_lane = {
        "coulomb_friction": of("coulomb_friction") * causes.friction,
        "static_friction": of("breakaway_friction") * causes.friction,
        "viscous_friction": of("viscous_friction"),
        "cog_gain": np.ones(len(drives)) * causes.cogging,
        "index": of("index_offset"),
        # one standard deviation at every joint: the mean square of what compensation leaves is then right
        "table_index": of("index_offset") + compensation.index_error,
        "angle": np.asarray(start, dtype=np.float64),
    }
    for name, values in per_lane.items():
        joints[name] = values if lanes == 1 else values[:, None]
    return joints


def _targets(arm: Arm, trajectory: Trajectory, causes: Causes, settling: int) -> Records:
    """Targets of the periods of settling, at rest at the first target, and of the lap."""
    q, v, a = np.array(trajectory.joint), np.array(trajectory.joint_speed), np.array(trajectory.joint_acceleration)
    chain, gravity = arm.chain.arrays, np.array(arm.gravity)
    fed = np.zeros_like(q)
    if not causes.servo_lag or arm.servo.inertia_feedforward:
        inertia, bias, weight = mass_matrix_and_bias(chain, gravity, q, v)
        fed += np.einsum("kij,kj->ki", inertia, a) + a * [d.gear_ratio**2 * d.rotor_inertia for d in arm.drives]
        if not causes.servo_lag:
            fed += bias - weight + v * [d.viscous_friction for d in arm.drives]
            if not arm.servo.gravity_feedforward:
                fed += weight
    targets = target_records(q, v, fed, np.array(trajectory.tip), np.einsum("kri,ki->kr", tip_jacobians(chain, q), v))
    still = np.repeat(targets[:1], settling)
    for name in ("joint_speed", "torque", "tip_speed"):
        still[name] = 0.0
    return np.concatenate([still, targets])
