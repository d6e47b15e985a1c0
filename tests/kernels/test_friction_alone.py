"""Friction alone against closed forms: dead band (Fc + Fs) / K, stick time 2 (Fs - Fc) / (K V) of a dragged mass."""

import numpy as np
import pytest

from armeval.kernels.friction_alone import rests_by_friction


def rests(target, told, period, *, J, K, D, Fc, Fs, vs=0.05):
    k = len(target)
    time = period * np.arange(k)
    return rests_by_friction(time, target, told, np.full(k, J), np.full(k, K), np.full(k, D), Fc, Fs, vs)[0]


def runs(flag):
    edges = np.diff(np.concatenate([[0], flag.astype(int), [0]]))
    return np.flatnonzero(edges == 1), np.flatnonzero(edges == -1)


@pytest.mark.parametrize("Fs", [0.004, 0.006])
def test_after_a_reversal_the_joint_rests_until_its_target_has_crossed_the_dead_band(Fs):
    V, K, D, Fc, period = 0.05, 2.0, 0.05, 0.004, 1e-3
    told = np.where(np.arange(6000) < 3000, V, -V)
    target = np.cumsum(told) * period
    resting = rests(target, told, period, J=1e-4, K=K, D=D, Fc=Fc, Fs=Fs)
    after = int(np.argmin(resting[3002:])) + 2  # samples until it first slides again
    # Sliding, the pull is the friction at V. At rest the damping adds -D V, so that it breaks away at -(Fs - D V).
    sliding = Fc + (Fs - Fc) * np.exp(-((V / 0.05) ** 2))
    assert V * period * after == pytest.approx((sliding + Fs - D * V) / K, abs=4.0 * V * period)


def test_a_joint_in_steady_motion_does_not_rest_under_coulomb_friction():
    told = np.full(4000, 0.05)
    resting = rests(np.cumsum(told) * 1e-3, told, 1e-3, J=1e-3, K=2.0, D=0.05, Fc=0.004, Fs=0.004)
    assert not resting[1000:].any()


def test_a_stuck_joint_does_not_creep():
    target = np.full(5000, 0.001)  # K times this is half of the friction
    resting = rests(np.concatenate([[0.0], target]), np.zeros(5001), 1e-3, J=1e-3, K=2.0, D=0.0, Fc=0.004, Fs=0.004)
    assert resting.all()


def test_a_dragged_mass_sticks_as_long_as_the_spring_needs_to_break_it_loose():
    # Fs = 1.5, Fc = 1, k = 2, m = 1, V = 0.1: it sticks for 2 (Fs - Fc) / (k V) = 5 s and slips for 2.611 s. The drop
    # to Fc is made sharp by a small Stribeck speed.
    period = 1e-3
    told = np.full(40000, 0.1)
    resting = rests(np.cumsum(told) * period, told, period, J=1.0, K=2.0, D=0.0, Fc=1.0, Fs=1.5, vs=1e-4)
    first, stop = runs(resting)
    dwell = (stop - first)[1:-1] * period
    assert dwell == pytest.approx(5.0, rel=0.01)
    assert np.diff(first)[1:] * period == pytest.approx(7.611, rel=0.01)
