"""What a hand notices, by published thresholds."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np

from armeval.arrays import FloatArray, frozen
from armeval.errors import InputError


@dataclass(frozen=True, eq=False)
class Thresholds:
    """What a hand notices.

    Attributes
    ----------
    force_share, force_share_low, force_share_high
        Change of force that is noticed, over the force that is felt already.
    force_range
        Forces that were studied (least, largest) [N].
    highest_force_frequency
        Up to this frequency ripple is taken for a change of force [Hz].
    vibration_frequency, vibration_displacement
        Shape (p,) [Hz], [m]. Amplitude of vibration that is noticed; between the points by powers of the frequency.
    vibration_spread
        Factor by which that differs to either side.
    hand_mass
        Mass of the hand that shakes with the handle [kg].
    force_source, vibration_source
        Where the numbers come from.
    source
        The file as the user named it; empty: the shipped one.
    """

    force_share: float
    force_share_low: float
    force_share_high: float
    force_range: tuple[float, float]
    highest_force_frequency: float
    vibration_frequency: FloatArray
    vibration_displacement: FloatArray
    vibration_spread: float
    hand_mass: float
    force_source: str = ""
    vibration_source: str = ""
    source: str = ""

    def __post_init__(self) -> None:
        frequency = frozen(self.vibration_frequency, (None,), "vibration frequency")
        displacement = frozen(self.vibration_displacement, (len(frequency),), "vibration displacement")
        object.__setattr__(self, "vibration_frequency", frequency)
        object.__setattr__(self, "vibration_displacement", displacement)
        if len(frequency) < 2 or frequency[0] <= 0.0 or (np.diff(frequency) <= 0.0).any() or displacement.min() <= 0.0:
            raise InputError(
                "the vibration thresholds are not a row of rising frequencies with displacements above 0",
                "give two or more of each",
                place="[vibration]",
            )
        if not 0.0 < self.force_share_low <= self.force_share <= self.force_share_high < math.inf:
            raise InputError("the shares of force do not rise from low to high", "mend them", place="[force]")
        if not self.vibration_spread >= 1.0:
            raise InputError("the spread is below 1", "give a factor of 1 or more", place="[vibration] spread")

    def vibration(self, frequency: float) -> float:
        """Amplitude [m] that is noticed at a frequency [Hz]; infinite outside the frequencies that were studied."""
        if not self.vibration_frequency[0] <= frequency <= self.vibration_frequency[-1]:
            return math.inf
        logs = np.interp(math.log(frequency), np.log(self.vibration_frequency), np.log(self.vibration_displacement))
        return math.exp(float(logs))
