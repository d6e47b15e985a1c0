"""The firmware: what it makes of encoder angles, targets and its compensation table, once a period.

In the order in which a firmware works: encoder angles are rounded to the nearest count; their differences, filtered,
are the speeds; the servo's law, the feed-forward terms and the negative of the stored cog map are summed up; the sum is
cut at the torque limit, rounded to the nearest torque step and sent off. The drive's dead time then takes its torque
away against the sign of the current (it cannot turn the sign round), the motor's torque constant scales the rest, and
after the delay it acts until the next one does.
"""

from __future__ import annotations

import math

import numpy as np

from armeval.arrays import FloatArray
from armeval.kernels.compile import jit_inline
from armeval.kernels.dynamics import hold_weight, place
from armeval.kernels.lanes import take_own, where
from armeval.kernels.records import Records, joint_count


@jit_inline
def read_encoders(joints: Records, servo: Records, first: bool) -> None:
    """Fill in ``seen`` and ``seen_speed``; the first reading gives no speed."""
    for i in range(joint_count(joints)):
        joint = joints[i]
        resolution, speed = joint["resolution"], joint["seen_speed"]
        reading = joint["angle"]
        if resolution > 0.0:
            reading = resolution * np.rint(reading / resolution)
        change = (reading - joint["seen"]) / servo["period"]
        joint["seen_speed"] = 0.0 * reading if first else speed + servo["speed_gain"] * (change - speed)
        joint["seen"] = reading


@jit_inline
def add_tip_law(joints: Records, servo: Records, target: Records) -> None:
    """Add J^T [K (target - seen) + D (target speed - seen speed)] to ``asked``, for the frames of the seen angles."""
    n = joint_count(joints)
    K, D, offset = servo["tip_stiffness"], servo["tip_damping"], servo["tip"]
    wanted, wanted_speed = target["tip"], target["tip_speed"]
    R, p = joints[n - 1]["rotation"], joints[n - 1]["origin"]
    x = p[0] + R[0, 0] * offset[0] + R[0, 1] * offset[1] + R[0, 2] * offset[2]
    y = p[1] + R[1, 0] * offset[0] + R[1, 1] * offset[1] + R[1, 2] * offset[2]
    z = p[2] + R[2, 0] * offset[0] + R[2, 1] * offset[1] + R[2, 2] * offset[2]
    fx = K[0] * (wanted[0] - x) + D[0] * wanted_speed[0]
    fy = K[1] * (wanted[1] - y) + D[1] * wanted_speed[1]
    fz = K[2] * (wanted[2] - z) + D[2] * wanted_speed[2]
    for i in range(n):
        S, J, speed = joints[i]["axis"], joints[i]["jacobian"], joints[i]["seen_speed"]
        # speed of the body's point at the tip: linear part at the base origin + angular part x tip
        J[0] = S[3] + S[1] * z - S[2] * y
        J[1] = S[4] + S[2] * x - S[0] * z
        J[2] = S[5] + S[0] * y - S[1] * x
        fx = fx - D[0] * J[0] * speed
        fy = fy - D[1] * J[1] * speed
        fz = fz - D[2] * J[2] * speed
    for i in range(n):
        J = joints[i]["jacobian"]
        joints[i]["asked"] = joints[i]["asked"] + J[0] * fx + J[1] * fy + J[2] * fz


@jit_inline
def add_compensation(joints: Records, servo: Records, tables: FloatArray) -> None:
    """Add the negative of the stored cog map to ``asked``.

    ``tables`` of shape (n, lanes, bins + 2) holds motor torques at even motor angles over a turn, and the first two
    again; it is looked up at the motor angle that the firmware works out of the seen joint angle.
    """
    nearest = servo["takes_nearest"] != 0.0
    for i in range(joint_count(joints)):
        joint = joints[i]
        gear = joint["gear_ratio"]
        below, part = cell_of(gear * joint["seen"] + joint["table_index"], tables.shape[2] - 2)
        if nearest:
            part = where(part >= 0.5, 1.0, 0.0)
        entry = take_own(tables, i, below)
        joint["asked"] = joint["asked"] - gear * (entry + part * (take_own(tables, i, below + 1.0) - entry))


@jit_inline
def cell_of(angle: float, cells: int) -> tuple[float, float]:
    """Find the cell of a periodic table in which a motor angle [rad] lies, and how far along in it."""
    turn = angle * (0.5 / math.pi)
    place = (turn - np.floor(turn)) * cells
    place = where((place >= 0.0) & (place <= cells), place, 0.0)  # also where the angle is not a number
    below = np.floor(place)
    return below, place - below


@jit_inline
def send_torques(joints: Records, sent: Records, period: int) -> None:
    """Cut and round what ``asked`` asks for, send it, and let act what was sent a delay ago.

    ``sent``, of one record more than the delay has whole periods, holds the torques on their way. Before the first
    period the arm was held by the first torque.
    """
    waits = sent.shape[0]
    for i in range(joint_count(joints)):
        joint = joints[i]
        asked, limit, step = joint["asked"], joint["torque_limit"], joint["torque_step"]
        joint["cut"] = where(abs(asked) > limit, 1.0, 0.0)
        command = where(asked > limit, limit, where(asked < -limit, -limit, asked))
        if step > 0.0:
            command = step * np.rint(command / step)
        joint["asked"] = command
        left = abs(command) - joint["dead_time_torque"]
        left = where(left > 0.0, left, 0.0)
        delivered = joint["torque_gain"] * where(command > 0.0, left, -left)
        if period == 0:
            for w in range(waits):
                sent[w]["torque"][i] = delivered
            joint["acts_after"] = delivered
        joint["acts_before"] = 1.0 * joint["acts_after"]
        sent[period % waits]["torque"][i] = delivered
        joint["acts_after"] = sent[(period + 1) % waits]["torque"][i]


@jit_inline
def run_servo(joints: Records, servo: Records, target: Records, tables: FloatArray, sent: Records, period: int) -> None:
    """Read encoders, work out and send the torques of one period, counted from 0."""
    at_tip, holds = servo["closes_at_tip"] != 0.0, servo["holds_weight"] != 0.0
    read_encoders(joints, servo, period == 0)
    if at_tip or holds:
        for i in range(joint_count(joints)):
            joints[i]["at"] = joints[i]["seen"]
        place(joints)
    if holds:
        hold_weight(joints, servo["free_fall"])
    for i in range(joint_count(joints)):
        joint = joints[i]
        asked = target["torque"][i] + joint["weight"]
        if not at_tip:
            asked = asked + joint["stiffness"] * (target["joint"][i] - joint["seen"])
            asked = asked + joint["damping"] * (target["joint_speed"][i] - joint["seen_speed"])
        joint["asked"] = asked
    if at_tip:
        add_tip_law(joints, servo, target)
    if servo["compensates"] != 0.0:
        add_compensation(joints, servo, tables)
    send_torques(joints, sent, period)
