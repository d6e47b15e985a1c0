"""A joint dragged slowly by its position servo over cogging torque and dry friction.

Moved slowly enough, nothing but these act: the servo's pull K (target - q), the cogging torque tau(q), a constant load
and dry friction. The joint rests while their sum stays within static friction; else it moves, in the direction d of the
sum, until the sum is down to Coulomb friction again. The target at which the sum at q just equals d F is

    d * needed(q) = d q + (F - d (tau(q) + load)) / K

so the joint follows the target where `d needed` rises along its way, and where it falls (d tau / dq > K) it jumps, with
the target standing still, to the next place where `d needed` is as high again: the Prandtl-Tomlinson model with
friction. A motion without inertia ends at the first such place; a rotor with inertia may go further.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np

from armeval.arrays import FloatArray, IntArray, read_only
from armeval.kernels.compile import jit, jit_part
from armeval.kernels.periodic import periodic_slope, periodic_value

_MOST_STEPS = 1e6
"""So far a jump is looked through where the joint has no limit."""

_ROUNDING = 4e-16
_FINEST_SLIP = 0.01
"""Slips of pure friction shorter than this share of the step are taken as sliding."""


class DraggedJoint(NamedTuple):
    """One joint and its position servo.

    Attributes
    ----------
    stiffness
        Of the servo, above 0 [N m/rad].
    coulomb, static
        Friction torques [N m], coulomb <= static.
    gear, index_offset
        The motor's mechanical angle is ``gear * q + index_offset``.
    lower, upper
        The joint's range [rad]; it stops there.
    table
        Shape (m, 2). Cogging torque on the motor side, as :func:`armeval.kernels.periodic.hermite_table` makes it.
    """

    stiffness: float
    coulomb: float
    static: float
    gear: float
    index_offset: float
    lower: float
    upper: float
    table: FloatArray


@jit_part
def _needed(joint: DraggedJoint, s: float, d: float, friction: float, load: float) -> float:
    """Target at which the joint at q = d s is just about to slide, times the direction d."""
    torque = joint.gear * periodic_value(joint.table, joint.gear * d * s + joint.index_offset) + load
    needed: float = s + (friction - d * torque) / joint.stiffness
    return needed


@jit_part
def _follows(joint: DraggedJoint, s: float, d: float) -> bool:
    """Whether the joint at q = d s moves on as its target does."""
    slope = joint.gear * joint.gear * periodic_slope(joint.table, joint.gear * d * s + joint.index_offset)
    follows: bool = slope < joint.stiffness
    return follows


@jit_part
def _fold_between(joint: DraggedJoint, low: float, high: float, d: float) -> float:
    """Where the joint stops following: it does at low, it does not at high."""
    middle = 0.5 * (low + high)
    while low < middle < high:
        if _follows(joint, middle, d):
            low = middle
        else:
            high = middle
        middle = 0.5 * (low + high)
    return high


@jit_part
def _place_between(
    joint: DraggedJoint, low: float, high: float, goal: float, d: float, friction: float, load: float
) -> float:
    """Where the needed target comes to the goal: below it at low, not at high (regula falsi, Illinois variant)."""
    below = _needed(joint, low, d, friction, load) - goal
    above = _needed(joint, high, d, friction, load) - goal
    rounding = _ROUNDING * max(abs(goal), 1.0)
    last = 0
    while above > rounding and high - low > rounding:
        s = low + (high - low) * (below / (below - above))
        miss = _needed(joint, s, d, friction, load) - goal
        if miss < 0.0:
            low, below = s, miss
            above *= 0.5 if last < 0 else 1.0
            last = -1
            if miss > -rounding:
                return s
        else:
            high, above = s, miss
            below *= 0.5 if last > 0 else 1.0
            last = 1
    return high


@jit_part
def _end_of_jump(
    joint: DraggedJoint, start: float, goal: float, d: float, friction: float, load: float, step: float
) -> float:
    """First place beyond start at which the needed target comes to the goal from below; at most the joint's limit."""
    last = min(joint.upper if d > 0.0 else -joint.lower, start + _MOST_STEPS * step)
    low, high = start, start + step
    while _needed(joint, high, d, friction, load) < goal:
        if high >= last:
            return last
        low, high = high, high + step
    if _needed(joint, low, d, friction, load) >= goal:
        return high  # a jump shorter than the step
    return _place_between(joint, low, high, goal, d, friction, load)


def follow_target(
    joint: DraggedJoint, target: FloatArray, load: FloatArray, start: float, step: float, least_jump: float
) -> tuple[FloatArray, IntArray, FloatArray]:
    """Follow one joint along its targets.

    Parameters
    ----------
    joint
        The joint and its servo.
    target
        Shape (k,) [rad]. Joint targets.
    load
        Shape (k,) [N m]. Torque on the joint beside servo, cogging and friction.
    start
        Angle [rad] at which the joint rests before the first target.
    step
        Joint angle [rad] in which jumps are looked through: a small part of the shortest cogging period.
    least_jump
        Smallest jump [rad] that is listed.

    Returns
    -------
    angle
        Shape (k,) [rad]. Where the joint rests at each target.
    sample
        Shape (j,). For each jump, the first sample after it.
    jump
        Shape (j, 2) [rad]. Angles before and after each jump.
    """
    angle, most = np.empty(len(target)), 64
    joint = joint._replace(table=read_only(joint.table))
    while True:
        sample, jump = np.empty(most, np.int64), np.empty((most, 2))
        jumps = _follow_target(joint, read_only(target), read_only(load), start, step, least_jump, angle, sample, jump)
        if jumps <= most:
            return angle, sample[:jumps], jump[:jumps]
        most = jumps


@jit
def _follow_target(
    joint: DraggedJoint,
    target: FloatArray,
    load: FloatArray,
    start: float,
    step: float,
    least_jump: float,
    angle: FloatArray,
    sample: IntArray,
    jump: FloatArray,
) -> int:
    """Fill in the angles, and the jumps as far as there is room; give the number of all jumps."""
    k = target.shape[0]
    jumps = 0
    slides = joint.static - joint.coulomb <= _FINEST_SLIP * joint.stiffness * step
    q = start
    for i in range(k):
        torque = joint.gear * periodic_value(joint.table, joint.gear * q + joint.index_offset) + load[i]
        pull = joint.stiffness * (target[i] - q) + torque
        d = 1.0 if pull > 0.0 else -1.0
        s, goal, last = d * q, d * target[i], joint.upper if d > 0.0 else -joint.lower
        at = _needed(joint, s, d, joint.static, load[i]) if abs(pull) > joint.static else goal
        while at < goal and s < last:
            if slides and _follows(joint, s, d):
                ahead = s + step
                if not _follows(joint, ahead, d):
                    ahead = _fold_between(joint, s, ahead, d)
                if _needed(joint, ahead, d, joint.static, load[i]) >= goal:
                    s = _place_between(joint, s, ahead, goal, d, joint.static, load[i])
                    break
                s = min(ahead, last)
            else:
                friction = joint.static if slides else joint.coulomb
                end = _end_of_jump(joint, s, at, d, friction, load[i], step)
                if end - s > least_jump:
                    if jumps < sample.shape[0]:
                        sample[jumps] = i
                        jump[jumps, 0], jump[jumps, 1] = d * s, d * end
                    jumps += 1
                s = end
            at = _needed(joint, s, d, joint.static, load[i])
        q = d * min(s, last)
        angle[i] = q
    return jumps
