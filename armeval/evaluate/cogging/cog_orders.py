"""What a cog map is made of: the orders that stand out of its noise, its detents, and where it drives the rotor on."""

from __future__ import annotations

import math
from dataclasses import dataclass, replace
from functools import lru_cache
from typing import Literal

import numpy as np

from armeval.arrays import BoolArray, FloatArray
from armeval.kernels.harmonics import ComplexArray, harmonic_series
from armeval.model.cogmap import CogMap

OrderKind = Literal["expected", "tolerance", "unexpected", "unknown"]

FALSE_ALARM = 0.01
"""Chance that noise alone lets any order of a map pass for significant."""

LEAST_SHARE = 1e-3
"""Orders below this share of the largest amplitude are not worth telling."""

_MAPS = 64  # so many maps are remembered: every rest of a joint asks the same of its map


@dataclass(frozen=True)
class ExpectedOrders:
    """Orders that a motor's make lets expect.

    Attributes
    ----------
    fundamental
        The native cogging order, the least common multiple of slots and poles; its multiples are expected too. None
        where the make is not known well enough.
    tolerances
        Orders that, with their multiples, come from parts that are not all alike: in one turn an odd magnet meets
        every slot, an odd tooth every pole, and only every pair of poles where north and south differ.
    """

    fundamental: int | None
    tolerances: tuple[int, ...]

    def kind(self, order: int) -> OrderKind:
        """Say whether an order is a multiple of the fundamental, of a tolerance order, or of neither."""
        if self.fundamental is None and not self.tolerances:
            return "unknown"
        if self.fundamental is not None and order % self.fundamental == 0:
            return "expected"
        return "tolerance" if any(order % base == 0 for base in self.tolerances) else "unexpected"


def expected_orders(slots: int | None, poles: int | None) -> ExpectedOrders:
    """Give the orders to expect of a motor.

    Parameters
    ----------
    slots
        Stator slots; for a hybrid stepper its wound stator poles (most have 8).
    poles
        Rotor poles, counting north and south; for a hybrid stepper twice its teeth (50 teeth: 100 poles). A motor of
        which only ``poles`` is given is taken for a two-phase stepper: it has a detent every quarter of an electrical
        period, so twice the poles a turn (200), and the electrical order itself (50) from tolerances. With 8 slots
        LCM(8, 100) says the same.

    Returns
    -------
    ExpectedOrders
        With neither given it calls every order ``unknown``.

    Notes
    -----
    Native order: LCM(slots, poles), Z. Q. Zhu and D. Howe, "Influence of design parameters on cogging torque in
    permanent magnet machines", IEEE Trans. Energy Conversion 15(4), 2000. Two-phase hybrid steppers: T. Kenjo,
    "Stepping motors and their microprocessor controls" (from memory).
    """
    if slots is not None and poles is not None:
        return ExpectedOrders(math.lcm(slots, poles), (slots, max(poles // 2, 1)))
    if poles is not None:
        return ExpectedOrders(2 * poles, (max(poles // 2, 1),))
    return ExpectedOrders(None, () if slots is None else (slots,))


@dataclass(frozen=True)
class CogOrder:
    """One harmonic of a cog map: ``amplitude * sin(order * angle + phase)``.

    Attributes
    ----------
    order
        Cycles per mechanical motor turn.
    amplitude, phase
        [N m], [rad] in (-pi, pi].
    amplitude_noise
        Standard deviation of the amplitude [N m] that noise causes.
    kind
        Whether the motor's make lets it expect.
    """

    order: int
    amplitude: float
    phase: float
    amplitude_noise: float
    kind: OrderKind = "unknown"


def significance_ratio(orders_tried: int, orders_known: float, false_alarm: float = FALSE_ALARM) -> float:
    """Power over mean noise power that noise alone lets any of the orders pass with the chance ``false_alarm``.

    Noise that is alike at all angles gives every order the same mean power and each an exponential distribution of its
    own. The power of an order over the mean of m others then follows F(2, 2m), whose tail is (1 + x / m)^-m.

    Parameters
    ----------
    orders_tried
        How many orders have the chance to pass.
    orders_known
        The m orders that the noise is known from; half the degrees of freedom of a variance.
    """
    return math.expm1(min(math.log(orders_tried / false_alarm) / orders_known, 700.0)) * orders_known


def significant_orders(
    coefficients: ComplexArray, *, noise_power: float = 0.0, false_alarm: float = FALSE_ALARM
) -> tuple[BoolArray, float]:
    """Find the orders that stand out of the noise, and the noise that they stand out of.

    The floor starts at the median power, from which at least half of the orders must be noise, and is then the mean
    over the orders that are not significant, until these stay the same.

    Parameters
    ----------
    coefficients
        Shape (n + 1,), c_0 to c_n; c_0 is left aside.
    noise_power
        Mean |c_k|^2 of the noise [N^2 m^2] that is known from elsewhere; the floor is at least that.
    false_alarm
        Chance that noise alone makes any order significant.

    Returns
    -------
    significant
        Shape (n + 1,); the mean never is.
    floor
        Mean |c_k|^2 of the noise [N^2 m^2].
    """
    power = np.abs(coefficients[1:]) ** 2
    significant = np.zeros(coefficients.size, dtype=np.bool_)
    if power.size == 0:
        return significant, noise_power
    rounding = (1e-12 * float(np.sqrt(np.sum(power)))) ** 2
    least = max(noise_power, rounding, np.finfo(np.float64).tiny)
    floor = max(float(np.median(power)) / math.log(2.0), least)
    rest = power.size
    for _ in range(50):
        above = power > significance_ratio(power.size, rest, false_alarm) * floor
        if np.array_equal(above, significant[1:]):
            break
        significant[1:] = above
        rest = max(int(np.count_nonzero(~above)), 1)
        floor = max(float(np.sum(power[~above])) / rest, least)
    return significant, floor


def noise_floor(cog_map: CogMap) -> float:
    """Mean |c_k|^2 [N^2 m^2] that the map's own noise gives an order.

    White noise of standard deviation s an entry, spread over n = ``bandwidth`` orders, gives an order the amplitude
    noise s sqrt(2 / M) with M = 2 n entries, so |c|^2 = s^2 / M on average.
    """
    return cog_map.noise**2 / (2.0 * cog_map.bandwidth)


@lru_cache(maxsize=_MAPS)
def orders(
    cog_map: CogMap,
    *,
    slots: int | None = None,
    poles: int | None = None,
    significance: float = FALSE_ALARM,
    least_share: float = LEAST_SHARE,
) -> tuple[CogOrder, ...]:
    """Give the orders of a cog map that stand out of its noise, largest first.

    Parameters
    ----------
    cog_map
        The map.
    slots, poles
        The motor's make, where known; says which orders are expected.
    significance
        Chance that noise alone makes any order of the map pass.
    least_share
        Orders below this share of the largest amplitude are left out.
    """
    coefficients = cog_map.spectrum
    significant, floor = significant_orders(coefficients, noise_power=noise_floor(cog_map), false_alarm=significance)
    amplitude = 2.0 * np.abs(coefficients)
    amplitude[0] = 0.0
    kept = np.flatnonzero(significant & (amplitude >= least_share * amplitude.max()))
    expected = expected_orders(slots, poles)
    return tuple(
        CogOrder(
            order=int(order),
            amplitude=float(amplitude[order]),
            phase=float(np.angle(1j * coefficients[order])),
            amplitude_noise=math.sqrt(2.0 * floor),
            kind=expected.kind(int(order)),
        )
        for order in kept[np.argsort(-amplitude[kept], kind="stable")]
    )


def significant_part(cog_map: CogMap) -> CogMap:
    """Give the map without its noise: only the orders that stand out of it. The noise stays told in ``noise``."""
    padded = np.zeros(cog_map.torque.size // 2 + 1, dtype=np.complex128)
    padded[: cog_map.bandwidth + 1] = significant_coefficients(cog_map)
    if 2 * cog_map.bandwidth == cog_map.torque.size:
        padded[-1] *= 2.0
    return replace(cog_map, torque=np.fft.irfft(padded * cog_map.torque.size, cog_map.torque.size))


@lru_cache(maxsize=_MAPS)
def significant_coefficients(cog_map: CogMap) -> ComplexArray:
    """Shape (bandwidth + 1,). The map's coefficients with everything set to 0 that does not stand out of the noise."""
    coefficients = cog_map.spectrum
    significant, _ = significant_orders(coefficients, noise_power=noise_floor(cog_map))
    kept = np.where(significant, coefficients, 0.0)
    kept.setflags(write=False)
    return kept


def _fine_grid(cog_map: CogMap, coefficients: ComplexArray) -> FloatArray:
    """Angles [rad] dense enough that no order present can turn about between two of them unseen."""
    highest = int(np.flatnonzero(coefficients)[-1])
    return 2.0 * np.pi * np.arange(max(cog_map.torque.size, 16 * highest)) / max(cog_map.torque.size, 16 * highest)


def _crossings(angle: FloatArray, coefficients: ComplexArray, rising: bool) -> FloatArray:
    """Angles [rad] in [0, 2 pi) at which a trigonometric polynomial changes sign, found to rounding error.

    Each change of sign between neighbouring angles is narrowed by Newton's method, and by halving where that leaves
    the bracket.
    """
    sign = 1.0 if rising else -1.0
    value = sign * harmonic_series(angle, coefficients)
    after = np.roll(value, -1)
    start = np.flatnonzero((value < 0.0) & (after >= 0.0))
    step = 2.0 * np.pi / angle.size
    low, high = angle[start], angle[start] + step
    root = low + step * value[start] / (value[start] - after[start])
    derivative = 1j * np.arange(coefficients.size) * coefficients
    for _ in range(50):
        there, slope_there = sign * harmonic_series(root, coefficients), sign * harmonic_series(root, derivative)
        low, high = np.where(there < 0.0, root, low), np.where(there < 0.0, high, root)
        change = np.divide(-there, slope_there, out=np.full_like(root, np.inf), where=slope_there > 0.0)
        inside = (root + change >= low) & (root + change <= high)
        moved = np.where(inside, root + change, 0.5 * (low + high))
        if np.all(np.abs(moved - root) <= 1e-15):
            break
        root = moved
    return np.sort(np.mod(root, 2.0 * np.pi))


@lru_cache(maxsize=_MAPS)
def detents(cog_map: CogMap) -> FloatArray:
    """Stable rest angles of the cogging torque, where it crosses zero falling.

    Only orders that stand out of the noise count, so that noise makes no detents.

    Returns
    -------
    FloatArray
        Shape (d,) [rad], motor side, rising in [0, 2 pi).
    """
    coefficients = significant_coefficients(cog_map)
    if not coefficients.any():
        return np.empty(0)
    found = _crossings(_fine_grid(cog_map, coefficients), coefficients, rising=False)
    found.setflags(write=False)
    return found


def slope(cog_map: CogMap, angle: FloatArray) -> FloatArray:
    """Slope d torque / d angle of the orders that stand out of the noise.

    Parameters
    ----------
    cog_map
        The map.
    angle
        Shape (k,) [rad]. Motor angles.

    Returns
    -------
    FloatArray
        Shape (k,) [N m/rad], motor side.
    """
    coefficients = significant_coefficients(cog_map)
    return harmonic_series(angle, 1j * np.arange(coefficients.size) * coefficients)


def unstable_stretches(cog_map: CogMap, stiffness: float = 0.0) -> FloatArray:
    """Stretches of the turn where the cogging torque grows faster with the angle than a servo's torque falls.

    A rotor cannot be held still there by a position loop of that stiffness: it snaps through to the next detent.

    Parameters
    ----------
    cog_map
        The map.
    stiffness
        Of the loop, motor side [N m/rad]: the joint's divided by the square of the gear ratio. 0: without a servo.

    Returns
    -------
    FloatArray
        Shape (s, 2) [rad]. Start in [0, 2 pi) and end of each stretch, the end above the start; the one across zero
        ends beyond 2 pi.
    """
    coefficients = significant_coefficients(cog_map)
    if not coefficients.any():
        return np.empty((0, 2))
    excess = 1j * np.arange(coefficients.size) * coefficients
    excess[0] = -stiffness
    angle = _fine_grid(cog_map, coefficients)
    starts, ends = _crossings(angle, excess, rising=True), _crossings(angle, excess, rising=False)
    if starts.size == 0:
        return np.empty((0, 2))
    if ends[0] <= starts[0]:
        ends = np.append(ends[1:], ends[0] + 2.0 * np.pi)
    return np.column_stack([starts, ends])
