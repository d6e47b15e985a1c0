"""Counters that roll over: a number that jumps by the whole range of its counter has gone on all the same."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from armeval.arrays import FloatArray
from armeval.errors import Findings
from armeval.files.joint_logs.log_columns import LogColumns, Signal
from armeval.files.joint_logs.log_samples import Samples
from armeval.model.arm import Arm
from armeval.units import angle_text, length_text, time_text

_RARE = 0.1


def unroll(values: FloatArray, wraps: Sequence[float], periods: FloatArray | None = None) -> tuple[float, int] | None:
    """Undo the rollovers of a counter in place.

    A step of more than half a range is a rollover if the values stay within one range, few steps are so large (at most
    a tenth), and every such step, once the range is taken off, is small: at most 1/64 of the range, or four times the
    largest usual step, for every period that it takes, and never more than a quarter of the range.

    Parameters
    ----------
    values
        Shape (k,), in the order of time; changed if there are rollovers.
    wraps
        Ranges that the counter may have, smallest first, in the unit of the values.
    periods
        Shape (k - 1,). How many periods each step takes, at least 1: more where samples are missing.

    Returns
    -------
    tuple of float and int, or None
        The range and how often it was passed; None if the counter never rolled over.
    """
    lowest, highest = float(values.min()), float(values.max())
    if not wraps or highest - lowest <= 0.5 * wraps[0]:
        return None
    steps = np.diff(values)
    periods = np.ones(len(steps)) if periods is None else periods
    for wrap in wraps:
        passed = np.abs(steps) > 0.5 * wrap
        if highest - lowest > wrap * (1.0 + 1e-9) or not 0 < passed.sum() <= _RARE * len(steps):
            continue
        usual = float((np.abs(steps[~passed]) / periods[~passed]).max())
        turns = -np.sign(steps[passed])
        left = np.abs(steps[passed] + turns * wrap)
        if (left <= np.minimum(max(wrap / 64.0, 4.0 * usual) * periods[passed], wrap / 4.0)).all():
            carried = np.zeros(len(values))
            carried[1:][passed] = turns * wrap
            values += np.cumsum(carried)
            return wrap, len(turns)
    return None


def carry_on_clock(time: FloatArray, signal: Signal, found: Findings, place: str) -> None:
    """Carry on a clock, shape (k,) [s], in place where its counter rolled over, and warn of it."""
    rolled = unroll(time, signal.wraps)
    if rolled is not None:
        bits = round(np.log2(rolled[0] / signal.factor))
        found.warning(f"the clock's {bits}-bit counter rolled over {_times(rolled[1])}: carried on", place=place)


def carry_on_joints(
    samples: Samples, signals: LogColumns, arm: Arm, found: Findings, place: str, *, one_lap: bool = True
) -> None:
    """Carry on the counters of angles and targets in place where they rolled over, and warn of it.

    A counter cannot tell by how many whole ranges it is off: the angle goes to its target, else into its joint's range.
    Within one lap, other jumps of more than half a range are warned of, too.
    """
    if samples.target is not None and signals.target is not None:
        _unroll_each(samples.target, signals.target, samples.time, arm, "target", found, place)
    rolled = _unroll_each(samples.angle, signals.angle, samples.time, arm, "angle", found, place)
    for j, wrap in (rolled or {}).items():
        samples.angle[:, j] += wrap * _ranges_off(samples, j, wrap, arm)
    if one_lap and rolled is not None:
        for j, (joint, signal) in enumerate(zip(arm.joints, signals.angle, strict=True)):
            _doubt_jumps(samples.angle[:, j], signal, samples.time, joint, bool(arm.chain.prismatic[j]), found, place)


def _unroll_each(
    values: FloatArray,
    signals: Sequence[Signal],
    time: FloatArray,
    arm: Arm,
    name: str,
    found: Findings,
    place: str,
) -> dict[int, float] | None:
    """Carry on the counters of the joints' signals, shape (k, n).

    Gives the range of each joint that rolled over; None where the signals stay within half a range, all of them.
    """
    smallest = min((signal.wraps[0] for signal in signals if signal.wraps), default=np.inf)
    if len(values) < 2 or values.max() - values.min() <= 0.5 * smallest:  # the usual case, told at a glance
        return None
    steps = np.diff(time)
    periods = np.maximum(steps / np.median(steps), 1.0) if np.median(steps) > 0.0 else np.ones(len(steps))
    rolled = {}
    for j, (joint, signal) in enumerate(zip(arm.joints, signals, strict=True)):
        passed = unroll(values[:, j], signal.wraps, periods)
        if passed is not None:
            counts = passed[0] / abs(signal.factor)
            bits = round(np.log2(counts))
            counter = f"{bits}-bit counter" if np.isclose(counts, 2.0**bits, rtol=1e-9) else "one-turn reading"
            found.warning(
                f"the {counter} of the {joint} {name} rolled over {_times(passed[1])}: carried on", place=place
            )
            rolled[j] = passed[0]
    return rolled


def _doubt_jumps(
    values: FloatArray, signal: Signal, time: FloatArray, joint: str, slides: bool, found: Findings, place: str
) -> None:
    """Warn where one step is longer than half a counter's range: nobody can tell which way the joint went."""
    steps = np.abs(np.diff(values))
    jumps = steps > 0.5 * min(signal.wraps, default=np.inf)
    if jumps.any():
        first = int(np.argmax(jumps))
        size = length_text(float(steps[first])) if slides else angle_text(float(steps[first]))
        often = "" if jumps.sum() == 1 else f", the first of {int(jumps.sum()):,} such jumps"
        when = time_text(float(time[first + 1]))
        found.warning(
            f"the {joint} angle jumps by {size} from one sample to the next at {when}{often}: "
            "counter, loose contact or lost samples?",
            "what follows the jump may be off by it",
            place=place,
        )


def _ranges_off(samples: Samples, j: int, wrap: float, arm: Arm) -> int:
    """Give the whole counter ranges that bring joint ``j`` to its target, else into its range."""
    middle = float(np.median(samples.angle[:, j]))
    if samples.target is not None:
        return round((float(np.median(samples.target[:, j])) - middle) / wrap)
    lower, upper = float(arm.chain.lower[j]), float(arm.chain.upper[j])
    if np.isfinite([lower, upper]).all():
        return round((0.5 * (lower + upper) - middle) / wrap) if not lower <= middle <= upper else 0
    return 0


def _times(count: int) -> str:
    return "once" if count == 1 else f"{count:,} times"
