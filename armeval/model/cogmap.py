"""The cog map: cogging torque over one motor turn, as measured."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

import numpy as np
import numpy.typing as npt

from armeval.arrays import FloatArray, frozen
from armeval.errors import InputError
from armeval.kernels.harmonics import ComplexArray, harmonic_series

CogQuantity = Literal["cog_torque", "hold_torque", "hold_current", "hold_voltage", "spin_acceleration"]


@dataclass(frozen=True, eq=False)
class CogMap:
    """Cogging torque of one motor, resampled onto the circle, with what the measurement says about friction and noise.

    Everything is on the motor side. A cogging torque has no mean: the magnets' potential is periodic, so the mean of
    the measurement was taken off and is kept in ``removed_mean``.

    Attributes
    ----------
    torque
        Shape (m,) [N m]. Torque on the rotor at the motor angles ``2 pi k / m``; positive pushes the angle up.
    friction
        Mean of half the difference of the two directions [N m]; None where only one direction was measured.
    friction_ripple
        Shape (m,) [N m]. Half the difference of the two directions at the same angles; None likewise.
    noise
        Standard deviation of one entry of the map [N m], from repeats, else from the residual.
    noise_from
        Where ``noise`` comes from.
    removed_mean
        Mean that was taken off [N m]; with one direction only it is friction, load or sensor offset.
    widest_gap
        Largest angle between neighbouring measured angles [rad], in the sparser direction.
    bandwidth
        Highest order that the samples support; the map holds none above. 0 stands for all that m entries hold.
    direction_lag
        Angle [rad] by which each direction's map is shifted in its own turning direction against their mean; it
        shrinks order N of the mean to cos(N lag) of its size. None where only one direction was measured.
    directions
        How many turning directions were measured, 1 or 2.
    samples
        Number of rows that the map was made from.
    distinct
        Number of different measured angles after merging repeats, in the sparser direction.
    quantity
        What the file held.
    source
        The file as the user named it; empty if there is none.
    """

    torque: FloatArray
    friction: float | None = None
    friction_ripple: FloatArray | None = None
    noise: float = 0.0
    noise_from: Literal["repeats", "residual", "none"] = "none"
    removed_mean: float = 0.0
    widest_gap: float = 0.0
    bandwidth: int = 0
    direction_lag: float | None = None
    directions: int = 1
    samples: int = 0
    distinct: int = 0
    quantity: CogQuantity = "cog_torque"
    source: str = ""

    def __post_init__(self) -> None:
        torque = frozen(self.torque, (None,), "cog map torque")
        if len(torque) < 8:
            raise InputError(f"the cog map has {len(torque)} entries", "give at least 8 angles a turn")
        object.__setattr__(self, "torque", torque)
        if not 0 <= self.bandwidth <= len(torque) // 2:
            raise InputError(
                f"the cog map's bandwidth is {self.bandwidth}",
                f"{len(torque)} entries hold orders 1 to {len(torque) // 2}",
            )
        if self.bandwidth == 0:
            object.__setattr__(self, "bandwidth", len(torque) // 2)
        if self.friction_ripple is not None:
            object.__setattr__(self, "friction_ripple", frozen(self.friction_ripple, (len(torque),), "friction ripple"))

    @property
    def angle(self) -> FloatArray:
        """Shape (m,) [rad]. The motor angles of the entries."""
        return 2.0 * np.pi * np.arange(len(self.torque)) / len(self.torque)

    @property
    def spectrum(self) -> ComplexArray:
        """Shape (bandwidth + 1,). Coefficients c_k of the torque: sum over k > 0 of 2 Re(c_k exp(i k angle))."""
        coefficients = np.fft.rfft(self.torque)[: self.bandwidth + 1] / len(self.torque)
        if 2 * self.bandwidth == len(self.torque):
            coefficients[-1] *= 0.5  # the highest order of an even table stands for k and -k at once
        return coefficients

    def at(self, angle: npt.ArrayLike) -> FloatArray:
        """Torque at any motor angles [rad], shape as given [N m]: the trigonometric polynomial through the entries."""
        wanted = np.asarray(angle, dtype=np.float64)
        return harmonic_series(wanted.ravel(), self.spectrum).reshape(wanted.shape)

    @property
    def peak_to_peak(self) -> float:
        """Largest minus smallest torque over the turn [N m]."""
        return float(np.ptp(self.torque))

    @property
    def rms(self) -> float:
        """Root mean square of the torque over the turn [N m]."""
        return float(np.sqrt(np.mean(self.torque**2)))
