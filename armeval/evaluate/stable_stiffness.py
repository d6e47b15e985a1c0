"""How stiff a position loop may be made before its delay spoils it."""

from __future__ import annotations

import math

import numpy as np

PHASE_MARGIN = math.radians(30.0)
"""Phase that must be left where the loop's gain falls through 1; a usual least value (common practice)."""


def largest_stiffness(inertia: float, stiffness: float, damping: float, wait: float, speed_cutoff: float) -> float:
    """Largest stiffness that leaves the loop its phase margin, damping growing with the square root of the stiffness.

    The open loop is (K + D s / (1 + s / w_f)) e^(-s T) / (J s^2); T holds the delay and half a period, for which the
    torque is held on average.

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
    In N m/rad; 0 where the loop lacks the margin even when it is a thousand times softer.
    """
    best = 0.0
    s = 1j * np.logspace(-1.0, 4.5, 4000)
    for factor in np.logspace(-3.0, 3.0, 241):
        K, D = factor * stiffness, math.sqrt(factor) * damping
        filtered = s if math.isinf(speed_cutoff) else s / (1.0 + s / (2.0 * math.pi * speed_cutoff))
        loop = (K + D * filtered) * np.exp(-s * wait) / (inertia * s**2)
        last = np.flatnonzero(np.abs(loop) >= 1.0)
        if len(last) == 0:
            continue
        at = slice(0, int(last[-1]) + 1)
        phase = np.unwrap(np.angle(loop[at]))
        if phase[-1] + math.pi >= PHASE_MARGIN:
            best = max(best, float(K))
    return best
