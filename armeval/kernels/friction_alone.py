"""How a joint would follow its target if nothing but its inertia and dry friction opposed the servo."""

from __future__ import annotations

import math

import numpy as np

from armeval.arrays import BoolArray, FloatArray
from armeval.kernels.compile import jit


@jit
def rests_by_friction(
    time: FloatArray,
    target: FloatArray,
    told: FloatArray,
    inertia: FloatArray,
    stiffness: FloatArray,
    damping: FloatArray,
    coulomb: float,
    static: float,
    stribeck_speed: float,
) -> tuple[BoolArray, FloatArray]:
    """Find where friction alone holds a joint, and at which angle.

    One step a sample of J v' = K (target - angle) + D (target speed - v) - friction, linearly implicit in angle and
    speed, with friction as a bounded impulse: a joint that it can hold stands exactly still.

    Parameters
    ----------
    time, target, told
        Shape (k,) [s], [rad], [rad/s]. ``told`` is the target's speed.
    inertia, stiffness, damping
        Shape (k,). J, K and D at the joint [kg m^2], [N m/rad], [N m s/rad].
    coulomb, static, stribeck_speed
        Fc, Fs [N m] and the speed [rad/s] at which friction has fallen from Fs most of the way to Fc.

    Returns
    -------
    Shape (k,) each. Whether the joint rests at the sample, and its angle there [rad].
    """
    k = target.shape[0]
    rests, angles = np.ones(k, np.bool_), np.empty(k)
    angle, speed = target[0], 0.0
    angles[0] = angle
    for i in range(k - 1):
        h = time[i + 1] - time[i]
        J, K, D = inertia[i], stiffness[i], damping[i]
        effective = J + h * D + h * h * K
        pull = K * (target[i + 1] - angle) + D * told[i + 1]
        bound = coulomb + (static - coulomb) * math.exp(-((speed / stribeck_speed) ** 2))
        free = (J * speed + h * pull) / effective
        held = h * bound / effective
        speed = free - held if free > held else (free + held if free < -held else 0.0)
        angle += h * speed
        rests[i + 1], angles[i + 1] = speed == 0.0, angle
    return rests, angles
