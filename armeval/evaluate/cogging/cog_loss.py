"""What a compensation table leaves of the cogging: the table itself, and what is lost on the way, in closed form.

The firmware stores the map at M even motor angles, looks it up at the angle that it sees and applies the negative. For
cogging of order N the looked-up torque is ``gain`` times the true torque plus images at other orders; its mean square
is ``power`` times that of the cogging. Where table and rotor are out of step by the angle d, and the table is too
large by the share e, the mean square of what is left, over that of the cogging, is

    1 + (1 + e)^2 power - 2 (1 + e) gain cos(N d)

With a perfect table (gain = power = 1) that is e^2 + 4 (1 + e) sin^2(N d / 2).
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from functools import lru_cache
from typing import Literal

import numpy as np
from scipy.optimize import brentq

from armeval.arrays import FloatArray
from armeval.evaluate.cogging.cog_orders import CogOrder, orders
from armeval.model.cogmap import CogMap
from armeval.model.trial import Compensation

Interpolation = Literal["linear", "nearest"]


def compensation_table(
    cog_map: CogMap, compensation: Compensation, rng: np.random.Generator | None = None
) -> FloatArray:
    """Give the table that the firmware stores.

    Parameters
    ----------
    cog_map
        What the motor does, by the best of knowledge.
    compensation
        Number of bins, and noise of an entry (default: the map's own).
    rng
        Draws the noise with which the firmware's map was measured; None: no noise.

    Returns
    -------
    FloatArray
        Shape (bins,) [N m], motor side: cogging torque at the motor angles ``2 pi k / bins``, to be subtracted from
        the commanded torque. The index error is not in it: it belongs to where the table is looked up.
    """
    bins = compensation.table_bins
    table = cog_map.at(2.0 * np.pi * np.arange(bins) / bins)
    if rng is not None:
        table = table + entry_noise(cog_map, compensation) * rng.standard_normal(bins)
    return table


def entry_noise(cog_map: CogMap, compensation: Compensation) -> float:
    """Noise of one entry of the firmware's table [N m]: as told, else what the map itself shows."""
    return cog_map.noise if compensation.map_noise is None else compensation.map_noise


def lookup(table: FloatArray, angle: FloatArray, interpolation: Interpolation) -> FloatArray:
    """Look a table up as the firmware does.

    Parameters
    ----------
    table
        Shape (bins,) [N m] at the motor angles ``2 pi k / bins``.
    angle
        Shape (k,) [rad]. Motor angles as the firmware sees them, any turn.
    interpolation
        Between the two entries beside the angle, or the nearest entry.

    Returns
    -------
    FloatArray
        Shape (k,) [N m].
    """
    bins = table.size
    place = np.mod(np.asarray(angle, dtype=np.float64) * (bins / (2.0 * np.pi)), bins)
    if interpolation == "nearest":
        return table[np.rint(place).astype(np.int64) % bins]
    below = np.floor(place)
    share = place - below
    first = below.astype(np.int64) % bins
    return (1.0 - share) * table[first] + share * table[(first + 1) % bins]


def table_gain(order: float, bins: float, interpolation: Interpolation) -> float:
    """Share of an order's amplitude that the looked-up table reproduces at that order.

    With k = bins / order entries a period: sinc^2(1 / k) for linear interpolation, sinc(1 / k) for the nearest entry,
    sinc x = sin(pi x) / (pi x): the transforms of the triangle and of the box that each entry is spread over. An
    infinite number of bins is a perfect table.
    """
    sinc = float(np.sinc(order / bins))
    return sinc**2 if interpolation == "linear" else sinc


def table_power(order: float, bins: float, interpolation: Interpolation) -> float:
    """Mean square of the looked-up table over that of the order that it stores.

    Each interpolated value of a sine of phase step a = 2 pi / k has the mean square (2 + cos a) / 3, averaged over the
    place between two entries and over the phase; the nearest entry keeps the mean square.
    """
    return (2.0 + math.cos(2.0 * math.pi * order / bins)) / 3.0 if interpolation == "linear" else 1.0


def table_noise(noise: float, interpolation: Interpolation) -> float:
    """RMS torque [N m] that independent noise of the entries puts on the looked-up table.

    Linear interpolation averages neighbours: the mean of (1 - x)^2 + x^2 over the place between them is 2 / 3.
    """
    return math.sqrt(2.0 / 3.0) * noise if interpolation == "linear" else noise


def order_residual(
    order: float,
    *,
    bins: float = math.inf,
    interpolation: Interpolation = "linear",
    angle_error: float = 0.0,
    gain_error: float = 0.0,
) -> float:
    """RMS of what compensation leaves of one order, over the RMS of the order itself; above 1 it does harm.

    Parameters
    ----------
    order
        Cycles per motor turn.
    bins, interpolation
        Of the table; infinite bins: a perfect table.
    angle_error
        Motor angle [rad] by which the table is out of step with the rotor: index error, plus speed times delay.
    gain_error
        Share by which the applied torque is too large.
    """
    applied = 1.0 + gain_error
    square = (
        1.0
        + applied**2 * table_power(order, bins, interpolation)
        - 2.0 * applied * table_gain(order, bins, interpolation) * math.cos(order * angle_error)
    )
    return math.sqrt(max(square, 0.0))


@dataclass(frozen=True)
class OrderResidual:
    """What compensation leaves of one order: ``share`` is RMS after over RMS before."""

    order: int
    rms: float
    share: float


@dataclass(frozen=True)
class CogResidual:
    """What a compensation table leaves of a motor's cogging.

    Attributes
    ----------
    cogging_rms
        RMS of the orders that stand out of the map's noise [N m].
    rms
        RMS of what is left of them, with the table's noise [N m].
    noise_rms
        The share of the table's noise in it [N m].
    orders
        The same order by order, largest before compensation first.
    break_even_angle
        Motor angle [rad] between table and rotor at which compensation does as much harm as good; 0 where it does
        harm even in step.
    """

    cogging_rms: float
    rms: float
    noise_rms: float
    orders: tuple[OrderResidual, ...]
    break_even_angle: float

    @property
    def share(self) -> float:
        """RMS after over RMS before; 0 where there was no cogging."""
        return self.rms / self.cogging_rms if self.cogging_rms > 0.0 else 0.0


@lru_cache(maxsize=64)  # asked for at every rest, of the same few maps
def residual(cog_map: CogMap, compensation: Compensation, *, speed: float = 0.0, delay: float = 0.0) -> CogResidual:
    """Predict what a compensation table leaves of a motor's cogging, by the closed form of each order.

    Parameters
    ----------
    cog_map
        The motor's map.
    compensation
        What the firmware's table can do; its index error counts as it stands, one standard deviation.
    speed, delay
        Motor speed [rad/s], and time [s] from the angle looked up to the torque that acts: together an angle by which
        the table trails.
    """
    found = orders(cog_map)
    bins, interpolation = compensation.table_bins, compensation.interpolation
    noise_rms = table_noise(entry_noise(cog_map, compensation), interpolation)

    def left(order: CogOrder, angle_error: float) -> float:
        return order_residual(order.order, bins=bins, interpolation=interpolation, angle_error=angle_error)

    def total(angle_error: float) -> float:
        square = sum((left(order, angle_error) * order.amplitude) ** 2 / 2.0 for order in found)
        return math.sqrt(square + noise_rms**2)

    angle_error = compensation.index_error + abs(speed) * delay
    cogging_rms = math.sqrt(sum(order.amplitude**2 / 2.0 for order in found))
    parts = tuple(
        OrderResidual(
            order=order.order,
            rms=left(order, angle_error) * order.amplitude / math.sqrt(2.0),
            share=left(order, angle_error),
        )
        for order in found
    )
    break_even = 0.0
    if found and total(0.0) < cogging_rms:
        # within half a period of the highest order the loss grows; the first angle of a fine row brackets the root
        row = np.linspace(0.0, math.pi, 64 * max(order.order for order in found) + 1)[1:]
        beyond = next(angle for angle in row if total(float(angle)) >= cogging_rms)
        break_even = float(brentq(lambda angle: total(angle) - cogging_rms, 0.0, float(beyond)))
    return CogResidual(cogging_rms, total(angle_error), noise_rms, parts, break_even)
