import numpy as np
import pytest

from armeval.evaluate.sticking.rest import rests_by_speed
from armeval.model.trial import StickingRule

TIME = np.arange(200) * 1e-3


def found(speed, told, rule=None):
    return list(rests_by_speed(TIME, np.full(200, 0.4), speed, told, rule or StickingRule()))


def slow_between(first, stop, share, told=0.1):
    speed = np.full(200, told)
    speed[first:stop] = share * told
    return speed


def test_a_joint_below_two_percent_of_its_target_speed_for_20_ms_rests():
    (rest,) = found(slow_between(50, 70, 0.019), np.full(200, 0.1))
    assert (rest.start, rest.end) == pytest.approx((0.050, 0.070))
    assert rest.angle == pytest.approx(0.4)
    assert rest.probability == 1.0


def test_a_shorter_pause_is_no_rest():
    assert found(slow_between(50, 69, 0.0), np.full(200, 0.1)) == []


def test_a_faster_joint_does_not_rest():
    assert found(slow_between(50, 150, 0.021), np.full(200, 0.1)) == []


def test_a_joint_that_is_hardly_told_to_move_does_not_stick():
    assert found(np.zeros(200), np.full(200, 0.0199)) == []
    assert len(found(np.zeros(200), np.full(200, 0.0201))) == 1


def test_creeping_backwards_faster_than_the_threshold_is_motion():
    assert found(slow_between(50, 150, -0.03), np.full(200, 0.1)) == []


def test_the_thresholds_are_options():
    rule = StickingRule(least_target_speed=0.05, speed_share=0.1, least_dwell=0.005)
    assert len(found(slow_between(50, 56, 0.09), np.full(200, 0.1), rule)) == 1
    assert found(slow_between(50, 56, 0.09, told=0.04), np.full(200, 0.04), rule) == []


def test_a_target_that_stands_still_in_between_makes_two_rests():
    told = np.full(200, 0.1)
    told[90:110] = 0.0
    assert [round(1e3 * rest.start) for rest in found(np.zeros(200), told)] == [0, 110]
