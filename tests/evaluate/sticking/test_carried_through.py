"""Ratio against replay for one joint that is told to move at a steady speed, slowly and fast."""

import json
from functools import cache

import numpy as np
import pytest

from armeval.evaluate.locate import locate
from armeval.evaluate.replaying.sticking_ratio import StickingRatio
from armeval.evaluate.sticking.carried_through import carried_through
from armeval.evaluate.sticking.rests import sticking_events
from armeval.model.trial import StickingRule
from tests.evaluate.sticking_cases import Case, lap, moved, ramp, to_and_fro

# N T / K = 3.4: the ratio is above 1 over a part of every pitch.
COGGED = Case(T=0.06, K=1.5, N=84, Fc=0.006, Fs=0.006, J=5e-4, D=0.02)
PITCH = 2.0 * np.pi / COGGED.N


def ratio_of(case, target, arc):
    """The closed form along the plan, N T cos(N q) / K, and its bound N T / K."""
    ratio = case.N * case.T / case.K * np.cos(case.N * target)[:, None]
    bound = np.full_like(ratio, case.N * case.T / case.K)
    return StickingRatio(("turn",), False, arc, ratio, bound, ratio[:, 0], bound[:, 0])


@cache
def held_against(case, speed, duration):
    target, told = ramp(speed, duration)
    return held(case, target, told)


def held(case, target, told):
    arm = case.arm()
    angle, true_speed = moved(case, target, told)
    track = lap(arm, target, angle, speed=true_speed)
    events = sticking_events(arm, track, StickingRule())
    (found,) = carried_through(arm, track, ratio_of(case, target, track.arc), events, StickingRule())
    return found, target


def steep_places_passed(target):
    """Maxima of cos(N q) that the target passes."""
    return np.floor(target[-1] / PITCH) - np.floor(target[0] / PITCH)


def test_a_slow_joint_sticks_at_every_steep_place():
    found, target = held_against(COGGED, 0.12, 6.0)
    assert abs(found.places - steep_places_passed(target)) <= 1
    assert found.places >= 8
    # The last one may still lie ahead of the joint when the target stops there.
    assert found.sticks_at >= found.places - 1
    assert 0.11 < found.fastest_rest < 0.13
    assert not found.gentle_rests


def test_speed_carries_a_fast_joint_through_the_same_places():
    slow, _ = held_against(COGGED, 0.12, 6.0)
    fast, target = held_against(COGGED, 2.5, 6.0 * 0.12 / 2.5)
    assert abs(fast.places - slow.places) <= 1
    assert fast.places - fast.sticks_at >= fast.places - 2  # while it speeds up it may rest
    last = fast.carried[-1]
    assert last.ratio == pytest.approx(COGGED.N * COGGED.T / COGGED.K, rel=0.01)
    assert last.fastest == pytest.approx(2.5, rel=0.01)
    assert last.end_arc <= 0.2 * (target[-1] - target[0])
    assert "speed carries it through" in fast.text
    assert "2.5 rad/s there" in fast.text


def test_a_joint_that_is_told_to_move_faster_and_faster_sticks_first_and_is_carried_later():
    t = np.arange(2500) * 1e-3
    told = 0.12 + 2.38 * np.clip((t - 1.5) / 0.5, 0.0, 1.0)
    target = 0.3 + np.cumsum(told) * 1e-3
    found, _ = held(COGGED, target, told)
    assert found.sticks_at >= 2
    assert found.fastest_rest < 2.0
    assert all(stretch.slowest > 5.0 * 0.12 for stretch in found.carried)
    assert found.carried[0].start_arc > 0.2 * (np.interp(1.5, t, target) - target[0])
    assert sum(stretch.places for stretch in found.carried) == found.places - found.sticks_at > 15


def test_rests_from_friction_alone_are_said_to_lie_where_the_ratio_is_below_1():
    case = Case(T=0.002, K=1.5, N=84, Fc=0.006, Fs=0.007)  # N T / K = 0.11
    target, told = to_and_fro(0.15, turns=4)
    found, _ = held(case, target, told)
    assert found.places == found.sticks_at == 0
    assert len(found.gentle_rests) >= 3
    assert all(gentle.ratio == pytest.approx(0.112, rel=0.01) for gentle in found.gentle_rests)
    assert "where the ratio stays below 1" in found.text


def test_a_joint_that_is_hardly_told_to_move_passes_no_place():
    found, _ = held_against(COGGED, 0.01, 4.0)
    assert found.places == 0
    assert found.text == ""


def test_it_stands_in_the_document_and_text_of_a_prediction_and_in_no_log():
    target, told = ramp(0.12, 3.0)
    arm = COGGED.arm()
    angle, speed = moved(COGGED, target, told)
    predicted, logged = lap(arm, target, angle, speed=speed), lap(arm, target, angle)
    location = locate(arm, [[logged], [predicted]], ratios={"bare": ratio_of(COGGED, target, predicted.arc)})
    log, prediction = json.loads(location.to_json())["runs"]
    assert "carried_through" not in log
    (entry,) = prediction["carried_through"]
    assert entry["joint"] == "turn"
    assert entry["places"] == entry["sticks_at"] + sum(stretch["places"] for stretch in entry["carried"])
    assert "The sticking ratio of turn exceeds 1 at" in location.to_text()
