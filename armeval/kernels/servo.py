"""The firmware: what it makes of encoder angles, targets and its compensation table, once a period.

In the order in which a firmware works: encoder angles are rounded to the nearest count; their differences, filtered,
are the speeds; the servo's law, the feed-forward terms and the negative of the stored cog map are summed up; the sum is
cut at the torque limit, rounded to the nearest torque step and sent off. The drive's dead time then takes its torque
away against the sign of the current (it cannot turn the sign round), the motor's torque constant scales the rest, and
after the delay it acts until the next one does.
"""

from __future__ import annotations

import math
from typing import NamedTuple

from armeval.arrays import FloatArray
from armeval.kernels.compile import jit_inline
from armeval.kernels.dynamics import gravity_torque, place
from armeval.kernels.joint_record import Records


class ServoArrays(NamedTuple):
    """The servo as the kernels take it.

    Attributes
    ----------
    period, substeps, settle
        Servo period [s], steps in it, and periods before the lap in which the first target is held.
    delay_periods, delay_share
        The delay: whole periods and the rest as a share of one.
    speed_gain
        Share of a new speed difference that the filter lets through at once.
    closes_at_tip, holds_gravity, compensates, takes_nearest
        Which law, whether gravity is fed forward, whether the table is, and whether without interpolation.
    tip_stiffness, tip_damping
        Shape (3,) [N/m], [N s/m].
    free_fall
        Shape (3,) [m/s^2].
    sent
        Shape (delay_periods + 1, n, lanes) [N m]. Torques on their way; work space.
    tip
        Shape (3,) [m]. The tip in the last joint's frame.
    """

    period: float
    substeps: int
    settle: int
    delay_periods: int
    delay_share: float
    speed_gain: float
    closes_at_tip: bool
    holds_gravity: bool
    compensates: bool
    takes_nearest: bool
    tip_stiffness: FloatArray
    tip_damping: FloatArray
    free_fall: FloatArray
    sent: FloatArray
    tip: FloatArray


class Targets(NamedTuple):
    """What the servo is told, k periods: joint targets and speeds (k, n), torque fed forward (k, n), tip and tip speed (k, 3)."""

    joint: FloatArray
    joint_speed: FloatArray
    torque: FloatArray
    tip: FloatArray
    tip_speed: FloatArray


@jit_inline
def read_encoders(joints: Records, servo: ServoArrays, first: bool) -> None:
    """Fill in ``seen`` and ``seen_speed``; the first reading gives no speed."""
    for i in range(joints.shape[0]):
        joint = joints[i]
        angle, seen, speed, resolution = joint["angle"], joint["seen"], joint["seen_speed"], joint["resolution"]
        for m in range(angle.shape[0]):
            reading = resolution * round_to_even(angle[m] / resolution) if resolution > 0.0 else angle[m]
            change = 0.0 if first else (reading - seen[m]) / servo.period
            speed[m] += servo.speed_gain * (change - speed[m])
            seen[m] = reading


@jit_inline
def round_to_even(x: float) -> float:
    """Round to the nearest whole number, a half to the even one."""
    whole = math.floor(x)
    rest = x - whole
    up = rest > 0.5 or (rest == 0.5 and whole != 2.0 * math.floor(0.5 * whole))
    return whole + 1.0 if up else whole


@jit_inline
def add_tip_law(
    joints: Records, servo: ServoArrays, target: FloatArray, target_speed: FloatArray, moves: float
) -> None:
    """Add J^T [K (target - seen) + D (target speed - seen speed)] to ``ask``, for the frames of the seen angles."""
    n = joints.shape[0]
    last = joints[n - 1]
    R, p = last["rotation"], last["origin"]
    tip, force = last["tip_at"], last["tip_force"]
    for r in range(3):
        for m in range(tip.shape[1]):
            tip[r, m] = p[r, m] + R[r, 0, m] * servo.tip[0] + R[r, 1, m] * servo.tip[1] + R[r, 2, m] * servo.tip[2]
            force[r, m] = servo.tip_stiffness[r] * (target[r] - tip[r, m]) + servo.tip_damping[r] * (
                moves * target_speed[r]
            )
    for i in range(n):
        S, J, speed = joints[i]["axis"], joints[i]["jacobian"], joints[i]["seen_speed"]
        for m in range(speed.shape[0]):
            # speed of the body's point at the tip: linear part at the base origin + angular part x tip
            J[0, m] = S[3, m] + S[1, m] * tip[2, m] - S[2, m] * tip[1, m]
            J[1, m] = S[4, m] + S[2, m] * tip[0, m] - S[0, m] * tip[2, m]
            J[2, m] = S[5, m] + S[0, m] * tip[1, m] - S[1, m] * tip[0, m]
            for r in range(3):
                force[r, m] -= servo.tip_damping[r] * J[r, m] * speed[m]
    for i in range(n):
        J, ask = joints[i]["jacobian"], joints[i]["ask"]
        for m in range(ask.shape[0]):
            ask[m] += J[0, m] * force[0, m] + J[1, m] * force[1, m] + J[2, m] * force[2, m]


@jit_inline
def add_compensation(joints: Records, servo: ServoArrays, table: FloatArray) -> None:
    """Add the negative of the stored cog map to ``ask``; ``table`` of shape (n, lanes, bins + 2) wraps round."""
    for i in range(joints.shape[0]):
        joint = joints[i]
        gear, seen, index, ask = joint["gear_ratio"], joint["seen"], joint["table_index"], joint["ask"]
        bins = table.shape[2] - 2
        for m in range(ask.shape[0]):
            turn = (gear * seen[m] + index[m]) * (0.5 / math.pi)
            place_in = (turn - math.floor(turn)) * bins
            k = int(place_in)
            f = place_in - k
            if servo.takes_nearest:
                f = 1.0 if f >= 0.5 else 0.0
            ask[m] -= gear * (table[i, m, k] + f * (table[i, m, k + 1] - table[i, m, k]))


@jit_inline
def run_servo(
    joints: Records, servo: ServoArrays, targets: Targets, table: FloatArray, period: int, first: bool
) -> None:
    """Read, work out and send one period's torques; before the lap (``period`` below 0) the first target is held."""
    n = joints.shape[0]
    k = max(period, 0)
    moves = 1.0 if period >= 0 else 0.0
    read_encoders(joints, servo, first)
    if servo.closes_at_tip or servo.holds_gravity:
        for i in range(n):
            at, seen = joints[i]["at"], joints[i]["seen"]
            for m in range(at.shape[0]):
                at[m] = seen[m]
        place(joints)
    if servo.holds_gravity:
        gravity_torque(joints, servo.free_fall)
    for i in range(n):
        joint = joints[i]
        ask, seen, speed, held = joint["ask"], joint["seen"], joint["seen_speed"], joint["gravity"]
        K, D = joint["stiffness"], joint["damping"]
        target, target_speed, fed = targets.joint[k, i], moves * targets.joint_speed[k, i], moves * targets.torque[k, i]
        for m in range(ask.shape[0]):
            ask[m] = fed + (held[m] if servo.holds_gravity else 0.0)
            if not servo.closes_at_tip:
                ask[m] += K * (target - seen[m]) + D * (target_speed - speed[m])
    if servo.closes_at_tip:
        add_tip_law(joints, servo, targets.tip[k], targets.tip_speed[k], moves)
    if servo.compensates:
        add_compensation(joints, servo, table)
    waits = servo.delay_periods + 1
    slot = (period + servo.settle) % waits
    for i in range(n):
        joint = joints[i]
        ask, cut, before, after = joint["ask"], joint["cut"], joint["act_before"], joint["act_after"]
        limit, step, dead, gain = (
            joint["torque_limit"],
            joint["torque_step"],
            joint["dead_time_torque"],
            joint["torque_gain"],
        )
        sent = servo.sent
        for m in range(ask.shape[0]):
            cut[m] = 1.0 if abs(ask[m]) > limit else 0.0
            u = min(max(ask[m], -limit), limit)
            u = step * round_to_even(u / step) if step > 0.0 else u
            ask[m] = u
            lost = max(abs(u) - dead, 0.0)
            delivered = gain[m] * (lost if u > 0.0 else -lost)
            if first:
                # what held the arm until now
                for w in range(waits):
                    sent[w, i, m] = delivered
                after[m] = delivered
            before[m] = after[m]
            sent[slot, i, m] = delivered
            after[m] = sent[(slot + 1) % waits, i, m]
