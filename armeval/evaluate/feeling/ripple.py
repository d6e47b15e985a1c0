"""The rattle that cogging puts on the hand: how large, where, and from which joint and order.

A motor's cogging of order N comes N times a motor turn, so along the path N |d theta / ds| / 2 pi times a metre and in
time N |d theta / dt| / 2 pi times a second, theta being the motor's angle. Both change along the path, so a line of the
map becomes a band of the force; what joint and order it is, is not guessed from the spectrum but known.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from armeval.arrays import FloatArray
from armeval.evaluate.cogging.net_cogging import net_cogging
from armeval.evaluate.document import JsonValue
from armeval.evaluate.feeling.hand_force import HandForce, motor_angles
from armeval.model.arm import Arm
from armeval.model.trial import Compensation

_LEAST_SHARE = 0.05
"""Orders of a motor whose torque is below this share of its largest are left in the rest."""

_MOST_LINES = 8
"""Orders of one motor that are followed along the path, largest first."""

REST = "rest"
"""Name of what is in no line."""


@dataclass(frozen=True, eq=False)
class RippleLine:
    """One order of one motor, as the hand meets it.

    Attributes
    ----------
    joint, order
        Whose cogging.
    rms, along_rms
        Of its force, and of the part along the motion [N].
    per_metre, hertz
        How often it comes [1/m], [Hz]: median, weighted with its power; NaN where the hand does not move.
    force
        Shape (k, 3) [N] along the motion.
    """

    joint: str
    order: int
    rms: float
    along_rms: float
    per_metre: float
    hertz: float
    force: FloatArray


@dataclass(frozen=True, eq=False)
class Ripple:
    """What cogging puts on the hand in one state of the arm.

    Attributes
    ----------
    joints, share
        Names; share of each joint in the mean square of the ripple, sum 1 (a joint that works against the others has a
        negative share).
    rms, along_rms, across_rms
        Per way of the tip [N].
    peak_to_peak
        Largest minus smallest part along the motion [N].
    worst, worst_at, worst_direction
        Largest ripple [N], where along the path [m], and its direction (3,) in the base frame.
    worst_covariance
        Shape (3, 3) [N^2]. Mean square of the ripple at that pose if every motor's angle were anything: u^T C u is
        that along the direction u.
    lines
        By rms, largest first.
    rest_rms
        RMS of what is in no line [N]: noise of the table, small orders, delay and counts.
    """

    joints: tuple[str, ...]
    share: tuple[float, ...]
    rms: float
    along_rms: float
    across_rms: float
    peak_to_peak: float
    worst: float
    worst_at: float
    worst_direction: tuple[float, float, float]
    worst_covariance: FloatArray
    lines: tuple[RippleLine, ...]
    rest_rms: float

    def to_document(self) -> dict[str, JsonValue]:
        """Give the entry of the JSON document, without the lines."""
        return {
            "rms_N": self.rms,
            "along_rms_N": self.along_rms,
            "across_rms_N": self.across_rms,
            "along_peak_to_peak_N": self.peak_to_peak,
            "worst_N": self.worst,
            "worst_at_m": self.worst_at,
            "worst_direction": list(self.worst_direction),
            "rest_rms_N": self.rest_rms,
            "joints": [{"joint": joint, "share": share} for joint, share in zip(self.joints, self.share, strict=True)],
        }


def rms_over_way(force: FloatArray, weights: FloatArray) -> float:
    """Root mean square of forces (k, ...) [N], each sample counting with its share of the way; NaN left aside."""
    square = force**2 if force.ndim == 1 else (force**2).sum(axis=-1)
    known = np.isfinite(square)
    total = weights[known].sum()
    return float(np.sqrt((square[known] * weights[known]).sum() / total)) if total > 0.0 else float("nan")


def joint_shares(by_joint: FloatArray, whole: FloatArray, weights: FloatArray) -> tuple[float, ...]:
    """Give each joint's share in the mean square of a force: the mean of its own force times the whole one, sum 1.

    Parameters
    ----------
    by_joint, whole
        Shape (k, n, 3) and (k, 3) [N]; the first sums up to the second, which is NaN where it cannot be had.
    weights
        Shape (k,).
    """
    power = np.einsum("kir,kr,k->i", by_joint, np.nan_to_num(whole), weights)
    return tuple(float(value) for value in (power / power.sum() if power.sum() > 0.0 else np.zeros_like(power)))


def ripple(arm: Arm, force: HandForce, *, compensation: Compensation | None = None, seed: int = 0) -> Ripple:
    """Sum up the cogging part of the force on the hand, and name its lines.

    Parameters
    ----------
    arm, force
        The force is one of this arm.
    compensation, seed
        As the force was worked out with.
    """
    motion, directions = force.motion, force.directions
    weights = np.where(directions.singular, 0.0, motion.weights)
    vector = force.part("cogging")
    along = force.along(vector)
    square = rms_over_way(vector, weights) ** 2
    filled = np.nan_to_num(vector)
    size = np.linalg.norm(filled, axis=1)
    worst = int(np.argmax(size))
    tables = net_cogging(arm, compensated=force.compensated, compensation=compensation, seed=seed)
    lines = _lines(arm, force, tables, weights)
    rest = filled - sum((line.force for line in lines), np.zeros_like(filled))
    rest[directions.singular] = np.nan
    return Ripple(
        joints=arm.joints,
        share=joint_shares(force.forces("cogging"), vector, weights),
        rms=float(np.sqrt(square)),
        along_rms=rms_over_way(along, weights),
        across_rms=rms_over_way(force.across(vector), weights),
        peak_to_peak=_range(along),
        worst=float(size[worst]) if np.isfinite(square) else float("nan"),
        worst_at=float(motion.arc[worst]),
        worst_direction=_unit(filled[worst]),
        worst_covariance=ripple_covariance(arm, directions.torque_to_force[worst : worst + 1], tables)[0],
        lines=lines,
        rest_rms=rms_over_way(rest, weights),
    )


def ripple_covariance(arm: Arm, torque_to_force: FloatArray, tables: tuple[FloatArray, ...]) -> FloatArray:
    """Mean square of the ripple in many poses, the motors' angles being anything.

    Parameters
    ----------
    arm
        The arm, n joints.
    torque_to_force
        Shape (k, 3, n) [N per N m].
    tables
        Net cogging of each motor, as :func:`armeval.evaluate.cogging.net_cogging.net_cogging` gives it.

    Returns
    -------
    Shape (k, 3, 3) [N^2]; its largest eigenvalue belongs to the worst direction.
    """
    rms = np.array(
        [abs(d.gear_ratio) * np.sqrt(np.mean(t[:, 0] ** 2)) for d, t in zip(arm.drives, tables, strict=True)]
    )
    scaled = torque_to_force * rms
    return np.asarray(scaled @ scaled.transpose(0, 2, 1))


def _lines(arm: Arm, force: HandForce, tables: tuple[FloatArray, ...], weights: FloatArray) -> tuple[RippleLine, ...]:
    motion = force.motion
    angle = motor_angles(arm, motion.joint)
    rate = np.abs(motion.joint_speed * arm.gear_ratio) / (2.0 * np.pi)
    speed = motion.tip_speed
    moving = speed > 0.0
    way_rate = np.divide(rate, speed[:, None], out=np.full_like(rate, np.nan), where=moving[:, None])
    lines = []
    for i, (drive, table) in enumerate(zip(arm.drives, tables, strict=True)):
        coefficient = np.fft.rfft(table[:, 0]) / len(table)
        coefficient[0] = 0.0
        size = np.abs(coefficient)
        largest = np.argsort(-size, kind="stable")[:_MOST_LINES]
        for order in largest[(size[largest] > 0.0) & (size[largest] >= _LEAST_SHARE * size[largest[0]])]:
            torque = -2.0 * drive.gear_ratio * np.real(coefficient[order] * np.exp(1j * order * angle[:, i]))
            vector = force.directions.torque_to_force[:, :, i] * torque[:, None]
            power = (force.directions.torque_to_force[:, :, i] ** 2).sum(axis=1) * weights
            lines.append(
                RippleLine(
                    joint=drive.joint,
                    order=int(order),
                    rms=rms_over_way(vector, weights),
                    along_rms=rms_over_way(force.along(vector), weights),
                    per_metre=order * _weighted_median(way_rate[:, i], power),
                    hertz=order * _weighted_median(rate[:, i], np.where(moving, power, 0.0)),
                    force=vector,
                )
            )
    return tuple(sorted(lines, key=lambda line: -line.rms))


def _weighted_median(values: FloatArray, weights: FloatArray) -> float:
    known = np.isfinite(values) & (weights > 0.0)
    if not known.any() or values[known].max() == 0.0:
        return float("nan")
    rank = np.argsort(values[known])
    sums = np.cumsum(weights[known][rank])
    return float(values[known][rank][np.searchsorted(sums, 0.5 * sums[-1])])


def _range(values: FloatArray) -> float:
    known = values[np.isfinite(values)]
    return float(np.ptp(known)) if len(known) else float("nan")


def _unit(vector: FloatArray) -> tuple[float, float, float]:
    size = float(np.linalg.norm(vector))
    x, y, z = (float(value) / size if size > 0.0 else 0.0 for value in vector)
    return x, y, z
