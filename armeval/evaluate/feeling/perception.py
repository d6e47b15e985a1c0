"""Whether a hand notices a ripple: guidance by published thresholds, which are data and may be edited."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Literal

from armeval.model.thresholds import Thresholds

GUIDANCE = (
    "ratios to what a hand notices are guidance: thresholds differ with people, grip and attention, and a ripple below "
    "the threshold is not imperceptible"
)


@dataclass(frozen=True)
class Noticed:
    """What is noticed of a ripple at one frequency.

    Attributes
    ----------
    force
        Amplitude of the force [N] that is noticed; NaN where no threshold applies.
    low, high
        Its spread.
    by
        What is noticed: a change of ``force``, or ``vibration``.
    """

    force: float
    low: float
    high: float
    by: Literal["force", "vibration", "none"]


def noticed(thresholds: Thresholds, frequency: float, *, rendered_force: float | None, apparent_mass: float) -> Noticed:
    """Give the amplitude of a ripple force that a hand notices at a frequency; the lower of the thresholds that apply.

    Vibration of amplitude x at the frequency f takes the force m (2 pi f)^2 x, m being what shakes: arm and hand.

    Parameters
    ----------
    thresholds
        What is noticed.
    frequency
        [Hz]; NaN: none applies.
    rendered_force
        Force [N] that is felt already; None: a change of force has nothing to be compared with.
    apparent_mass
        Of the arm at the tip [kg].
    """
    choices = []
    if rendered_force is not None and frequency <= thresholds.highest_force_frequency:
        low, high = thresholds.force_share_low * rendered_force, thresholds.force_share_high * rendered_force
        choices.append(Noticed(thresholds.force_share * rendered_force, low, high, by="force"))
    displacement = thresholds.vibration(frequency) if math.isfinite(frequency) else math.inf
    if math.isfinite(displacement):
        force = (apparent_mass + thresholds.hand_mass) * (2.0 * math.pi * frequency) ** 2 * displacement
        spread = thresholds.vibration_spread
        choices.append(Noticed(force, force / spread, force * spread, by="vibration"))
    if not choices:
        return Noticed(math.nan, math.nan, math.nan, by="none")
    return min(choices, key=lambda choice: choice.force)
