"""Do rests of a joint keep to the pitch of its cogging? The Rayleigh test of folded motor angles."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from armeval.arrays import FloatArray
from armeval.evaluate.cogging.cog_orders import detents, expected_orders, orders
from armeval.evaluate.sticking.sticking_event import StickingEvent
from armeval.model.drive import Drive

LEAST_RESTS = 5
"""Fewer rests at different places show no periodicity."""

SIGNIFICANT = 0.01
"""A probability below this shows that rests keep to the pitch."""

NEAR = 0.2
"""Share of a pitch within which a rest lies near a detent."""


@dataclass(frozen=True)
class Periodicity:
    """How the rests of a joint lie within the pitch of its cogging.

    Attributes
    ----------
    rests
        How many rests at different places were looked at.
    order
        Cycles per motor turn by which the angles were folded; None where it is not known.
    resultant
        Length of the mean of the unit vectors, from 0 (all over the pitch) to 1 (all at one place of it).
    probability
        That angles all over the pitch give so long a resultant; 1 where nothing could be tested.
    near
        How many of the rests lie within a fifth of a pitch of a detent; None where detents are not known.
    """

    rests: int
    order: int | None
    resultant: float
    probability: float
    near: int | None

    @property
    def shown(self) -> bool:
        """Whether the rests keep to the pitch."""
        return self.rests >= LEAST_RESTS and self.probability < SIGNIFICANT

    @property
    def text(self) -> str:
        """In words, with the numbers; where nothing is shown, what would show it."""
        if self.order is None:
            return "no order to fold the angles by: measure the joint's cog map, or give its slots and poles"
        if self.rests < LEAST_RESTS:
            missing = LEAST_RESTS - self.rests
            return f"{self.rests} rests at different places are too few; a path with {missing} more would show it"
        chance = f"p = {self.probability:.2g}"
        if self.near is None:
            return f"{self.rests} rests folded by order {self.order}: resultant {self.resultant:.2f}, {chance}"
        return f"{self.near} of {self.rests} rests lie within a fifth of a cog pitch of a detent, {chance}"


def rayleigh(angle: FloatArray) -> tuple[float, float]:
    """Test whether angles have no preferred direction.

    Parameters
    ----------
    angle
        Shape (n,) [rad], n at least 1.

    Returns
    -------
    Length of the mean resultant, and the probability that angles without preference give one so long: e^-z with
    z = n r^2, corrected for small n by the series of Greenwood & Durand (1955) and Mardia & Jupp (2000, section 6.3).
    """
    n = len(angle)
    r = float(np.abs(np.mean(np.exp(1j * angle))))
    z = n * r**2
    small = (2.0 * z - z**2) / (4.0 * n) - (24.0 * z - 132.0 * z**2 + 76.0 * z**3 - 9.0 * z**4) / (288.0 * n**2)
    return r, float(np.clip(np.exp(-z) * (1.0 + small), 0.0, 1.0))


def periodicity(drive: Drive, rests: Sequence[StickingEvent]) -> Periodicity:
    """Fold the motor angles of a joint's rests by the dominant order of its cogging.

    Friction holds a rotor a little short of where cogging alone would, so that rests on the way up and on the way down
    lie to different sides of a detent: the folded angles of the latter are mirrored.

    Parameters
    ----------
    drive
        The joint's drive, with its cog map or its slots and poles.
    rests
        One for each place: rests of several laps at one place are not independent.
    """
    found = orders(drive.cog_map) if drive.cog_map is not None else ()
    order = found[0].order if found else expected_orders(drive.slots, drive.poles).fundamental
    if order is None or len(rests) == 0:
        return Periodicity(len(rests), order, 0.0, 1.0, None)
    motor = np.array([rest.motor_angle for rest in rests])
    way = np.array([rest.direction for rest in rests]) * np.sign(drive.gear_ratio)
    # amplitude * sin(order * angle + phase) falls through zero where order * angle + phase is half a turn.
    folded = order * motor + (found[0].phase - np.pi if found else 0.0)
    resultant, probability = rayleigh(way * folded)
    if not found:
        return Periodicity(len(rests), order, resultant, probability, None)
    near = sum(_near(angle, detents(drive.cog_map), order) for angle in motor) if drive.cog_map is not None else None
    return Periodicity(len(rests), order, resultant, probability, near)


def _near(angle: float, at: FloatArray, order: int) -> bool:
    away = np.abs(np.angle(np.exp(1j * (at - angle))))
    return bool(len(at) > 0 and away.min() <= NEAR * 2.0 * np.pi / order)
