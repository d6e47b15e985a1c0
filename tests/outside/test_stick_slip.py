"""The replay against closed forms of dry friction and of motion over a periodic potential.

Sources at each test; "derived": worked out from the equation of motion in the test's docstring.
"""

from __future__ import annotations

import math

import numpy as np
import pytest
from scipy.integrate import solve_ivp
from scipy.special import lambertw

from armeval.model.cogmap import CogMap
from tests.one_slide import run, slide, targets


def harmonic(order: int, amplitude: float, cells: int = 8192) -> CogMap:
    return CogMap(amplitude * np.sin(order * 2 * np.pi * np.arange(cells) / cells))


def test_a_coulomb_damped_oscillator_loses_two_dead_bands_a_half_cycle_and_stays() -> None:
    """Thomson, Theory of Vibration, section 2.8: each half cycle takes 2 Fc / k from the amplitude."""
    k, m, period = 2000.0, 2.0, 2e-6
    arm = slide(m, period=period, stiffness=k, coulomb_friction=10.0)
    moved = run(arm, targets(np.zeros(round(0.6 / period)), period), start=0.053)
    q, v = moved.angle[:, 0], moved.speed[:, 0]
    turns = np.flatnonzero((v[1:] == 0.0) & (v[:-1] != 0.0) | (v[1:] * v[:-1] < 0.0))
    np.testing.assert_allclose(q[turns[:5]], [-0.043, 0.033, -0.023, 0.013, -0.003], atol=1e-5)
    assert (v[turns[4] + 2 :] == 0.0).all()
    assert np.ptp(q[turns[4] + 2 :]) == 0.0
    period_seen = moved.time[turns[3]] - moved.time[turns[1]]
    assert period_seen == pytest.approx(0.1986918, rel=1e-4)


def test_a_pulled_block_sticks_and_slips_with_the_times_of_the_closed_form() -> None:
    """Derived, with k x + m x'' = Fc during a slip that starts at the breakaway force Fs, the spring pulled at V:
    it sticks for 2 (Fs - Fc) / (k V) and slips for 2 / w (pi - atan((Fs - Fc) w / (k V))), w^2 = k / m."""
    Fs, Fc, k, m, V, period = 1.5, 1.0, 2.0, 1.0, 0.1, 1e-4
    arm = slide(m, period=period, stiffness=k, coulomb_friction=Fc, static_friction=Fs, stribeck_speed=1e-9)
    t = period * np.arange(round(31.0 / period))
    moved = run(arm, targets(V * t, period))
    rests = moved.resting[:, 0]
    stops = np.flatnonzero(rests[1:] & ~rests[:-1]) + 1
    starts = np.flatnonzero(~rests[1:] & rests[:-1]) + 1
    starts = starts[starts > stops[0]]
    stick = (starts[:2] - stops[: len(starts)][:2]) * period
    slip = (stops[1:3] - starts[:2]) * period
    np.testing.assert_allclose(stick, 5.0000, rtol=1e-3)
    np.testing.assert_allclose(slip, 2.611259, rtol=1e-3)
    np.testing.assert_allclose(np.diff(moved.angle[stops, 0])[:2], 0.7611259, rtol=1e-3)


def steady_speed(
    load: float, amplitude: float, drag: float, mass: float, order: int, start_speed_fraction: float
) -> float:
    """Mean speed over the last half of a run over ``amplitude * sin(order x)`` under a constant load."""
    period = 2e-5
    arm = slide(mass, period=period, load=load, viscous_friction=drag, cog_map=harmonic(order, amplitude))
    moved = run(arm, targets(np.zeros(60_000), period), start=start_speed_fraction)
    half = 30_000
    return float((moved.angle[-1, 0] - moved.angle[half, 0]) / (moved.time[-1] - moved.time[half]))


def test_the_overdamped_washboard_runs_at_its_mean_speed() -> None:
    """Adler 1946 (from memory), resistively shunted junction: mean speed sqrt(load^2 - T^2) / b."""
    T, b = 0.02, 1e-3
    assert steady_speed(0.03, T, b, 1e-9, 84, 0.0) == pytest.approx(22.36068, rel=2e-3)
    assert steady_speed(0.9 * T, T, b, 1e-9, 84, 0.0) == pytest.approx(0.0, abs=1e-9)


@pytest.mark.parametrize(("beta", "ratio"), [(100.0, 0.127009), (400.0, 0.0636226)])
def test_an_underdamped_washboard_retraps_at_its_closed_form(beta: float, ratio: float) -> None:
    """Stewart 1968, McCumber 1968: retrapping near 4 / (pi sqrt(beta)) of T, beta = J N T / b^2.

    The ratios are those of the full equation, integrated elsewhere; the closed form is within 0.3 % of them.
    """
    N, T, J = 20, 0.02, 1e-4
    b = math.sqrt(J * N * T / beta)
    period = 1e-4

    def comes_to_rest(share: float) -> bool:
        # a strong push first, then the load in question: it runs on above the retrapping load only
        arm = slide(J, period=period, load=share * T, viscous_friction=b, stiffness=1e-9, cog_map=harmonic(N, T))
        coasting = 40.0 * J / b
        k = round(coasting / period)
        push = np.zeros(k)
        push[: round(0.05 / period)] = 1.5 * T / 1e-9
        moved = run(arm, targets(push, period))
        return abs(moved.speed[-1, 0]) < 0.05 * share * T / b

    assert comes_to_rest(0.97 * ratio)
    assert not comes_to_rest(1.03 * ratio)


@pytest.mark.parametrize("approach", [-0.05, 0.05])
def test_a_position_loop_rests_anywhere_in_its_dead_band_and_nowhere_else(approach: float) -> None:
    """Common practice, no source: a loop of stiffness K stops within Fc / K of its target (0.02 / 20: 1 mrad)."""
    arm = slide(1e-3, period=1e-4, stiffness=20.0, damping=0.3, coulomb_friction=0.02)
    moved = run(arm, targets(np.zeros(20_000), 1e-4), start=approach)
    assert abs(moved.speed[-1, 0]) < 1e-9
    assert abs(moved.angle[-1, 0]) <= 1e-3 + 1e-9
    for offset, stays in ((0.99e-3, True), (1.01e-3, False)):
        rest = run(arm, targets(np.zeros(2000), 1e-4), start=math.copysign(offset, approach))
        assert (abs(rest.angle[-1, 0]) == offset) == stays


@pytest.mark.parametrize("drag", [0.4, 100.0])
def test_smooth_sliding_starts_at_the_critical_speed_of_the_stribeck_curve(drag: float) -> None:
    """Derived: sliding at V is stable where the slope of Fc + (Fs - Fc) exp(-(v/vs)^2) + b v is positive:
    V above vs sqrt(-W(-2 c^2) / 2), c = b vs / (2 (Fs - Fc)), W the lower branch of Lambert's function."""
    Fs, Fc, vs, m, k, period = 1.5, 1.0, 1e-3, 0.01, 1e3, 2e-6
    c = drag * vs / (2.0 * (Fs - Fc))
    critical = vs * math.sqrt(-0.5 * lambertw(-2.0 * c * c, -1).real)
    assert critical == pytest.approx({0.4: 2.986316e-3, 100.0: 1.679631e-3}[drag], rel=1e-6)
    arm = slide(
        m, period=period, stiffness=k, viscous_friction=drag, coulomb_friction=Fc, static_friction=Fs, stribeck_speed=vs
    )

    def sticks_at(V: float) -> bool:
        """Pulled fast at first, so that it does not stick, then ever more slowly down to V."""
        t = period * np.arange(1_500_000)
        speed = V + 0.5 * np.exp(-np.maximum(t - 0.3, 0.0) / 0.12)
        moved = run(arm, targets(period * np.cumsum(speed), period))
        return bool(moved.resting[-500_000:, 0].any())

    assert not sticks_at(1.1 * critical)
    assert sticks_at(0.9 * critical)


def test_halving_the_step_halves_the_error_or_better() -> None:
    """A body in the well of one cogging period under Coulomb friction, against a stiff integrator that stops at each
    turning point (scipy, tolerance 1e-12)."""
    m, N, T, Fc, start = 1e-5, 3, 0.02, 2e-3, 0.4

    time = 1e-3 * np.arange(451)

    def reference() -> np.ndarray:
        t, q, row = 0.0, start, np.full(len(time), start)
        while T * abs(math.sin(N * q)) > Fc:
            sign = -math.copysign(1.0, math.sin(N * q))

            def motion(_t: float, y: np.ndarray, sign: float = sign) -> list[float]:
                return [y[1], (-T * math.sin(N * y[0]) - sign * Fc) / m]

            def speed(_t: float, y: np.ndarray) -> float:
                return float(y[1])

            speed.terminal, speed.direction = True, -sign  # type: ignore[attr-defined]
            settings = {"rtol": 1e-11, "atol": 1e-13, "method": "DOP853", "dense_output": True}
            solved = solve_ivp(motion, (t, t + 1.0), [q, sign * 1e-12], events=speed, **settings)
            assert solved.status == 1
            inside = (time >= t) & (time <= solved.t[-1])
            if inside.any():
                row[inside] = solved.sol(time[inside])[0]
            t, q = float(solved.t[-1]), float(solved.y[0, -1])
            row[time > t] = q
        return row

    truth = reference()
    assert np.ptp(np.sign(np.diff(truth))) == 2.0  # it swings to and fro before it rests
    substeps = np.array([1, 2, 4, 8, 16, 32])
    errors = []
    for count in substeps:
        arm = slide(m, period=1e-3, coulomb_friction=Fc, cog_map=harmonic(N, -T))
        moved = run(arm, targets(np.zeros(len(time)), 1e-3), start=start, substeps=int(count))
        errors.append(np.sqrt(np.mean((moved.angle[:, 0] - truth) ** 2)))
    order = -np.polyfit(np.log(substeps), np.log(errors), 1)[0]
    assert order > 0.95
    assert errors[-1] < 1e-4


def test_a_stuck_joint_does_not_creep_in_a_million_steps() -> None:
    """Set-valued friction: below its bound a load moves nothing, however long."""
    arm = slide(0.1, period=1e-3, load=0.0099, coulomb_friction=0.01, viscous_friction=1e-3, cog_map=None)
    moved = run(arm, targets(np.full(250_000, 0.123), 1e-3), start=0.123, substeps=4)
    assert (moved.angle == 0.123).all()
    assert (moved.speed == 0.0).all()


def test_a_joint_driven_into_its_stop_stays_there_exactly() -> None:
    arm = slide(0.1, period=1e-3, load=1.0, limit=0.05, coulomb_friction=0.01)
    moved = run(arm, targets(np.zeros(2000), 1e-3))
    assert moved.angle.max() <= 0.05 + 1e-12
    np.testing.assert_allclose(moved.angle[1000:], 0.05, rtol=0, atol=1e-12)
    assert np.ptp(moved.angle[1000:]) == 0.0
