"""The step loop: firmware, drives and arm from servo period to servo period.

Once a period the servo reads the encoders and works out torques (:mod:`armeval.kernels.servo`), which act after its
delay. Between, the arm moves in ``substeps`` of length d by Moreau's midpoint scheme (Moreau 1988; Studer, Leine &
Glocker 2008): half a step at the old speed, new speeds from the torques there with dry friction as a bounded impulse
(:mod:`armeval.kernels.friction`), half a step at the new speed. Viscous friction acts at the new speed.
"""

from __future__ import annotations

import math

from armeval.arrays import BoolArray, FloatArray
from armeval.kernels.compile import jit, jit_inline
from armeval.kernels.dynamics import equations_of_motion, place
from armeval.kernels.friction import solve_speeds
from armeval.kernels.joint_record import Records
from armeval.kernels.servo import ServoArrays, Targets, run_servo


@jit_inline
def add_cogging(joints: Records, cogging: FloatArray, step: float) -> None:
    """Add the impulse of the cogging torque at the joint angles ``at`` to ``pushed``.

    ``cogging`` of shape (n, c + 2, 2) holds the motor torque and its slope times the spacing at c even motor angles
    over a turn, and the first two again; between them it is cubic (Hermite), so torque and slope are continuous.
    """
    for i in range(joints.shape[0]):
        joint = joints[i]
        gear, at, index, gain, pushed = (
            joint["gear_ratio"],
            joint["at"],
            joint["index"],
            joint["cog_gain"],
            joint["pushed"],
        )
        cells = cogging.shape[1] - 2
        for m in range(at.shape[0]):
            turn = (gear * at[m] + index[m]) * (0.5 / math.pi)
            place_in = (turn - math.floor(turn)) * cells
            k = int(place_in)
            f = place_in - k
            a, b, s, t = cogging[i, k, 0], cogging[i, k + 1, 0], cogging[i, k, 1], cogging[i, k + 1, 1]
            torque = a + f * (s + f * (3.0 * (b - a) - 2.0 * s - t + f * (s + t - 2.0 * (b - a))))
            pushed[m] += step * gear * gain[m] * torque


@jit_inline
def step_arm(joints: Records, cogging: FloatArray, free_fall: FloatArray, step: float, share: float) -> int:
    """Move the arm by one step, in which ``act_after`` acts for ``share`` of the time and ``act_before`` else."""
    n = joints.shape[0]
    half = 0.5 * step
    for i in range(n):
        joint = joints[i]
        at, angle, speed = joint["at"], joint["angle"], joint["speed"]
        for m in range(at.shape[0]):
            at[m] = angle[m] + half * speed[m]
    place(joints)
    equations_of_motion(joints, free_fall)
    for i in range(n):
        joint = joints[i]
        at, speed, pushed, row = joint["at"], joint["speed"], joint["pushed"], joint["matrix"]
        before, after, bias, friction = joint["act_before"], joint["act_after"], joint["bias"], joint["friction"]
        slowest, fastest = joint["slowest"], joint["fastest"]
        coulomb, static, stribeck, viscous = (
            joint["coulomb_friction"],
            joint["static_friction"],
            joint["stribeck_speed"],
            joint["viscous_friction"],
        )
        lower, upper = joint["lower"], joint["upper"]
        for m in range(at.shape[0]):
            pushed[m] = step * (before[m] + share * (after[m] - before[m]) - bias[m])
        for j in range(n):
            other = joints[j]["speed"]
            for m in range(at.shape[0]):
                pushed[m] += row[j, m] * other[m]
        for m in range(at.shape[0]):
            row[i, m] += step * viscous[m]
            friction[m] = step * (coulomb[m] + (static[m] - coulomb[m]) * math.exp(-((speed[m] / stribeck) ** 2)))
            slowest[m] = min((lower - at[m]) / step, 0.0)
            fastest[m] = max((upper - at[m]) / step, 0.0)
    add_cogging(joints, cogging, step)
    passes = solve_speeds(joints)
    for i in range(n):
        joint = joints[i]
        at, angle, speed, new = joint["at"], joint["angle"], joint["speed"], joint["new_speed"]
        for m in range(at.shape[0]):
            angle[m] = at[m] + half * new[m]
            speed[m] = new[m]
    return passes


@jit
def replay_lap(
    joints: Records,
    servo: ServoArrays,
    targets: Targets,
    cogging: FloatArray,
    table: FloatArray,
    angle: FloatArray,
    speed: FloatArray,
    torque: FloatArray,
    saturated: BoolArray,
    resting: BoolArray,
) -> int:
    """Replay one lap.

    Parameters
    ----------
    joints
        Shape (n,), with the start in ``angle`` and ``speed``.
    servo, targets
        The servo and what it is told, k periods.
    cogging, table
        As :func:`add_cogging` and :func:`armeval.kernels.servo.run_servo` take them.
    angle, speed, torque, saturated, resting
        Shape (k, n, lanes), overwritten: joint angles and speeds at the start of each period, the torque commanded
        there, whether it was cut at the limit, and whether the joint was at rest.

    Returns
    -------
    -1, or the period in which the state stopped being a number.
    """
    n = joints.shape[0]
    periods = targets.joint.shape[0]
    step = servo.period / servo.substeps
    for k in range(-servo.settle, periods):
        run_servo(joints, servo, targets, table, k, k == -servo.settle)
        if k >= 0:
            for i in range(n):
                joint = joints[i]
                for m in range(angle.shape[2]):
                    angle[k, i, m] = joint["angle"][m]
                    speed[k, i, m] = joint["speed"][m]
                    torque[k, i, m] = joint["ask"][m]
                    saturated[k, i, m] = joint["cut"][m] != 0.0
                    resting[k, i, m] = joint["state"][m] == 0.0
        for s in range(servo.substeps):
            share = min(max(s + 1.0 - servo.delay_share * servo.substeps, 0.0), 1.0)
            if step_arm(joints, cogging, servo.free_fall, step, share) == 0:
                return max(k, 0)
    return -1
