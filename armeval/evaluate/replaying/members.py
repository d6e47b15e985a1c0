"""What a replay assumes of the things that nobody knows exactly: as the files say, or drawn from their spreads."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from armeval.arrays import FloatArray
from armeval.evaluate.cogging.cog_loss import compensation_table, entry_noise
from armeval.model.arm import Arm
from armeval.model.spreads import Spreads
from armeval.model.trial import Compensation


@dataclass(frozen=True, eq=False)
class Member:
    """One possible arm: n joints.

    Attributes
    ----------
    rotor_index, table_index
        Shape (n,) [rad]. Motor angle at joint angle 0: in truth, and as the firmware has it.
    dry_friction, viscous_friction, torque_gain
        Shape (n,). Factors on dry and viscous friction and on delivered torque.
    start
        Shape (n,) [rad or m]. Where the joints rest before settling.
    tables
        Shape (n, bins) [N m]. What the firmware stores of each motor's cogging torque, motor side.
    """

    rotor_index: FloatArray
    table_index: FloatArray
    dry_friction: FloatArray
    viscous_friction: FloatArray
    torque_gain: FloatArray
    start: FloatArray
    tables: FloatArray


def clean_tables(arm: Arm, compensation: Compensation) -> FloatArray:
    """Shape (n, bins) [N m]: the compensation tables that a map without noise would give."""
    still = np.zeros(compensation.table_bins)
    maps = [drive.cog_map for drive in arm.drives]
    return np.stack([still if known is None else compensation_table(known, compensation) for known in maps])


def nominal_member(arm: Arm, compensation: Compensation, start: FloatArray, seed: int) -> Member:
    """Give the arm as its files say.

    Every joint's table is out of step by just one standard deviation of the index error, so that the mean square of
    what compensation leaves is right; the noise of its entries is drawn.
    """
    ones, index = np.ones(len(arm.drives)), _index_offsets(arm)
    return Member(
        rotor_index=index,
        table_index=index + compensation.index_error,
        dry_friction=ones,
        viscous_friction=ones,
        torque_gain=ones,
        start=start,
        tables=clean_tables(arm, compensation) + _noise(arm, compensation, np.random.default_rng(seed)),
    )


def drawn_member(
    arm: Arm,
    compensation: Compensation,
    spreads: Spreads,
    start: FloatArray,
    tables: FloatArray,
    rng: np.random.Generator,
) -> Member:
    """Draw one possible arm; ``tables`` are those of :func:`clean_tables`."""
    off = rng.standard_normal((5, len(arm.drives)))
    index = _index_offsets(arm)
    rotor = compensation.index_error if spreads.rotor_index is None else spreads.rotor_index
    return Member(
        rotor_index=index + rotor * off[0],
        table_index=index,
        dry_friction=np.exp(spreads.friction * off[1]),
        viscous_friction=np.exp(spreads.friction * off[2]),
        torque_gain=np.maximum(1.0 + spreads.torque_constant * off[3], 0.0),
        start=np.clip(start + spreads.start * off[4], arm.chain.lower, arm.chain.upper),
        tables=tables + _noise(arm, compensation, rng),
    )


def _index_offsets(arm: Arm) -> FloatArray:
    return np.array([drive.index_offset for drive in arm.drives])


def _noise(arm: Arm, compensation: Compensation, rng: np.random.Generator) -> FloatArray:
    scale = [0.0 if d.cog_map is None else entry_noise(d.cog_map, compensation) for d in arm.drives]
    return np.array(scale)[:, None] * rng.standard_normal((len(scale), compensation.table_bins))
