"""The largest stiffness against the loop itself: its phase margin on a fine row, and its motion in time."""

import math

import numpy as np
import pytest

from armeval.evaluate.sticking.stable_stiffness import largest_stiffness

LOOPS = [
    (0.002, 3.0, 0.08, 0.0015, 150.0),
    (0.55, 71.7, 9.0, 0.0052, 150.0),
    (0.0012, 7.7, 0.09, 0.0073, 500.0),
    (0.03, 40.0, 0.9, 0.0005, math.inf),
]


def margin(inertia: float, K: float, D: float, wait: float, cutoff: float) -> float:
    """Phase [rad] above -pi where the gain last is 1, its phase followed from low frequencies on."""
    w = np.linspace(0.05, 3e3, 400_000)
    s = 1j * w
    loop = (K + D * s / (1.0 + s / (2.0 * math.pi * cutoff))) * np.exp(-s * wait) / (inertia * s**2)
    last = int(np.flatnonzero(np.abs(loop) >= 1.0)[-1])
    assert last < len(w) - 1
    # at low frequencies the phase is that of a spring on an inertia, -pi
    phase = np.unwrap(np.concatenate(([-math.pi], np.angle(loop[: last + 1]))))
    return float(phase[-1]) + math.pi


def swing(inertia: float, K: float, D: float, wait: float) -> float:
    """Largest deflection late over largest deflection early, of the loop with its delay, let go from 1."""
    step = wait / 50.0
    waits, periods = 50, int(40.0 * 2.0 * math.pi * math.sqrt(inertia / K) / step)
    q, v, torques, path = 1.0, 0.0, [0.0] * waits, []
    for _ in range(periods):
        torques.append(-K * q - D * v)
        v += step * torques.pop(0) / inertia
        q += step * v
        path.append(abs(q))
    part = periods // 4
    return max(path[-part:]) / max(path[:part])


@pytest.mark.parametrize("loop", LOOPS)
def test_the_margin_is_there_at_the_largest_stiffness_and_gone_beyond(loop):
    inertia, stiffness, damping, wait, cutoff = loop
    most = largest_stiffness(*loop)
    factor = most / stiffness
    assert margin(inertia, most, math.sqrt(factor) * damping, wait, cutoff) >= math.radians(29.9)
    stiffer = 1.07 * factor
    assert margin(inertia, stiffer * stiffness, math.sqrt(stiffer) * damping, wait, cutoff) < math.radians(30.1)


def test_a_loop_without_damping_has_no_margin_however_soft():
    assert largest_stiffness(0.01, 10.0, 0.0, 1e-3, math.inf) == 0.0


def test_a_joint_at_its_largest_stiffness_comes_to_rest_and_a_much_stiffer_one_does_not():
    inertia, stiffness, damping, wait = 0.03, 40.0, 0.9, 0.004
    most = largest_stiffness(inertia, stiffness, damping, wait, math.inf)
    factor = most / stiffness
    assert swing(inertia, most, math.sqrt(factor) * damping, wait) < 0.05
    factor *= 12.0
    assert swing(inertia, factor * stiffness, math.sqrt(factor) * damping, wait) > 1.0


def test_longer_delay_allows_less_stiffness():
    most = [largest_stiffness(0.03, 40.0, 0.9, wait, 150.0) for wait in (0.0005, 0.001, 0.002, 0.004)]
    assert np.all(np.diff(most) < 0.0)


def test_a_weakly_damped_joint_has_no_margin_at_any_stiffness():
    # Its phase at the crossover is atan(2 zeta * about 1), 29 degrees and less, before any delay.
    assert largest_stiffness(0.55, 71.7, 2.0 * 0.2 * math.sqrt(0.55 * 71.7), 0.005, 150.0) == 0.0
