"""The inner motion of a redundant arm whose tip a hand leads: what the joints do that the tip does not show.

The hand holds the tip so firmly that it is where the hand wants it at the end of every step: an impulse c (w - J v),
with w the speed that the tip needs, adds c J^T J to the inertia and c J^T w to the momentum of an otherwise implicit
step. c is so large against the tip's apparent mass that the tip misses its place by picometres. Dry
friction is the bounded impulse of :mod:`armeval.kernels.friction`, so that joints which the inner motion leaves alone
rest exactly: while the tip moves, friction holds the inner motion wherever less than its bound is needed for that.
"""

from __future__ import annotations

import numpy as np

from armeval.arrays import FloatArray
from armeval.kernels.chain import ChainArrays, joint_frames, tip_jacobian, tip_position
from armeval.kernels.compile import jit
from armeval.kernels.dynamics import equations_of_motion, hold_weight, place
from armeval.kernels.friction import LARGEST, solve_speeds
from armeval.kernels.records import Records
from armeval.kernels.replay import cog_torque

FIRMNESS = 1e4
"""The hand's c, over the largest apparent mass that the joints' inertia lets expect."""


@jit
def led_by_the_tip(
    chain: ChainArrays,
    joints: Records,
    free_fall: FloatArray,
    cogging: FloatArray,
    tip: FloatArray,
    step: float,
    carries_weight: bool,
    angle: FloatArray,
    speed: FloatArray,
    friction: FloatArray,
) -> int:
    """Lead the tip of an arm whose drives do nothing but carry the weight and take cogging off.

    Parameters
    ----------
    chain
        The chain, n joints.
    joints
        Shape (n,). Records of one lane, with the start in ``angle`` and ``speed``.
    free_fall
        Shape (3,) [m/s^2].
    cogging
        Shape (n, 2, cells + 2). What is left of the cogging, as :func:`armeval.kernels.replay.cog_torque` takes it.
    tip
        Shape (k, 3) [m]. Where the tip is led, one row a step.
    step
        [s].
    carries_weight
        Whether the drives carry the arm's weight.
    angle, speed, friction
        Shape (k, n), overwritten: joint angles, speeds, and the torque of dry friction and of stops against the motion.

    Returns
    -------
    -1, or the step in which the state stopped being a number.
    """
    k, n = angle.shape
    rotation, origin = np.empty((n, 3, 3)), np.empty((n, 3))
    at, here = np.empty(n), np.empty(3)
    J = np.empty((3, n))
    for s in range(k):
        for i in range(n):
            angle[s, i], speed[s, i] = joints[i]["angle"], joints[i]["speed"]
            at[i] = joints[i]["angle"]
            joints[i]["at"] = at[i]
        place(joints)
        hold_weight(joints, free_fall)
        equations_of_motion(joints, free_fall)
        joint_frames(chain, at, rotation, origin)
        tip_position(chain, rotation, origin, here)
        tip_jacobian(chain, rotation, origin, here, J)
        following = min(s + 1, k - 1)
        heaviest = 0.0
        for i in range(n):
            lever = J[0, i] * J[0, i] + J[1, i] * J[1, i] + J[2, i] * J[2, i]
            if lever > 0.0:
                heaviest = max(heaviest, joints[i]["matrix"][i] / lever)
        firm = FIRMNESS * heaviest
        for i in range(n):
            joint = joints[i]
            torque = cog_torque(joint, cogging, i) - joint["bias"]
            if carries_weight:
                torque += joint["weight"]
            pushed = step * torque
            for j in range(n):
                pushed += joint["matrix"][j] * joints[j]["speed"]
            for r in range(3):
                pushed += firm * J[r, i] * (tip[following, r] - here[r]) / step
            joint["pushed"] = pushed
            pace = joint["speed"] / joint["stribeck_speed"]
            coulomb = joint["coulomb_friction"]
            joint["friction"] = step * (coulomb + (joint["static_friction"] - coulomb) * np.exp(-pace * pace))
            joint["slowest"] = max(-LARGEST, min(0.0, (joint["lower"] - at[i]) / step))
            joint["fastest"] = min(LARGEST, max(0.0, (joint["upper"] - at[i]) / step))
        for i in range(n):
            joints[i]["matrix"][i] += step * joints[i]["viscous_friction"]
            for j in range(n):
                joints[i]["matrix"][j] += firm * (J[0, i] * J[0, j] + J[1, i] * J[1, j] + J[2, i] * J[2, j])
        if solve_speeds(joints) == 0:
            return s
        for i in range(n):
            joint = joints[i]
            load = joint["pushed"]
            for j in range(n):
                load -= joint["matrix"][j] * joints[j]["new_speed"]
            sign = joint["state"]
            friction[s, i] = (sign * joint["friction"] if abs(sign) == 1.0 else load) / step
            joint["speed"] = joint["new_speed"]
            joint["angle"] += step * joint["new_speed"]
    return -1
