"""What a log's own signals say against it: a wrong sign, a missing index, a wrong unit, torque at its limit."""

from __future__ import annotations

import itertools

import numpy as np

from armeval.arrays import FloatArray
from armeval.errors import Findings
from armeval.model.arm import Arm
from armeval.model.joint_log import JointLog
from armeval.units import angle_text, length_text, significant, time_text

_LOOKED_AT = 50_000
_LEAST_OFFSET = np.radians(5.0)
_LEAST_SLIDE_OFFSET = 0.01
_LEAST_MOTION = 2e-3
_LEAST_SLIDE = 2e-4
_LEAST_SATURATED_SHARE = 1e-3


def doubt_log(log: JointLog, arm: Arm, found: Findings, place: str) -> None:
    """Warn of gaps, and of signals that do not fit each other or the arm.

    Parameters
    ----------
    log
        One lap.
    arm
        What it was logged on.
    found
        Gathers the warnings.
    place
        Where in the file the lap is; empty if it is the whole file.
    """
    _doubt_gaps(log, found, place)
    every = slice(None, None, max(1, len(log.time) // _LOOKED_AT))  # of a long log, some samples tell enough
    angle = log.angle[every].copy(order="F")
    target = None if log.target is None else log.target[every].copy(order="F")
    chain = arm.chain
    for j, joint in enumerate(arm.joints):
        slides = bool(chain.prismatic[j])
        if target is None:
            _doubt_range(joint, slides, angle[:, j], float(chain.lower[j]), float(chain.upper[j]), found, place)
        else:
            _doubt_position(joint, slides, angle[:, j], target[:, j], found, place)
        if log.torque is not None:
            _doubt_torque(joint, arm.drives[j].torque_limit, log.torque[:, j], found, place)


def _doubt_gaps(log: JointLog, found: Findings, place: str) -> None:
    segments = log.segments
    gaps = [log.time[after.start] - log.time[before.stop - 1] for before, after in itertools.pairwise(segments)]
    if not gaps:
        return
    absent = sum(max(round(gap / log.period) - 1, 1) for gap in gaps)
    first = time_text(float(log.time[segments[0].stop - 1]))
    what = "a gap" if len(gaps) == 1 else f"{len(gaps):,} gaps"
    found.warning(
        f"{what} of {time_text(float(sum(gaps)))} in all, about {absent:,} samples, the first at {first}: left out",
        "log without losing samples to have the whole lap measured",
        place=place,
    )


def _doubt_position(
    joint: str, slides: bool, angle: FloatArray, target: FloatArray, found: Findings, place: str
) -> None:
    """Compare the angle of one joint with its target."""
    told, moved = target - target.mean(), angle - angle.mean()
    reach = float(np.sqrt(np.mean(told**2)))
    noun = "position" if slides else "angle"
    along = float(np.mean(told * moved))
    if reach > (_LEAST_SLIDE if slides else _LEAST_MOTION) and float(np.mean(moved**2)) > 0.0:
        fit = along / (reach * float(np.sqrt(np.mean(moved**2))))
        slope = along / reach**2
        if fit < -0.9:
            found.warning(
                f"the {joint} {noun} runs opposite to its target: sign?",
                "turn the sign of the encoder or of `gear_ratio`",
                place=place,
            )
            return
        if fit > 0.95 and not 0.5 < slope < 2.0:
            found.warning(
                f"joint {joint} moves {significant(slope)} times as far as its target: unit, `encoder_counts`, gear?",
                "check what one unit of the column is",
                place=place,
            )
            return
    offset = angle - target
    middle = float(np.median(offset))
    spread = float(np.sqrt(np.mean((offset - middle) ** 2)))
    if abs(middle) > max(_LEAST_SLIDE_OFFSET if slides else _LEAST_OFFSET, 5.0 * spread):
        size = length_text(middle) if slides else angle_text(middle)
        found.warning(
            f"joint {joint} is off by a constant {size}: index?", "reference the encoder before the run", place=place
        )


def _doubt_range(
    joint: str, slides: bool, angle: FloatArray, lower: float, upper: float, found: Findings, place: str
) -> None:
    """Compare the angle of one joint with its range: where no target was logged, only that can tell."""
    margin = _LEAST_SLIDE_OFFSET if slides else _LEAST_OFFSET
    lowest, highest = float(angle.min()), float(angle.max())
    if lowest < lower - margin or highest > upper + margin:
        text = length_text if slides else angle_text
        found.warning(
            f"joint {joint} reads {text(lowest)} to {text(highest)}, and its range is {text(lower)} to {text(upper)}: "
            "index, sign or unit?",
            "check the column's unit, and reference the encoder before the run",
            place=place,
        )


def _doubt_torque(joint: str, limit: float, torque: FloatArray, found: Findings, place: str) -> None:
    """Compare the torque of one joint with its limit."""
    if not np.isfinite(limit):
        return
    size = np.abs(torque)
    largest = float(size.max())
    if largest > 1.01 * limit:
        found.warning(
            f"the {joint} torque reaches {significant(largest / limit)} times its limit: unit, or `torque_limit`?",
            "check what one unit of the column is",
            place=place,
        )
        return
    share = float(np.mean(size >= 0.999 * limit))
    if share >= _LEAST_SATURATED_SHARE:
        found.warning(
            f"the {joint} torque is at its limit in {significant(100.0 * share)} % of the samples",
            "the arm cannot follow there, whatever the compensation",
            place=place,
        )
