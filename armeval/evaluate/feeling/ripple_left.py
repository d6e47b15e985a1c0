"""What compensation leaves of the ripple, why, and how that varies from one start of the arm to the next."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from armeval.arrays import FloatArray
from armeval.evaluate.cogging.cog_loss import lookup
from armeval.evaluate.cogging.net_cogging import net_cogging
from armeval.evaluate.document import JsonValue
from armeval.evaluate.feeling.hand_force import HandForce, cogging_torque, seen_angles, stored_torque
from armeval.evaluate.feeling.ripple import rms_over_way
from armeval.evaluate.replaying.members import clean_tables, drawn_member
from armeval.kernels.periodic import periodic_values
from armeval.model.arm import Arm
from armeval.model.spreads import Spreads
from armeval.model.trial import Compensation

_SAMPLES = 4000
"""Samples of the motion that each member is looked at: enough for an RMS over many detents."""


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
    """RMS ripple of many possible arms that differ in what nobody knows exactly.

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
    def interval(self) -> tuple[float, float]:
        """Between these [N] lies the RMS ripple of 95 % of the members."""
        low, high = np.percentile(self.rms, (2.5, 97.5))
        return float(low), float(high)

    def to_document(self) -> dict[str, JsonValue]:
        """Give the entry of the JSON document."""
        low, high = self.interval
        return {"members": len(self.rms), "rms_N": {"median": self.median, "low": low, "high": high}}


def ripple_spread(
    arm: Arm,
    force: HandForce,
    compensation: Compensation,
    *,
    spreads: Spreads | None = None,
    members: int = 200,
    seed: int = 0,
) -> RippleSpread:
    """Let rotor index, noise of the stored map and torque constant differ from member to member, as a prediction does.

    Parameters
    ----------
    arm, force
        The force is one of this arm, compensated. Its motion is every member's, and so is what is singular.
    compensation, spreads
        What the firmware's table can do, and how far the members differ.
    members, seed
        How many, and the seed of the draws.
    """
    rng = np.random.default_rng(seed)
    some = slice(None, None, max(1, len(force.motion.time) // _SAMPLES))
    joint, seen = force.motion.joint[some], seen_angles(arm, force.motion)[some]
    gear = arm.gear_ratio
    clean = clean_tables(arm, compensation)
    true_tables = net_cogging(arm)
    rms = np.empty(members)
    for number in range(members):
        drawn = drawn_member(arm, compensation, spreads or Spreads(), joint[0], clean, rng)
        left = np.empty_like(joint)
        for i in range(len(gear)):
            turned = np.ascontiguousarray(gear[i] * joint[:, i] + drawn.rotor_index[i])
            looked_up = gear[i] * seen[:, i] + drawn.table_index[i]
            fed = lookup(drawn.tables[i], looked_up, compensation.interpolation)
            left[:, i] = gear[i] * (drawn.torque_gain[i] * fed - periodic_values(true_tables[i], turned))
        rms[number] = _rms(force, left, some)
    return RippleSpread(np.sort(rms))


def _rms(force: HandForce, torque: FloatArray, some: slice = slice(None)) -> float:
    """RMS [N] at the tip, over the way, of joint torques (k, n) at some of the samples."""
    vector = np.einsum("kri,ki->kr", force.directions.torque_to_force[some], torque)
    return rms_over_way(vector, np.where(force.directions.singular, 0.0, force.motion.weights)[some])
