"""Which column of a joint log is what, and what turns its numbers into SI."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

from armeval.errors import Findings, near
from armeval.files.tables.columns import factor, find, missing
from armeval.files.tables.dialect import Column
from armeval.files.tables.scaled import Scaled
from armeval.model.arm import Arm

_COUNTS = ("count", "counts")
_QUANTITIES = ("angle", "target", "torque", "current")
_COUNTER_BITS = (16, 24, 32)


@dataclass(frozen=True)
class Signal(Scaled):
    """One column of a log, what turns its numbers into SI, and where its counter may roll over.

    Attributes
    ----------
    wraps
        After how much, in SI, its numbers may have rolled over; smallest first.
    """

    wraps: tuple[float, ...] = ()


@dataclass(frozen=True)
class LogColumns:
    """Where a joint log's signals stand in its table; one signal a joint, in the chain's order.

    Attributes
    ----------
    time, angle
        What every log has.
    target, torque, lap
        None where not logged, or not for every joint.
    """

    time: Signal
    angle: tuple[Signal, ...]
    target: tuple[Signal, ...] | None = None
    torque: tuple[Signal, ...] | None = None
    lap: Signal | None = None


def log_columns(columns: Sequence[Column], arm: Arm, found: Findings) -> LogColumns:
    """Find the signals of an arm's joint log in a table's header.

    Raises
    ------
    InputError
        If time or the angle of a joint is missing, a unit is missing or wrong, or a column stands there twice.
    """
    _heed_foreign_joints(columns, arm, found)
    time = find(columns, "time", found)
    lap = find(columns, "lap", found)
    angles = [find(columns, f"{joint}.angle", found) for joint in arm.joints]
    absent = [f"{joint}.angle" for joint, place in zip(arm.joints, angles, strict=True) if place is None]
    if time is None:
        missing(columns, ["time"], "`time [s]`", found)
    if absent:
        missing(columns, absent, f"`{absent[0]} [deg]`", found)
    found.raise_errors()

    signals = LogColumns(
        time=_clock(columns, time or 0, found),
        angle=tuple(_position(columns, place or 0, arm, j, found) for j, place in enumerate(angles)),
        target=_targets(columns, arm, found),
        torque=_torques(columns, arm, found),
        lap=None if lap is None else Signal(lap),
    )
    found.raise_errors()
    return signals


def _heed_foreign_joints(columns: Sequence[Column], arm: Arm, found: Findings) -> None:
    """Warn of columns that are written like those of a joint, under a name that is near to one of the arm's."""
    for column in columns:
        joint, dot, quantity = column.name.rpartition(".")
        if not dot or quantity not in _QUANTITIES:
            continue
        hint = near(joint, arm.joints)
        if joint not in arm.joints and hint.startswith("did you mean"):
            mend = f"{hint}; a column that does not belong to the arm is not read"
            found.warning(f"the arm has no joint `{joint}`", mend, place=f"column `{column.text}`")


def _clock(columns: Sequence[Column], place: int, found: Findings) -> Signal:
    second = factor(columns[place], "s", found)
    return Signal(place, second, tuple(2.0**bits * second for bits in _COUNTER_BITS))


def _position(columns: Sequence[Column], place: int, arm: Arm, j: int, found: Findings) -> Signal:
    """Angle or target of joint ``j``, in counts or a unit of its kind."""
    column, slides = columns[place], bool(arm.chain.prismatic[j])
    if column.unit not in _COUNTS:
        by = factor(column, "m" if slides else "rad", found)
        return Signal(place, by, () if slides else (2.0 * math.pi,))
    drive = arm.drives[j]
    if drive.encoder_counts == 0.0:
        found.error(
            "it is in counts, and the arm file does not say how many make a turn",
            f"give `encoder_counts` in [joint.{drive.joint}] of the arm file, or log an angle",
            place=f"column `{column.text}`",
        )
        return Signal(place, math.nan)
    on_motor = drive.encoder_on == "motor"
    step = math.copysign(drive.resolution, drive.gear_ratio) if on_motor else drive.resolution
    wraps = [2.0**bits for bits in _COUNTER_BITS]
    if on_motor or not slides:
        wraps.append(drive.encoder_counts)
    return Signal(place, step, tuple(drive.resolution * counts for counts in sorted(wraps)))


def _targets(columns: Sequence[Column], arm: Arm, found: Findings) -> tuple[Signal, ...] | None:
    places = [find(columns, f"{joint}.target", found) for joint in arm.joints]
    if not _complete(places, arm, "target", found):
        return None
    return tuple(_position(columns, place or 0, arm, j, found) for j, place in enumerate(places))


def _torques(columns: Sequence[Column], arm: Arm, found: Findings) -> tuple[Signal, ...] | None:
    """Torque at the joint, else motor current times torque constant and gear ratio."""
    torques = [find(columns, f"{joint}.torque", found) for joint in arm.joints]
    currents = [find(columns, f"{joint}.current", found) for joint in arm.joints]
    either = [current if torque is None else torque for torque, current in zip(torques, currents, strict=True)]
    if not _complete(either, arm, "torque", found):
        return None
    signals = []
    for j, (torque, current, drive) in enumerate(zip(torques, currents, arm.drives, strict=True)):
        if torque is not None:
            signals.append(Signal(torque, factor(columns[torque], "N" if arm.chain.prismatic[j] else "N*m", found)))
        elif current is not None and drive.torque_constant is not None:
            ampere = factor(columns[current], "A", found)
            signals.append(Signal(current, ampere * drive.torque_constant * drive.gear_ratio))
        elif current is not None:
            found.warning(
                "the current is not read: the arm file does not say what torque it makes",
                f"give `torque_constant` in [joint.{drive.joint}] of the arm file",
                place=f"column `{columns[current].text}`",
            )
    return tuple(signals) if len(signals) == len(arm.joints) else None


def _complete(places: Sequence[int | None], arm: Arm, quantity: str, found: Findings) -> bool:
    """Whether all joints have the quantity; warn where only some have."""
    absent = [joint for joint, place in zip(arm.joints, places, strict=True) if place is None]
    if absent and len(absent) < len(places):
        names = ", ".join(f"`{joint}`" for joint in absent)
        found.warning(
            f"the {quantity} of joint {names} is not logged, so no {quantity} is read", "log it for every joint or none"
        )
    return not absent
