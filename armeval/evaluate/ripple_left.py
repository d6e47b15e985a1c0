"""What compensation leaves of the ripple, why, and how that varies from one start of the arm to the next."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from armeval.arrays import FloatArray
from armeval.evaluate.cog_loss import compensation_table, lookup
from armeval.evaluate.document import JsonValue
from armeval.evaluate.hand_force import HandForce, cogging_torque, motor_angles, seen_angles, stored_torque
from armeval.evaluate.ripple import rms_over_way
from armeval.model.arm import Arm
from armeval.model.trial import Compensation


@dataclass(frozen=True)
class LeftBy:
    """RMS ripple [N] that compensation would leave if this were the only thing wrong with it."""

    cause: str
    rms: float


def left_by(arm: Arm, force: HandForce, compensation: Compensation, *, seed: int = 0) -> tuple[LeftBy, ...]:
    """Take apart what compensation leaves, cause by cause, largest first.

    Each cause acts alone: a table out of step by the index error; a table of so many bins; its noise; the servo's delay
    and whole encoder counts; and torque limit, torque step and dead time. Their squares need not add up.

    Parameters
    ----------
    arm, force
        The force is one of this arm, compensated.
    compensation, seed
        As the force was worked out with.
    """
    motion = force.motion
    in_step = replace(compensation, index_error=0.0)
    true = cogging_torque(arm, motion.joint)
    gear = np.where(arm.gear_ratio != 0.0, arm.gear_ratio, 1.0)
    exact_table = stored_torque(arm, motion.joint, in_step, None)
    causes = {
        "index error": cogging_torque(arm, motion.joint + compensation.index_error / gear) - true,
        "size of the table": exact_table - true,
        "noise of the map": stored_torque(arm, motion.joint, in_step, seed) - exact_table,
        "delay and encoder counts": cogging_torque(arm, seen_angles(arm, motion)) - true,
        "torque limit, step and dead time": force.torque[-1],
    }
    parts = [LeftBy(cause, _rms(force, torque)) for cause, torque in causes.items()]
    return tuple(sorted(parts, key=lambda part: -part.rms))


@dataclass(frozen=True, eq=False)
class RippleSpread:
    """RMS ripple of many members of an ensemble that differ in what nobody knows beforehand.

    Attributes
    ----------
    rms
        Shape (members,) [N], rising.
    """

    rms: FloatArray

    @property
    def median(self) -> float:
        """Half of the members are below [N]."""
        return float(np.median(self.rms))

    @property
    def low(self) -> float:
        """One member in twenty is below [N]."""
        return float(np.quantile(self.rms, 0.05))

    @property
    def high(self) -> float:
        """One member in twenty is above [N]."""
        return float(np.quantile(self.rms, 0.95))

    def to_document(self) -> dict[str, JsonValue]:
        """Give the entry of the JSON document."""
        return {"members": len(self.rms), "rms_N": self.median, "rms_low_N": self.low, "rms_high_N": self.high}


def ripple_spread(
    arm: Arm, force: HandForce, compensation: Compensation, *, members: int = 64, seed: int = 0
) -> RippleSpread:
    """Let index error and noise of the table vary: each member finds its index anew and has measured its own map.

    Every joint's index error is drawn from a normal distribution with the compensation's one sigma, the noise of each
    entry of its table with the map's. The motion stays that of ``force``.

    Parameters
    ----------
    arm, force
        The force is one of this arm, compensated.
    compensation
        What the firmware's table can do.
    members, seed
        How many, and the seed of the draws.
    """
    rng = np.random.default_rng(seed)
    motion = force.motion
    angle = motor_angles(arm, seen_angles(arm, motion))
    true = cogging_torque(arm, motion.joint)
    rms = np.empty(members)
    for member in range(members):
        off = np.zeros_like(true)
        for i, drive in enumerate(arm.drives):
            if drive.cog_map is not None:
                table = compensation_table(drive.cog_map, compensation, rng)
                shifted = angle[:, i] + compensation.index_error * rng.standard_normal()
                off[:, i] = drive.gear_ratio * lookup(table, shifted, compensation.interpolation)
        rms[member] = _rms(force, off - true)
    return RippleSpread(np.sort(rms))


def _rms(force: HandForce, torque: FloatArray) -> float:
    """RMS [N] at the tip, over the way, of joint torques (k, n)."""
    vector = np.einsum("kri,ki->kr", force.directions.torque_to_force, torque)
    return rms_over_way(vector, np.where(force.directions.singular, 0.0, force.motion.weights))
