"""The invented motors: what their cogging was on the test bench, and in which form each was written down.

Amplitudes are a few percent of the peak torque at the order of the design, LCM(slots, poles), and less at its double
and at the orders of slots and poles that manufacturing tolerances bring. Torques are motor side.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

Harmonic = tuple[int, float, float]


@dataclass(frozen=True)
class BenchMotor:
    """A motor as it was on the bench.

    Harmonics as (order, amplitude [N m], phase [rad]) of amplitude*sin(order*angle+phase); bearing friction and the
    noise of one reading [N m]; constants [N m/A], [ohm], [kg m^2] where the map's form needs them.
    """

    harmonics: tuple[Harmonic, ...]
    friction: float
    noise: float
    torque_constant: float = math.nan
    winding_resistance: float = math.nan
    rotor_inertia: float = math.nan


TERN = {
    "turn": BenchMotor(
        ((84, 16e-3, 0.4), (168, 2.2e-3, 2.1), (14, 5e-3, 1.2), (12, 3.5e-3, -0.8), (28, 2e-3, 0.5), (24, 1.2e-3, 2.9)),
        friction=2.2e-3,
        noise=0.3e-3,
    ),
    "lift": BenchMotor(
        (
            (84, 18e-3, -1.9),
            (168, 2.6e-3, 0.7),
            (12, 4.5e-3, 2.2),
            (14, 4e-3, -2.6),
            (24, 1.8e-3, 1.1),
            (28, 1.5e-3, 0),
        ),
        friction=2.5e-3,
        noise=0.4e-3,
    ),
    "reach": BenchMotor(
        ((84, 8e-3, 1.4), (168, 1e-3, -0.3), (14, 2.5e-3, 2.7), (12, 2e-3, 0.9), (24, 0.8e-3, -1.6)),
        friction=1.4e-3,
        noise=0.2e-3,
        torque_constant=0.09,
    ),
}

PLOVER = {
    "shoulder": BenchMotor(
        ((200, 14e-3, 0.2), (400, 1e-3, 1.7), (50, 4e-3, -1.1), (100, 3e-3, 2.4), (8, 1e-3, 0.6)),
        friction=3e-3,
        noise=0.3e-3,
        torque_constant=0.25,
    ),
    "elbow": BenchMotor(
        ((200, 8e-3, -2.2), (400, 0.6e-3, 0.4), (50, 2.5e-3, 1.9), (100, 1.5e-3, -0.7), (8, 0.6e-3, 3.0)),
        friction=2e-3,
        noise=0.2e-3,
        torque_constant=0.18,
        winding_resistance=2.4,
    ),
}

HERON = {
    "turn": BenchMotor(
        ((36, 2.4e-3, 1.0), (72, 0.4e-3, -2.0), (12, 0.9e-3, 0.3), (9, 0.7e-3, 1.6), (18, 0.3e-3, -0.5)),
        friction=0.6e-3,
        noise=0.05e-3,
        rotor_inertia=1.5e-6,
    ),
    "lift": BenchMotor(
        ((36, 2.2e-3, -0.6), (72, 0.5e-3, 1.3), (12, 1.1e-3, 2.0), (9, 0.5e-3, -1.4)),
        friction=0.6e-3,
        noise=0.06e-3,
    ),
    "reach": BenchMotor(
        ((36, 1.7e-3, 2.5), (72, 0.3e-3, 0.1), (12, 0.6e-3, -2.8), (9, 0.5e-3, 0.8)),
        friction=0.5e-3,
        noise=0.05e-3,
    ),
    "tilt": BenchMotor(
        ((36, 0.8e-3, 0.9), (72, 0.12e-3, -1.2), (12, 0.3e-3, 1.5), (9, 0.2e-3, 2.2)),
        friction=0.3e-3,
        noise=0.03e-3,
    ),
}
