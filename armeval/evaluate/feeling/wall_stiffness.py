"""How stiff a virtual wall may be: published bounds that keep a sampled wall from feeding the hand energy.

They are about one direction, an ideal actuator and no delay; a real wall shakes earlier where torque comes late.
"""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

from armeval.arrays import FloatArray

DAMPING_BOUND = "J. E. Colgate and G. Schenkel 1994 (from memory): K < 2 (b - |B|) / T"
FRICTION_BOUND = (
    "J. J. Abbott and A. M. Okamura 2005 (abstract read, formula from memory): K <= min(2 b / T, 2 f_c / step)"
)


def least_damping(stiffness: float, period: float, virtual_damping: float = 0.0) -> float:
    """Damping b [N s/m] above which a wall is passive: b > K T / 2 + |B| (Colgate and Schenkel 1994, from memory).

    Parameters
    ----------
    stiffness
        K of the wall [N/m].
    period
        T between two samples [s].
    virtual_damping
        B of the wall [N s/m].
    """
    return stiffness * period / 2.0 + abs(virtual_damping)


def stiffest_by_damping(damping: npt.ArrayLike, period: float, virtual_damping: float = 0.0) -> FloatArray:
    """Stiffness [N/m] below which damping keeps a sampled wall passive: the same bound turned round, at least 0."""
    return np.maximum(2.0 * (np.asarray(damping, dtype=np.float64) - abs(virtual_damping)) / period, 0.0)


def stiffest_by_friction(friction: npt.ArrayLike, step: npt.ArrayLike) -> FloatArray:
    """Stiffness [N/m] up to which Coulomb friction [N] swallows what an encoder step [m] feeds: 2 f_c / step.

    J. J. Abbott and A. M. Okamura, "Effects of position quantization and sampling rate on virtual-wall passivity", IEEE
    Trans. Robotics 21(5), 2005 (abstract read, formula from memory). Infinite for an ideal encoder.
    """
    step = np.asarray(step, dtype=np.float64)
    bound = np.divide(
        2.0 * np.asarray(friction, dtype=np.float64), step, out=np.full(step.shape, np.inf), where=step > 0
    )
    return np.asarray(bound)
