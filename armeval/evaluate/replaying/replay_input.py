"""An arm, a trajectory and what is assumed of them, as the replay's kernels take them."""

from __future__ import annotations

import math
from collections.abc import Sequence
from typing import NamedTuple

import numpy as np

from armeval.arrays import FloatArray
from armeval.errors import InputError
from armeval.evaluate.replaying.members import Member
from armeval.kernels.chain import tip_jacobians
from armeval.kernels.dynamics import mass_matrix_and_bias
from armeval.kernels.periodic import hermite_table
from armeval.kernels.records import (
    Records,
    joint_records,
    lap_records,
    sent_records,
    servo_record,
    target_records,
)
from armeval.model.arm import Arm
from armeval.model.causes import Causes
from armeval.model.trajectory import Trajectory
from armeval.model.trial import Compensation

COG_CELLS = 4096
"""Least number of cells a turn for the cogging torque; their cubics miss order 84 by 7e-7 of its amplitude."""


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
    members: Sequence[Member],
    *,
    compensated: bool,
    compensation: Compensation,
    causes: Causes,
    substeps: int,
    settle: float,
) -> ReplayInput:
    """Prepare the replay of one member, or of as many as there are lanes.

    Raises
    ------
    InputError
        If the trajectory is not for this arm or not sampled at its servo's period, or ``substeps`` is not above 0.
    """
    n, period = arm.chain.count, arm.servo.period
    planned = trajectory.joint.shape[1]
    if planned != n:
        raise InputError(f"the trajectory is for {planned} joints, the arm has {n}", "plan it for this arm")
    if not np.allclose(np.diff(trajectory.time), period, rtol=1e-6, atol=0.0):
        raise InputError(f"the trajectory is not sampled at the servo's period of {period:g} s", "plan it for this arm")
    if substeps < 1:
        raise InputError(f"the replay takes {substeps} steps a servo period", "give at least 1", place="--substeps")
    delay = arm.servo.delay / period if causes.servo_lag else 0.0
    whole = math.floor(delay + 1e-9)
    servo = _servo(arm, causes, compensated, compensation)
    servo["delay_share"] = max(delay - whole, 0.0)
    return with_members(
        ReplayInput(
            joints=joint_records(arm.chain.arrays),
            servo=servo,
            targets=_targets(arm, trajectory, causes, max(math.ceil(settle / period - 1e-9), 0)),
            substeps=substeps,
            cogging=_cogging(arm),
            tables=np.empty((n, 0, 0)),
            sent=sent_records(whole + 1, n),
            lap=lap_records(len(trajectory.time), n),
        ),
        arm,
        members,
        causes,
    )


def with_members(prepared: ReplayInput, arm: Arm, members: Sequence[Member], causes: Causes) -> ReplayInput:
    """Give the same input with other members, and all that a replay writes made anew."""
    lanes, n = len(members), arm.chain.count
    tables = np.stack([member.tables for member in members], axis=1)
    return prepared._replace(
        joints=_joints(arm, members, causes),
        tables=np.concatenate([tables, tables[:, :, :2]], axis=2),
        sent=sent_records(len(prepared.sent), n, lanes),
        lap=lap_records(len(prepared.lap), n, lanes),
    )


def _joints(arm: Arm, members: Sequence[Member], causes: Causes) -> Records:
    lanes, drives = len(members), arm.drives
    joints = joint_records(arm.chain.arrays, lanes)

    def of(name: str) -> FloatArray:
        return np.array([getattr(drive, name) for drive in drives], dtype=np.float64)

    def each(name: str, factor: FloatArray | float = 1.0) -> FloatArray:
        """Shape (n, lanes), or (n,) with one lane."""
        values: FloatArray = np.stack([getattr(member, name) for member in members], axis=1)
        values = values * np.reshape(factor, (-1, 1))
        return values[:, 0] if lanes == 1 else values

    joints["gear_ratio"] = of("gear_ratio")
    joints["reflected_inertia"] = of("gear_ratio") ** 2 * of("rotor_inertia")
    joints["stiffness"], joints["damping"] = of("stiffness"), of("damping")
    joints["torque_limit"] = of("torque_limit") if causes.saturation else np.inf
    joints["torque_step"] = of("torque_step") if causes.torque_resolution else 0.0
    joints["dead_time_torque"] = of("dead_time_torque") if causes.torque_resolution else 0.0
    joints["resolution"] = arm.resolution if causes.encoder else 0.0
    joints["stribeck_speed"] = of("stribeck_speed")
    joints["coulomb_friction"] = each("dry_friction", of("coulomb_friction") * causes.friction)
    joints["static_friction"] = each("dry_friction", of("breakaway_friction") * causes.friction)
    joints["viscous_friction"] = each("viscous_friction", of("viscous_friction"))
    joints["torque_gain"] = each("torque_gain")
    joints["cog_gain"] = np.ones_like(each("torque_gain")) * np.reshape(
        np.ones(len(drives)) * causes.cogging, (-1, 1) if lanes > 1 else (-1,)
    )
    joints["index"], joints["table_index"] = each("rotor_index"), each("table_index")
    joints["angle"] = each("start")
    return joints


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


def _cogging(arm: Arm) -> FloatArray:
    """Shape (n, 2, cells + 2): torque, and slope times a cell's width, at even motor angles; the first two again."""
    maps = [drive.cog_map for drive in arm.drives]
    cells = max([COG_CELLS] + [len(known.torque) for known in maps if known is not None])
    width = 2.0 * np.pi / cells
    nodes = [
        np.zeros((2, cells)) if known is None else hermite_table(_resampled(known.torque, cells)).T * [[1.0], [width]]
        for known in maps
    ]
    return np.concatenate([nodes, np.array(nodes)[:, :, :2]], axis=2)


def _resampled(values: FloatArray, cells: int) -> FloatArray:
    """Take the trigonometric polynomial through even angles at more of them."""
    if cells == len(values):
        return np.asarray(values)
    spectrum = np.fft.rfft(values)
    if len(values) % 2 == 0:
        spectrum[-1] *= 0.5
    return np.asarray(np.fft.irfft(spectrum, n=cells) * (cells / len(values)))


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
    tip = np.array(trajectory.tip)
    at_tip = arm.servo.law == "tip_impedance"
    tip_speed = np.einsum("kri,ki->kr", tip_jacobians(chain, q), v) if at_tip else np.zeros_like(tip)
    targets = target_records(q, v, fed, tip, tip_speed)
    still = np.repeat(targets[:1], settling)
    for name in ("joint_speed", "torque", "tip_speed"):
        still[name] = 0.0
    return np.concatenate([still, targets])
