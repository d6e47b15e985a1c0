"""The inner motion that a redundant arm makes while a hand leads its tip; see :mod:`armeval.kernels.led_tip`."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np

from armeval.arrays import FloatArray
from armeval.errors import InputError
from armeval.evaluate.cogging.net_cogging import net_cogging
from armeval.evaluate.feeling.hand_motion import HandMotion
from armeval.evaluate.replaying.replay_input import COG_CELLS
from armeval.kernels.chain import tip_positions
from armeval.kernels.led_tip import led_by_the_tip
from armeval.kernels.periodic import periodic_slopes, periodic_values
from armeval.kernels.records import joint_records
from armeval.model.arm import Arm
from armeval.model.trial import Compensation

_INNER_RATE = 16e3
"""Steps a second for the inner motion: where joints catch and let go, a thousand would miss the force by a fifth."""


def with_inner_motion(
    arm: Arm,
    motion: HandMotion,
    *,
    compensated: bool,
    compensation: Compensation,
    carries_weight: bool,
    seed: int = 0,
) -> HandMotion:
    """Replace the joint motion of a redundant arm by the one that its tip's motion and its own mechanics bring about.

    The tip goes as before. The arm starts in the motion's first pose and at its speed; friction, cogging, weight and
    inertia move what the tip leaves free, and stops at the ends of the joints' ranges halt it. Compensation
    acts here without the servo's delay and encoder counts, which shift its torque by far less than the index error.

    Raises
    ------
    InputError
        If the inner motion grows beyond all bounds.
    """
    parts = max(1, math.ceil(motion.period * _INNER_RATE - 1e-9))
    tip = _between(motion.tip, parts)
    k, n = len(tip), arm.chain.count
    tables = net_cogging(arm, compensated=compensated, compensation=compensation, seed=seed)
    joints = joint_records(arm.chain.arrays)
    for name in ("gear_ratio", "stribeck_speed", "coulomb_friction", "viscous_friction"):
        joints[name] = [getattr(drive, name) for drive in arm.drives]
    joints["static_friction"] = [drive.breakaway_friction for drive in arm.drives]
    joints["reflected_inertia"] = [drive.gear_ratio**2 * drive.rotor_inertia for drive in arm.drives]
    joints["index"] = [drive.index_offset for drive in arm.drives]
    joints["lower"], joints["upper"] = arm.chain.lower, arm.chain.upper
    joints["angle"], joints["speed"] = motion.joint[0], motion.joint_speed[0]
    angle, speed, friction = np.empty((k, n)), np.empty((k, n)), np.empty((k, n))
    lost = led_by_the_tip(
        arm.chain.arrays,
        joints,
        np.array(arm.gravity),
        np.stack([_cells(table) for table in tables]),
        tip,
        motion.period / parts,
        carries_weight,
        angle,
        speed,
        friction,
    )
    if lost >= 0:
        raise InputError(
            f"the arm's inner motion grows beyond all bounds {motion.time[lost // parts]:.3f} s into the hand's motion",
            "check masses and friction, or give a joint path",
        )
    change = np.empty((k, n))
    change[:-1] = np.diff(speed, axis=0) * (parts / motion.period)
    change[-1] = change[-2]
    shown = slice(None, None, parts)
    return replace(
        motion,
        tip=tip_positions(arm.chain.arrays, np.ascontiguousarray(angle[shown])),
        joint=np.ascontiguousarray(angle[shown]),
        joint_speed=speed[shown].copy(),
        joint_acceleration=change[shown].copy(),
        dry_friction=friction[shown].copy(),
    )


def _between(points: FloatArray, parts: int) -> FloatArray:
    """Give points (k, 3) with so many steps from each to the next, by a cubic spline."""
    from scipy.interpolate import CubicSpline

    number = np.arange((len(points) - 1) * parts + 1) / parts
    return np.ascontiguousarray(CubicSpline(np.arange(len(points)), points)(number))


def _cells(table: FloatArray) -> FloatArray:
    """Give a table as the kernel takes it, (2, cells + 2): torque, slope times a cell's width; the first two again."""
    cells = 4 * COG_CELLS
    at = 2.0 * np.pi * np.arange(cells) / cells
    nodes = np.stack([periodic_values(table, at), periodic_slopes(table, at) * (2.0 * np.pi / cells)])
    return np.concatenate([nodes, nodes[:, :2]], axis=1)
