"""The force that a hand meets at the tip, and where it comes from.

With the drives idle, or only taking cogging off and carrying the weight, the hand's force F holds the rest of the
equations of motion in balance,

    J^T F = M q'' + h - tau_drive - tau_cog + tau_friction,

with J^T undone as in :mod:`armeval.evaluate.feeling.tip_directions`. Every term is linear in F, so each joint's
torque of each kind has its own force, and they add up. A force with the motion is one that the hand must exert: it is
held back.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

import numpy as np

from armeval.arrays import FloatArray
from armeval.evaluate.cogging.cog_loss import compensation_table, lookup
from armeval.evaluate.cogging.net_cogging import net_cogging
from armeval.evaluate.feeling.hand_motion import HandMotion, rest_speeds
from armeval.evaluate.feeling.tip_directions import TipDirections, tip_directions
from armeval.kernels.dynamics import mass_matrix_and_bias
from armeval.kernels.periodic import periodic_values
from armeval.model.arm import Arm
from armeval.model.drive import Drive
from armeval.model.trial import Compensation

Part = Literal["cogging", "friction", "inertia", "gravity", "command"]
PARTS: tuple[Part, ...] = ("cogging", "friction", "inertia", "gravity", "command")
"""Cogging that compensation leaves; dry and viscous friction; mass and rotors; weight that the drives do not carry;
what torque limit, torque step and dead time take from the command."""


@dataclass(frozen=True, eq=False)
class HandForce:
    """The force that a hand meets, k samples along its motion, n joints.

    Attributes
    ----------
    motion
        What the hand leads the arm through.
    directions
        What the joints are to the tip there.
    compensated, carries_weight
        What the drives do.
    torque
        Shape (5, k, n) [N m]. Joint torque that each of the ``PARTS`` asks of the hand.
    band
        Shape (k,) [N]. Where a joint rests or turns round, dry friction is anything up to its bound: so far may the
        force be off. While the tip moves that is across the motion: a joint that rests does no work.
    """

    motion: HandMotion
    directions: TipDirections
    compensated: bool
    carries_weight: bool
    torque: FloatArray
    band: FloatArray

    def part(self, part: Part) -> FloatArray:
        """Shape (k, 3) [N] in the base frame: force of one kind; NaN where it cannot be had."""
        return self._shown(self.forces(part).sum(axis=1), part)

    def forces(self, part: Part) -> FloatArray:
        """Shape (k, n, 3) [N]. The same by joint, zero where it cannot be had."""
        torque = self.torque[PARTS.index(part)]
        return np.asarray((self.directions.torque_to_force * torque[:, None, :]).transpose(0, 2, 1))

    @property
    def total(self) -> FloatArray:
        """Shape (k, 3) [N]. All of it; NaN where it cannot be had."""
        force = np.einsum("kri,pki->kr", self.directions.torque_to_force, self.torque)
        return self._shown(force, "inertia")

    def _shown(self, force: FloatArray, part: Part) -> FloatArray:
        withheld = self.directions.singular | (self.motion.jolts if part == "inertia" else False)
        return np.where(withheld[:, None], np.nan, force)

    def along(self, force: FloatArray) -> FloatArray:
        """Shape (k,) [N]. Part of a force (k, 3) along the motion; positive holds the hand back."""
        return np.asarray(np.einsum("kr,kr->k", force, self.motion.direction))

    def across(self, force: FloatArray) -> FloatArray:
        """Shape (k,) [N]. Size of the part of a force (k, 3) across the motion."""
        rest = force - self.along(force)[:, None] * self.motion.direction
        return np.asarray(np.linalg.norm(rest, axis=1))


def hand_force(
    arm: Arm,
    motion: HandMotion,
    *,
    compensated: bool = False,
    compensation: Compensation | None = None,
    carries_weight: bool | None = None,
    seed: int = 0,
    directions: TipDirections | None = None,
) -> HandForce:
    """Work out the force that a hand meets along a motion.

    Parameters
    ----------
    arm
        The arm, n joints.
    motion
        What the hand leads it through; for a redundant arm with its inner motion, if that is not given.
    compensated
        Whether the drives take the stored cog maps off, at the angle that the firmware sees, after the servo's delay.
    compensation
        What the firmware's table can do; its index error counts with one standard deviation at each joint.
    carries_weight
        Whether the drives carry the arm's weight; None: as the servo does.
    seed
        Of the noise on the table.
    directions
        What the joints are to the tip, where that is known already.
    """
    law = Compensation() if compensation is None else compensation
    carries = arm.servo.gravity_feedforward if carries_weight is None else carries_weight
    at = tip_directions(arm, motion.joint) if directions is None else directions
    _, bias, weight = mass_matrix_and_bias(arm.chain.arrays, np.array(arm.gravity), motion.joint, motion.joint_speed)
    seen = seen_angles(arm, motion)
    cogging = cogging_torque(arm, motion.joint)
    fed = np.zeros_like(cogging)
    if carries:
        fed = mass_matrix_and_bias(arm.chain.arrays, np.array(arm.gravity), seen, np.zeros_like(seen))[2]
    off = stored_torque(arm, seen, law, seed) if compensated else np.zeros_like(cogging)
    asked = fed - off
    delivered = np.column_stack([deliver(drive, asked[:, i]) for i, drive in enumerate(arm.drives)])
    dry, band = _dry_friction(arm, motion)
    viscous = motion.joint_speed * [drive.viscous_friction for drive in arm.drives]
    inertia = np.einsum("kij,kj->ki", at.inertia, motion.joint_acceleration) + bias - weight
    return HandForce(
        motion=motion,
        directions=at,
        compensated=compensated,
        carries_weight=carries,
        torque=np.stack([off - cogging, dry + viscous, inertia, weight - fed, asked - delivered]),
        band=np.asarray((np.linalg.norm(at.torque_to_force, axis=1) * band).sum(axis=1)),
    )


def seen_angles(arm: Arm, motion: HandMotion) -> FloatArray:
    """Shape (k, n). Joint angles that the torque acting now goes by: as old as the servo's delay, in whole counts."""
    late = motion.time - arm.servo.delay
    seen = np.column_stack([np.interp(late, motion.time, column) for column in motion.joint.T])
    count = arm.resolution
    return np.ascontiguousarray(np.where(count > 0.0, np.rint(seen / np.where(count > 0.0, count, 1.0)) * count, seen))


def motor_angles(arm: Arm, joint: FloatArray) -> FloatArray:
    """Shape (k, n) [rad]. Mechanical angles of the motors."""
    return np.asarray(joint * arm.gear_ratio + [drive.index_offset for drive in arm.drives])


def cogging_torque(arm: Arm, joint: FloatArray) -> FloatArray:
    """Shape (k, n) [N m]. Cogging torque at the joints."""
    angle = motor_angles(arm, joint)
    columns = [
        drive.gear_ratio * periodic_values(table, np.ascontiguousarray(angle[:, i]))
        for i, (drive, table) in enumerate(zip(arm.drives, net_cogging(arm), strict=True))
    ]
    return np.column_stack(columns)


def stored_torque(arm: Arm, seen: FloatArray, law: Compensation, seed: int | None) -> FloatArray:
    """Shape (k, n) [N m]. Torque that the firmware's tables hold against, at the joint; seed None: free of noise."""
    rng = None if seed is None else np.random.default_rng(seed)
    angle = motor_angles(arm, seen) + law.index_error
    torque = np.zeros_like(seen)
    for i, drive in enumerate(arm.drives):
        if drive.cog_map is not None:
            table = compensation_table(drive.cog_map, law, rng)
            torque[:, i] = drive.gear_ratio * lookup(table, angle[:, i], law.interpolation)
    return torque


def deliver(drive: Drive, asked: FloatArray) -> FloatArray:
    """Shape (k,) [N m]. What a drive makes of the torque asked for: cut, in steps, less the dead time's loss."""
    torque = np.clip(asked, -drive.torque_limit, drive.torque_limit)
    if drive.torque_step > 0.0:
        torque = drive.torque_step * np.rint(torque / drive.torque_step)
    return np.asarray(np.sign(torque) * np.maximum(np.abs(torque) - drive.dead_time_torque, 0.0))


def _dry_friction(arm: Arm, motion: HandMotion) -> tuple[FloatArray, FloatArray]:
    """Torque of dry friction against the motion (k, n), and how far it may be off where a joint rests (k, n)."""
    coulomb = np.array([drive.coulomb_friction for drive in arm.drives])
    breakaway = np.array([drive.breakaway_friction for drive in arm.drives])
    slow = np.array([drive.stribeck_speed for drive in arm.drives])
    speed = motion.joint_speed
    rests = np.abs(speed) < rest_speeds(arm)
    bound = coulomb + (breakaway - coulomb) * np.exp(-((speed / slow) ** 2))
    band = np.where(rests, breakaway, 0.0)
    if motion.dry_friction is not None:
        still = rests.all(axis=1, keepdims=True)
        return motion.dry_friction, np.where(still, band, 0.0)
    return np.where(rests, 0.0, np.sign(speed) * bound), band
