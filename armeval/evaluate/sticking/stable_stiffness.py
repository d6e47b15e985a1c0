"""How stiff a position loop may be made before its delay spoils it."""

from __future__ import annotations

import math

import numpy as np

PHASE_MARGIN = math.radians(30.0)
"""Phase that must be left where the loop's gain falls through 1; a usual least value (common practice)."""

_SLOWEST, _FASTEST = 0.1, 10.0**4.5
"""Frequencies [rad/s] between which the gain's fall through 1 is looked for."""


def largest_stiffness(inertia: float, stiffness: float, damping: float, wait: float, speed_cutoff: float) -> float:
    """Largest stiffness that leaves the loop its phase margin, damping growing with the square root of the stiffness.

    The open loop is (K + D s / (1 + s / w_f)) e^(-s T) / (J s^2); T holds the delay and half a period, for which the
    torque is held on average. Its gain falls all the way, so there is one frequency at which it is 1.

    Parameters
    ----------
    inertia, stiffness, damping
        J, K, D of the joint as it is [kg m^2], [N m/rad], [N m s/rad].
    wait
        T [s].
    speed_cutoff
        Corner of the speed filter, w_f / (2 pi) [Hz]; may be infinite.

    Returns
    -------
    In N m/rad, in steps of 6 %; 0 where the loop lacks the margin even when it is a thousand times softer.
    """
    factor = np.logspace(-3.0, 3.0, 241)
    K, D = factor * stiffness, np.sqrt(factor) * damping

    def spring(w: np.typing.NDArray[np.float64]) -> np.typing.NDArray[np.complex128]:
        s = 1j * w
        return np.asarray(K + D * s / (1.0 + s / (2.0 * math.pi * speed_cutoff)))

    low, high = np.full_like(K, _SLOWEST), np.full_like(K, _FASTEST)
    crosses = np.abs(spring(low)) >= inertia * low**2
    for _ in range(50):
        middle = np.sqrt(low * high)
        above = np.abs(spring(middle)) >= inertia * middle**2
        low, high = np.where(above, middle, low), np.where(above, high, middle)
    margin = np.angle(spring(low)) - low * wait
    enough = K[crosses & (margin >= PHASE_MARGIN)]
    return float(enough.max()) if enough.size else 0.0
