"""What to do about a region: the right sentence for each cause, its numbers against closed forms."""

import math
from dataclasses import replace

import numpy as np
import pytest

from armeval.evaluate.sticking.action import action, fastest_told
from armeval.evaluate.sticking.regions import Region
from armeval.evaluate.sticking.sticking_event import StickingEvent
from armeval.model.trial import Compensation
from tests.evaluate.sticking_cases import PERIOD, REACH, Case, lap

# N T / K = 3.36; inertia and damping leave the loop room to be stiffened.
COGGED = Case(T=0.06, K=1.5, N=84, Fc=0.006, Fs=0.008, J=5e-4, D=0.02)
SLOW, FAST = 0.1, 0.4


def said(case, cause, *, arm=None, compensated=False, compensation=None, faster=True, direction=1.0):
    """The sentence for a rest half-way along the slow part of a motion that is slow first and, if so, fast later."""
    arm = arm or case.arm()
    told = np.concatenate([np.full(2000, SLOW), np.full(1000, FAST if faster else SLOW)])
    target = direction * np.cumsum(told) * PERIOD
    track = lap(arm, target, target, compensated=compensated)
    event = StickingEvent(
        run="bare", lap=1, source="log", joint="turn", kind="rest", start=1.0, end=1.1, start_error=0.0, end_error=0.0,
        start_arc=REACH * 0.1, end_arc=REACH * 0.11, joint_angle=0.1, motor_angle=0.1, angle_error=1e-4,
        direction=direction, target_speed=SLOW, lag=1e-3, release_angle=0.01, release_distance=1e-3, pull_start=0.0,
        pull_end=0.02, reversal=False, cause=cause,
    )  # fmt: skip
    region = Region(
        run="bare", source="log", joint="turn", start_arc=event.start_arc, end_arc=event.end_arc, joint_angle=0.1,
        motor_angle=0.1, direction=direction, target_speed=SLOW, laps=1, of_laps=1, dwell=0.1, lag=1e-3,
        release_angle=0.01, release_distance=1e-3, pull=0.02, harm=0.1, cause=cause, events=(event,),
    )  # fmt: skip
    asked = fastest_told([track])
    return action(arm, region, [track], [event], asked=asked, compensation=compensation or Compensation())


def test_bare_cogging_names_the_stiffness_at_which_the_sticking_ratio_is_one():
    # d/dq of T sin(N q) is at most N T = 5.04 N m/rad.
    text = said(COGGED, "cogging")
    assert text.startswith("Compensate turn's cogging first, or raise its stiffness from 1.5 to above 5.0 N·m/rad")


def test_a_stiffness_that_the_torque_limit_cannot_use_is_refused():
    # The magnets and friction together hold with T + Fs = 0.068 N m.
    enough, short = (said(replace(COGGED, limit=limit), "cogging") for limit in (0.07, 0.066))
    assert "too low to pull through" not in enough
    assert "its torque limit of 66.0 mN·m is too low to pull through" in short


def test_a_well_damped_joint_may_be_stiffened_and_a_slow_servo_forbids_it():
    # Where K / (J w^2) is 1, w is sqrt(K / J) = 100 rad/s and more for K = N T: a wait of 10.5 ms takes 60 degrees of
    # phase there, and damping can give 90 at most, of which 30 must be left.
    damped = replace(COGGED, D=0.06)
    arm = damped.arm()
    slow = replace(arm, servo=replace(arm.servo, delay=0.010))
    assert "which torque limit and servo rate allow" in said(damped, "cogging")
    text = said(damped, "cogging", arm=slow)
    assert "which torque limit and servo rate allow" not in text
    assert "at this servo rate and delay about" in text or "no phase to spare" in text


def test_gentle_cogging_asks_for_no_more_stiffness():
    text = said(replace(COGGED, T=0.01), "cogging")  # N T / K = 0.56
    assert "its stiffness of 1.5 N·m/rad already exceeds the cogging's slope" in text


def test_compensated_cogging_says_what_the_table_leaves_by_its_index_error():
    # An index error of sigma turns a harmonic of order N into what is left of it, sqrt(2 (1 - exp(-(N sigma)^2 / 2)))
    # on average, N sigma for small errors: 84 times 0.1 deg is 0.147.
    compensation = Compensation(table_bins=65536, index_error=math.radians(0.1), map_noise=0.0)
    text = said(COGGED, "cogging", compensated=True, compensation=compensation)
    assert text.startswith("Mend turn's compensation first: the table should leave 15 % of the cogging")
    assert "most of that through its index error of 0.10 deg" in text


def test_compensated_cogging_says_when_the_table_is_too_coarse():
    # Linear interpolation over 168 bins, two a period, cannot hold the harmonic.
    compensation = Compensation(table_bins=168, index_error=0.0, map_noise=0.0)
    assert "most of that through its 168 bins" in said(COGGED, "cogging", compensated=True, compensation=compensation)


def test_cogging_without_a_map_asks_for_the_map():
    text = said(COGGED, "cogging", arm=COGGED.arm(with_map=False))
    assert text.startswith("Measure the cog map of turn first")


def test_friction_names_the_dead_band_and_the_stiffness_that_halves_it():
    # (Fc + Fs) / K = 0.014 / 1.5 rad = 0.53 deg.
    text = said(COGGED, "friction")
    assert "pulled through 0.53 deg" in text
    assert "halves at 3.0 N·m/rad" in text


@pytest.mark.parametrize("cause", ["cogging", "friction"])
def test_the_speed_above_which_it_never_rested_is_the_fastest_at_which_it_did(cause):
    assert "Told to move faster than 0.10 rad/s it never rested in this run" in said(COGGED, cause)
    assert "never rested" not in said(COGGED, cause, faster=False)


def test_a_torque_limit_is_named():
    assert said(replace(COGGED, limit=0.25), "torque limit").startswith("Give turn more torque than 250 mN·m")


@pytest.mark.parametrize(("direction", "end"), [(1.0, "45"), (-1.0, "-30")])
def test_the_end_of_the_range_that_is_meant_is_the_one_it_moves_to(direction, end):
    case = replace(COGGED, lower=math.radians(-30.0), upper=math.radians(45.0))
    assert f"beyond the end of its range at {end}" in said(case, "joint limit", direction=direction)


def test_what_nothing_explains_asks_for_a_map_or_for_a_look_at_the_rest():
    assert said(COGGED, "unexplained", arm=COGGED.arm(with_map=False)).startswith("Measure the cog map of turn first")
    assert "explains 20.0 mN·m of pull" in said(COGGED, "unexplained")
