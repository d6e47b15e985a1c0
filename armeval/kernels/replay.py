"""The step loop: firmware, drives and arm from servo period to servo period, for one member or for eight.

Once a period the servo reads the encoders and works out torques (:mod:`armeval.kernels.servo`), which act after its
delay. Between, the arm moves in ``substeps`` by Moreau's midpoint scheme (Moreau 1988; Studer, Leine & Glocker 2008):
half a step at the old speed, new speeds from the torques there with dry friction as a bounded impulse
(:mod:`armeval.kernels.friction`), half a step at the new speed. Where a delay ends within a step, the torques before
and after act in it by their shares of its time, so the impulse is exact. Viscous friction acts at the new speed;
Stribeck's curve is taken at the old one. A joint stop is reached by no more than the way left to it.

There is one description of all this. Compiled for plain numbers it is the single replay, compiled for numbers with
lanes (:mod:`armeval.kernels.lanes`) the ensemble: no second copy to keep in step, no generated code to read. The price
is :func:`armeval.kernels.lanes.where` in the place of a branch on a member's own numbers, and machine code of its own
for each number of joints.
"""

from __future__ import annotations

from armeval.arrays import FloatArray
from armeval.kernels.compile import jit, jit_inline
from armeval.kernels.dynamics import equations_of_motion, place
from armeval.kernels.elementary import decay
from armeval.kernels.friction import LARGEST, solve_speeds
from armeval.kernels.lanes import take, where, with_lanes
from armeval.kernels.records import Records, joint_count
from armeval.kernels.servo import cell_of, run_servo


@jit_inline
def cog_torque(joint: Records, cogging: FloatArray, i: int) -> float:
    """Give the cogging torque at joint ``i`` for its angle ``at``.

    ``cogging`` of shape (n, 2, cells + 2) holds the motor torque, and its slope times the width of a cell, at even
    motor angles over a turn, and the first two again; between them it is cubic (Hermite), so both are continuous.
    """
    gear = joint["gear_ratio"]
    below, f = cell_of(gear * joint["at"] + joint["index"], cogging.shape[2] - 2)
    a, b = take(cogging, i, 0, below), take(cogging, i, 0, below + 1.0)
    s, t = take(cogging, i, 1, below), take(cogging, i, 1, below + 1.0)
    rise = b - a
    torque = a + f * (s + f * ((3.0 * rise - 2.0 * s - t) + f * (s + t - 2.0 * rise)))
    at_joint: float = gear * joint["cog_gain"] * torque
    return at_joint


@jit_inline
def step_arm(joints: Records, cogging: FloatArray, free_fall: FloatArray, step: float, share: float) -> int:
    """Move the arm by one step, in which ``acts_after`` acts for ``share`` of the time and ``acts_before`` else."""
    n = joint_count(joints)
    half = 0.5 * step
    for i in range(n):
        joints[i]["at"] = joints[i]["angle"] + half * joints[i]["speed"]
    place(joints)
    equations_of_motion(joints, free_fall)
    for i in range(n):
        joint = joints[i]
        at, before, matrix = joint["at"], joint["acts_before"], joint["matrix"]
        torque = before + share * (joint["acts_after"] - before) - joint["bias"] + cog_torque(joint, cogging, i)
        pushed = step * torque
        for j in range(n):
            pushed = pushed + matrix[j] * joints[j]["speed"]
        joint["pushed"] = pushed
        pace = joint["speed"] * (1.0 / joint["stribeck_speed"])
        coulomb = joint["coulomb_friction"]
        joint["friction"] = step * (coulomb + (joint["static_friction"] - coulomb) * decay(pace * pace))
        slowest, fastest = (joint["lower"] - at) * (1.0 / step), (joint["upper"] - at) * (1.0 / step)
        joint["slowest"] = where(slowest < -LARGEST, -LARGEST, where(slowest > 0.0, 0.0, slowest))
        joint["fastest"] = where(fastest > LARGEST, LARGEST, where(fastest < 0.0, 0.0, fastest))
    for i in range(n):
        joints[i]["matrix"][i] += step * joints[i]["viscous_friction"]
    passes = solve_speeds(joints)
    for i in range(n):
        joint = joints[i]
        speed = joint["new_speed"]
        joint["angle"] = joint["at"] + half * speed
        joint["speed"] = speed
    return passes


@jit
def replay_lap(
    joint_records: Records,
    servo_records: Records,
    targets: Records,
    substeps: int,
    cogging: FloatArray,
    tables: FloatArray,
    sent_records: Records,
    lap_records: Records,
) -> int:
    """Replay one lap of one member or of eight.

    Parameters
    ----------
    joint_records
        Shape (n,), with the start in ``angle`` and ``speed``.
    servo_records, targets
        Shape (1,): the servo. Shape (s + k,): what it is told in s periods of settling and the lap's k periods.
    substeps
        Time steps in a servo period.
    cogging, tables, sent_records
        As :func:`cog_torque`, :func:`armeval.kernels.servo.add_compensation` and
        :func:`armeval.kernels.servo.send_torques` take them.
    lap_records
        Shape (k,), overwritten: how the lap went.

    Returns
    -------
    -1, or the period, settling included, in which the state stopped being a number.
    """
    joints, sent, lap = with_lanes(joint_records), with_lanes(sent_records), with_lanes(lap_records)
    servo = servo_records[0]
    settling = targets.shape[0] - lap.shape[0]
    step = servo["period"] / substeps
    for period in range(targets.shape[0]):
        run_servo(joints, servo, targets[period], tables, sent, period)
        if period >= settling:
            row = lap[period - settling]
            for i in range(joint_count(joints)):
                joint = joints[i]
                row["angle"][i] = joint["angle"]
                row["speed"][i] = joint["speed"]
                row["torque"][i] = joint["asked"]
                row["cut"][i] = joint["cut"]
                row["rests"][i] = where(joint["state"] == 0.0, 1.0, 0.0)
        for s in range(substeps):
            share = min(max(s + 1.0 - servo["delay_share"] * substeps, 0.0), 1.0)
            if step_arm(joints, cogging, servo["free_fall"], step, share) == 0:
                return period
    return -1
