import dataclasses
import math

import numpy as np
import pytest

from armeval.evaluate.sticking.cause import find_causes
from armeval.evaluate.sticking.rests import sticking_events
from armeval.model.trial import Compensation, StickingRule
from tests.evaluate.sticking_cases import Case, lap, moved, ramp, to_and_fro

RULE = StickingRule()


def caused(arm, track, counterfactual=None):
    found = sticking_events(arm, track, RULE)
    found = find_causes(arm, [track], found, rule=RULE, compensation=Compensation(), counterfactual=counterfactual)
    return [event for event in found if event.kind == "rest"]


def route(event, name):
    (found,) = [route for route in event.routes if route.name == name]
    return found


# A joint that its cogging stops again and again: N T / K is 3.4, and Fs is Fc, so that friction alone never stops it.
COGGED = Case(T=0.06, K=1.5, N=84, Fc=0.006, Fs=0.006, J=5e-4, D=0.02)


def cogged_lap(arm):
    target, told = ramp(0.12, 8.0)
    angle, _ = moved(COGGED, target, told)
    return lap(arm, target, angle)


def test_rests_at_reversals_from_friction_are_not_called_cogging():
    # The planted negative: the map shows strong cogging, but the joint that made the log has none.
    smooth = Case(Fc=0.006, Fs=0.007)
    arm = dataclasses.replace(COGGED, Fc=0.006, Fs=0.007, J=smooth.J, D=smooth.D).arm()
    target, told = to_and_fro(0.15, turns=8)
    angle, _ = moved(smooth, target, told)
    found = caused(arm, lap(arm, target, angle))
    assert len(found) >= 6
    assert {event.cause for event in found} == {"friction"}


def test_rests_in_steady_motion_over_a_steep_map_are_cogging_by_several_routes():
    arm = COGGED.arm()
    found = [event for event in caused(arm, cogged_lap(arm)) if event.start > 0.5]
    assert len(found) >= 5
    assert all(event.cause == "cogging" for event in found)
    assert {route(event, "map").says for event in found} == {"cogging"}
    assert route(found[0], "periodicity").says == "cogging"
    assert "within a fifth of a cog pitch" in route(found[0], "periodicity").text


def test_without_a_map_and_without_an_order_cogging_is_not_shown():
    arm = COGGED.arm(with_map=False)
    found = [event for event in caused(arm, cogged_lap(arm)) if event.start > 0.5]
    assert len(found) >= 5
    assert all(event.cause == "unexplained" for event in found)
    assert route(found[0], "map").says == route(found[0], "periodicity").says == "not shown"
    assert "measure" in route(found[0], "map").text
    assert "slots and poles" in route(found[0], "periodicity").text


def test_slots_and_poles_are_enough_to_see_the_pitch():
    arm = COGGED.arm(with_map=False, slots=12, poles=14)
    found = [event for event in caused(arm, cogged_lap(arm)) if event.start > 0.5]
    assert all(route(event, "periodicity").says == "cogging" for event in found)
    assert all(event.cause == "cogging" for event in found)


def test_few_rests_show_no_periodicity():
    arm = COGGED.arm(with_map=False, slots=12, poles=14)
    whole = cogged_lap(arm)
    first = [event for event in sticking_events(arm, whole, RULE) if event.kind == "rest" and event.start > 0.5][:3]
    found = find_causes(arm, [whole], first, rule=RULE, compensation=Compensation())
    assert all(route(event, "periodicity").says == "not shown" for event in found)
    assert "too few" in route(found[0], "periodicity").text


def test_a_joint_at_the_end_of_its_range_is_held_by_the_limit():
    case = Case(upper=0.40)
    target, _told = ramp(0.1, 2.0)
    arm = case.arm()
    (event,) = caused(arm, lap(arm, target, np.minimum(target, 0.40)))
    assert event.cause == "joint limit"


def test_a_torque_at_its_limit_is_the_cause():
    case = Case(limit=0.02)
    arm = case.arm()
    target, _told = ramp(0.1, 2.0)
    angle = np.minimum(target, 0.38)
    torque = np.clip(case.K * (target - angle), -0.02, 0.02)
    (event,) = caused(arm, lap(arm, target, angle, torque=torque))
    assert event.cause == "torque limit"


def test_a_predicted_rest_that_vanishes_without_cogging_is_cogging():
    arm = COGGED.arm()
    target, told = ramp(0.12, 8.0)
    smooth = dataclasses.replace(COGGED, T=0.0)
    dry = dataclasses.replace(COGGED, Fc=0.0, Fs=0.0)

    def without(joint, cause):
        assert joint == "turn"
        angle, speed = moved({"cogging": smooth, "friction": dry}[cause], target, told)
        return lap(arm, target, angle, speed=speed)

    angle, speed = moved(COGGED, target, told)
    found = [event for event in caused(arm, lap(arm, target, angle, speed=speed), without) if event.start > 0.5]
    assert len(found) >= 5
    assert all(event.cause == "cogging" for event in found)
    assert route(found[0], "counterfactual").text == "without cogging it does not rest here"


def test_a_predicted_rest_that_only_friction_explains_is_friction():
    case = Case(Fc=0.006, Fs=0.007)
    arm = case.arm()
    target, told = to_and_fro(0.15, turns=4)

    def without(joint, cause):
        angle, speed = moved(case if cause == "cogging" else dataclasses.replace(case, Fc=0.0, Fs=0.0), target, told)
        return lap(arm, target, angle, speed=speed)

    angle, speed = moved(case, target, told)
    found = caused(arm, lap(arm, target, angle, speed=speed), without)
    assert len(found) >= 3
    assert {event.cause for event in found} == {"friction"}
    says = [r.says for r in found[0].routes if r.name == "counterfactual"]
    assert says == ["not shown", "friction"]


def test_friction_that_is_not_known_is_said_to_be_missing():
    arm = dataclasses.replace(COGGED, Fc=0.0, Fs=0.0).arm()
    found = caused(arm, cogged_lap(arm))
    assert all("coulomb_friction" in route(event, "torque").text for event in found)
    assert math.isfinite(found[0].pull_end)


@pytest.mark.parametrize("name", ["limits", "torque", "map", "periodicity"])
def test_every_logged_rest_has_been_looked_at_by_every_route(name):
    arm = COGGED.arm()
    assert all(route(event, name).text for event in caused(arm, cogged_lap(arm)))
