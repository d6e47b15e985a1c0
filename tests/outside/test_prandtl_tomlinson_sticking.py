"""Folds and jumps of a rotor dragged over one cogging harmonic (Prandtl 1928, Tomlinson 1929).

With eta = N T / K, phi = N angle and D = N target: D = phi + eta sin phi; above eta = 1 it jumps at cos phi = -1 / eta.
Jump sizes by solving the equation anew at the fold, as tabulated for eta = 2, 3, 5, 10.
"""

import numpy as np
import pytest
from scipy.optimize import brentq

from armeval.evaluate.sticking.cause_routes import map_ratio
from armeval.evaluate.sticking.rests import sticking_events
from armeval.model.trial import StickingRule
from tests.evaluate.sticking_cases import PERIOD, Case, lap, ramp

K, N = 1.5, 84
TABLE = {2.0: 3.293203, 3.0: 3.978958, 5.0: 4.575727, 10.0: 5.116666}


def dragged(eta, target):
    """Overdamped angle for each target: the branch is followed until it folds, then the next one is taken."""
    angle = np.empty(len(target))
    phi = 0.0
    for i, place in enumerate(N * target):

        def balance(x, place=place):
            return x + eta * np.sin(x) - place

        top = phi + 1e-12
        while balance(top) < 0.0:
            top += 1e-3
        phi = brentq(balance, phi, top) if balance(phi) < 0.0 else phi
        angle[i] = phi / N
    return angle


def an_event(arm, target, angle):
    return sticking_events(arm, lap(arm, target, angle, speed=np.gradient(angle, PERIOD)), StickingRule())


@pytest.mark.parametrize("eta", TABLE)
def test_jumps_have_the_tabulated_size_and_are_listed_without_a_rest_before(eta):
    told = 0.025  # rad/s: the target hardly moves while the joint jumps
    target = np.arange(round(3.2 * 2.0 * np.pi / N / told / PERIOD)) * PERIOD * told
    case = Case(T=eta * K / N, K=K, N=N, Fc=0.0, Fs=0.0)
    angle = dragged(eta, target)
    jumps = [event for event in an_event(case.arm(), target, angle) if event.kind == "jump"]
    assert len(jumps) >= 2
    for jump in jumps:
        within = 0.050 * told  # what the target adds within the window of a release
        assert N * abs(jump.release_angle) == pytest.approx(TABLE[eta], abs=N * within)
        fold = np.arccos(-1.0 / eta)
        assert np.mod(N * jump.joint_angle + np.pi, 2.0 * np.pi) - np.pi == pytest.approx(
            np.mod(fold + np.pi, 2.0 * np.pi) - np.pi, abs=0.15
        )


@pytest.mark.parametrize("eta", [0.5, 0.9])
def test_below_the_threshold_nothing_jumps(eta):
    told = 0.05
    target = np.arange(6000) * PERIOD * told
    case = Case(T=eta * K / N, K=K, N=N, Fc=0.0, Fs=0.0)
    assert an_event(case.arm(), target, dragged(eta, target)) == ()


@pytest.mark.parametrize("eta", [0.5, 0.99, 1.01, 3.4])
def test_the_maps_ratio_is_that_of_the_theory(eta):
    case = Case(T=eta * K / N, K=K, N=N)
    arm = case.arm()
    target, _ = ramp(0.1, 0.5)
    still = np.full(len(target), target[0])
    (event,) = an_event(arm, target, still)
    assert map_ratio(arm.drives[0], event, K, None) == pytest.approx(eta, rel=2e-3)
