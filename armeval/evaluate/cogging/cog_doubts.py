"""What makes a measured cog map unusable, or doubtful."""

from __future__ import annotations

import math

import numpy as np

from armeval.arrays import FloatArray
from armeval.errors import Finding, InputError
from armeval.evaluate.cogging.cog_fit import Samples
from armeval.evaluate.cogging.cog_orders import expected_orders, significance_ratio, significant_orders
from armeval.kernels.harmonics import ComplexArray, harmonic_series, harmonic_sums
from armeval.units import angle_text, torque_text

_TURN = 2.0 * np.pi

_LEAST_COVERED = 0.75
"""Share of the turn that the angles must cover whatever the orders."""

_WORTH_A_REFUSAL = 0.05
"""An order hidden by a gap matters where it has this share of the strongest order's amplitude."""

_STRAY = 8.0
"""A torque is astray that is off by so many standard deviations of what the orders leave, and by half the cogging."""


def _degrees(low: float, high: float) -> str:
    return f"from {angle_text(low, 4)} to {angle_text(math.fmod(high, _TURN), 4)}"


def refuse_a_part_of_a_turn(samples: Samples, source: str, place: str) -> None:
    """Raise where the angles leave out more than a quarter of the turn."""
    gap = samples.gap
    covered = 1.0 - float(gap.max()) / _TURN
    if covered >= _LEAST_COVERED:
        return
    after = int(np.argmax(gap))
    start = float(samples.angle[(after + 1) % samples.angle.size])
    parts = {0.25: "a quarter of a turn", 1 / 3: "a third of a turn", 0.5: "half a turn", 2 / 3: "two thirds of a turn"}
    said = next((f", about {word}" for part, word in parts.items() if abs(covered - part) < 0.04), "")
    raise InputError(
        f"the angles cover only {angle_text(covered * _TURN)} of the motor's turn{said} "
        f"({_degrees(start, start + covered * _TURN)})",
        "measure a whole motor turn; turn angles behind a gear, or electrical degrees, into motor angles first",
        file=source,
        place=place,
    )


def refuse_a_hidden_order(samples: Samples, coefficients: ComplexArray, size: int, source: str, place: str) -> None:
    """Raise where the samples show an order of which half a period fits into their widest gap.

    What the fit leaves over is searched for orders above its bandwidth that stand out of it as of white noise.
    """
    bandwidth, count = coefficients.size - 1, samples.angle.size
    highest, spare = (size - 1) // 2, count - 2 * bandwidth - 1
    if samples.even or spare < 1 or highest <= bandwidth:
        return
    left = samples.torque - harmonic_series(samples.angle, coefficients)
    noise_power = float(np.sum(left**2)) / (spare * count)
    amplitude = 2.0 * np.abs(harmonic_sums(samples.angle, left / count, highest))
    amplitude[: bandwidth + 1] = 0.0
    strongest = max(float(amplitude.max()), 2.0 * float(np.abs(coefficients[1:]).max(initial=0.0)))
    least = 2.0 * math.sqrt(significance_ratio(highest - bandwidth, 0.5 * spare) * noise_power)
    hidden = np.where((amplitude > least) & (amplitude >= _WORTH_A_REFUSAL * strongest), amplitude, 0.0)
    if not hidden.any():
        return
    # of nearly even angles an order and its mirror image about half their number look alike: the lower is meant
    order = int(np.argmax(hidden > 0.9 * hidden.max()))
    gap = samples.gap
    after = int(np.argmax(gap))
    raise InputError(
        f"the widest gap between measured angles is {angle_text(float(gap[after]))} "
        f"({_degrees(float(samples.angle[after]), float(samples.angle[after] + gap[after]))}), wider than half the "
        f"period ({angle_text(np.pi / order)}) of order {order}, which the data show",
        f"measure an angle at least every {angle_text(np.pi / order)}"
        + ("" if place else "; if the rows go up and back, tell the two apart with a `direction` column"),
        file=source,
        place=place,
    )


def doubt_one_way(angle: FloatArray, source: str) -> list[Finding]:
    """Say that rows without a direction go up a turn and back, or the other way round, in the order of the file."""
    way = np.unwrap(angle[np.linspace(0, angle.size - 1, min(angle.size, 200)).astype(np.int64)])
    for rising in (way, -way):
        turn = int(np.argmax(rising))
        legs = np.diff(rising[: turn + 1]), -np.diff(rising[turn:])
        if all(leg.sum() > np.pi and np.mean(leg > 0.0) > 0.9 for leg in legs):
            what = "the rows go over the turn and back, but there is no `direction`: friction counts as noise"
            return [
                Finding(
                    "warning", what, "add a `direction` column, 1 where the angle rose and -1 where it fell", source
                )
            ]
    return []


def doubt_strays(samples: Samples, coefficients: ComplexArray, source: str, place: str) -> list[Finding]:
    """Point at the torque that is farthest from what the orders make it, where it is too far to be noise."""
    significant, _ = significant_orders(coefficients)
    significant[0] = True
    made = harmonic_series(samples.angle, np.where(significant, coefficients, 0.0))
    off = np.abs(samples.torque - made)
    least = max(_STRAY * 1.4826 * float(np.median(off)), 0.5 * float(np.ptp(made)))
    astray = np.flatnonzero(off > max(least, 1e-9 * float(np.abs(samples.torque).max())))
    if astray.size == 0:
        return []
    worst = int(astray[np.argmax(off[astray])])
    what = (
        f"the torque at {angle_text(float(samples.angle[worst]), 4)} is {torque_text(float(samples.torque[worst]))}, "
        f"{torque_text(float(off[worst]))} off what the map's orders make it"
    )
    if astray.size > 1:
        what += f"; {astray.size} angles are astray like that"
    return [Finding("warning", what, "measure there again, or leave it out", source, place)]


def doubt_the_sign_of_friction(friction: float, noise: float, source: str) -> list[Finding]:
    """Say where the torque is larger on the way up, though friction holds back."""
    if -friction <= 3.0 * noise:
        return []
    what = f"the torque on the rotor is larger on the way up, by {torque_text(-2.0 * friction)}: friction would push"
    mend = "check the signs of `direction` and of the torque; friction is taken without its sign"
    return [Finding("warning", what, mend, source, "column `direction`")]


def doubt_the_lag(mean: ComplexArray, lag: float, source: str) -> list[Finding]:
    """Say how much a lag between the directions shrinks the strongest order of their mean."""
    order = 1 + int(np.argmax(np.abs(mean[1:])))
    kept = math.cos(order * lag)
    if kept > 0.98:
        return []
    what = (
        f"the maps of the two directions are shifted by {angle_text(2.0 * abs(lag))} against each other; their mean "
        f"shows order {order} at {kept:.3g} of its size"
    )
    return [Finding("warning", what, "approach each angle more slowly, or use the angle reached", source)]


def doubt_the_mean(mean: ComplexArray, noise: float, angles: int, source: str) -> list[Finding]:
    """Say what the mean of a single direction may be, where there is one."""
    removed, rms = abs(float(mean[0].real)), math.sqrt(2.0 * float(np.sum(np.abs(mean[1:]) ** 2)))
    if removed <= max(3.0 * noise / math.sqrt(angles), 0.01 * rms):
        return []
    what = (
        f"only one turning direction was measured; the mean of {torque_text(float(mean[0].real))} that was taken off "
        "may be friction, a load or an offset of the sensor"
    )
    return [Finding("warning", what, "measure both directions, with a `direction` column, to tell friction", source)]


def doubt_the_bandwidth(
    mean: ComplexArray, samples: Samples, bandwidth: int, slots: int | None, poles: int | None, source: str
) -> list[Finding]:
    """Say that the order to expect of the motor is above what the samples support, and where it then shows."""
    order = expected_orders(slots, poles).fundamental
    count = samples.angle.size
    if order is None or (order <= bandwidth and count > 2 * order):
        return []
    gap = angle_text(float(samples.gap.max()))
    what = f"{count} angles a turn with a widest gap of {gap} do not support order {order}"
    alias = abs(order - count * round(order / count))
    if samples.even and alias <= bandwidth and alias != order:
        shown = significant_orders(mean)[0][alias] if alias else False
        what += f"; it passes for order {alias}" + (", which stands out here" if shown else "")
    make = f"{slots} slots and {poles} poles" if slots and poles else f"{poles} poles"
    return [Finding("warning", what, f"{make} let expect it; measure at least {2 * order + 1} even angles", source)]
