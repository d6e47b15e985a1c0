"""Sine, cosine and decay in plain arithmetic, for one number or for lanes.

The compiler turns a call of the mathematical library on eight numbers into eight calls; these stay vector instructions.
"""

from __future__ import annotations

import math

import numpy as np

from armeval.kernels.compile import jit_inline
from armeval.kernels.lanes import where

# pi / 2 in three parts of 33 bits (and a rest), so that multiples of the first two are exact
_HALF_PI = (1.57079632673412561417e00, 6.07710050630396597660e-11, 2.02226624879595063154e-21)
_TWO_OVER_PI = 2.0 / math.pi


@jit_inline
def sine_cosine(angle: float) -> tuple[float, float]:
    """Give sine and cosine of an angle [rad] of less than a million turns, right to two units in the last place.

    The angle is brought within a quarter of pi, where the polynomials of Sun Microsystems' freely distributable
    mathematical library (fdlibm, 1993, k_sin.c and k_cos.c) hold.
    """
    quarter = np.rint(angle * _TWO_OVER_PI)
    x = ((angle - quarter * _HALF_PI[0]) - quarter * _HALF_PI[1]) - quarter * _HALF_PI[2]
    z = x * x
    sine = x + x * z * (
        -1.66666666666666324348e-01
        + z
        * (
            8.33333333332248946124e-03
            + z
            * (
                -1.98412698298579493134e-04
                + z * (2.75573137070700676789e-06 + z * (-2.50507602534068634195e-08 + z * 1.58969099521155010221e-10))
            )
        )
    )
    cosine = (1.0 - 0.5 * z) + z * z * (
        4.16666666666666019037e-02
        + z
        * (
            -1.38888888888741095749e-03
            + z
            * (
                2.48015872894767294178e-05
                + z * (-2.75573143513906633035e-07 + z * (2.08757232129817482790e-09 + z * -1.13596475577881948265e-11))
            )
        )
    )
    turn = quarter - 4.0 * np.floor(0.25 * quarter)  # 0, 1, 2 or 3
    odd = (turn == 1.0) | (turn == 3.0)
    first, second = where(odd, cosine, sine), where(odd, sine, cosine)
    return where(turn >= 2.0, -first, first), where((turn == 1.0) | (turn == 2.0), -second, second)


@jit_inline
def decay(x: float) -> float:
    """Give exp(-x) for x of 0 or more, right to 1e-13 of itself and to 1e-17 of 1.

    From the series of exp(-x / 128), squared seven times; beyond x = 40 it stays at exp(-40).
    """
    y = where(x > 40.0, 40.0, x) * (-1.0 / 128.0)
    term: float = 1.0 + y * (1.0 / 12.0)
    for k in range(11, 0, -1):
        term = 1.0 + y * term * (1.0 / k)
    for _ in range(7):
        term = term * term
    return term
