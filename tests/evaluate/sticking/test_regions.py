import dataclasses

import numpy as np
import pytest

from armeval.evaluate.sticking.regions import counterparts, harm, regions, same_places
from armeval.evaluate.sticking.sticking_event import StickingEvent
from tests.evaluate.sticking_cases import Case, lap, ramp

TARGET, _ = ramp(0.1, 4.0)


def track(number, error=0.0):
    return lap(Case().arm(), TARGET, TARGET - error, lap=number)


def rest(start_arc, end_arc, *, number=1, joint="turn", direction=1.0, cause="cogging", lag=1e-3, release=2e-3):
    return StickingEvent(
        run="bare",
        lap=number,
        source="log",
        joint=joint,
        kind="rest",
        start=10.0 * start_arc,
        end=10.0 * end_arc,
        start_error=1e-3,
        end_error=1e-3,
        start_arc=start_arc,
        end_arc=end_arc,
        joint_angle=0.3,
        motor_angle=0.3,
        angle_error=1e-4,
        direction=direction,
        target_speed=0.1,
        lag=lag,
        release_angle=0.01,
        release_distance=release,
        pull_start=-1e-3,
        pull_end=5e-3,
        reversal=False,
        cause=cause,
    )


def test_rests_of_several_laps_at_one_place_make_one_region():
    events = [rest(0.010, 0.012, number=1), rest(0.011, 0.013, number=2), rest(0.0135, 0.0145, number=3)]
    (region,) = regions([track(1), track(2), track(3)], events)
    assert (region.start_arc, region.end_arc) == (0.010, 0.0145)
    assert (region.laps, region.of_laps) == (3, 3)
    assert region.dwell == pytest.approx((0.02 + 0.02 + 0.01) / 3)


def test_two_rests_of_one_lap_are_two_regions_unless_they_overlap():
    assert len(regions([track(1)], [rest(0.010, 0.012), rest(0.0125, 0.014)])) == 2
    assert len(regions([track(1)], [rest(0.010, 0.012), rest(0.0115, 0.014)])) == 1


def test_rests_further_apart_than_a_millimetre_are_different_places():
    events = [rest(0.010, 0.012, number=1), rest(0.0131, 0.014, number=2)]
    assert [region.laps for region in regions([track(1), track(2)], events)] == [1, 1]


def test_other_joints_and_other_directions_are_other_places():
    events = [rest(0.01, 0.02), rest(0.01, 0.02, number=2, direction=-1.0)]
    assert len(same_places(events)) == 2
    events = [rest(0.01, 0.02), rest(0.01, 0.02, joint="lift")]
    assert len(regions([track(1)], events)) == 2


def test_the_cause_of_a_region_is_that_of_most_of_its_rests():
    events = [rest(0.01, 0.02, number=n, cause=cause) for n, cause in enumerate(["friction", "cogging", "cogging"], 1)]
    (region,) = regions([track(n) for n in (1, 2, 3)], events)
    assert region.cause == "cogging"


def test_harm_is_the_share_of_the_squared_tip_error():
    # The error is 3 while the arc is below the middle of the path and 1 beyond it: 9 of 10 parts.
    one = track(1)
    middle = 0.5 * one.arc[-1]
    tip = one.target_tip + np.where(one.arc <= middle, 3e-3, 1e-3)[:, None] * np.array([0.0, 0.0, 1.0])
    one = dataclasses.replace(one, tip=tip)
    half = np.count_nonzero(one.arc <= middle) / len(one.arc)
    assert harm([one], 0.0, middle) == pytest.approx(9.0 * half / (9.0 * half + (1.0 - half)), rel=2e-3)
    assert harm([one], 0.0, one.arc[-1]) == pytest.approx(1.0)


def test_the_most_harmful_region_comes_first():
    one = track(1)
    tip = one.target_tip + np.where(one.arc > 0.05, 3e-3, 1e-3)[:, None] * np.array([0.0, 0.0, 1.0])
    found = regions([dataclasses.replace(one, tip=tip)], [rest(0.01, 0.02), rest(0.06, 0.07)])
    assert [region.start_arc for region in found] == [0.06, 0.01]


@pytest.mark.parametrize(("after", "fate"), [([], "gone"), ([0.2e-3], "weaker"), ([0.9e-3], "same"), ([2e-3], "same")])
def test_a_region_is_found_again_gone_or_weaker(after, fate):
    before = regions([track(1)], [rest(0.01, 0.02, lag=1e-3)])
    later = regions([track(1)], [rest(0.0105, 0.019, lag=lag) for lag in after])
    (pair,) = counterparts(before, later)
    assert pair.fate == fate
    assert (pair.first, pair.second) == (0, None if fate == "gone" else 0)


def test_a_region_that_only_the_second_run_has_is_new():
    before, later = regions([track(1)], [rest(0.01, 0.02)]), regions([track(1)], [rest(0.05, 0.06), rest(0.01, 0.02)])
    assert sorted(pair.fate for pair in counterparts(before, later)) == ["new", "same"]


def test_no_region_is_paired_twice():
    before = regions([track(1)], [rest(0.010, 0.012), rest(0.0125, 0.014)])
    later = regions([track(1)], [rest(0.011, 0.013)])
    assert sorted(pair.fate for pair in counterparts(before, later)) == ["gone", "same"]
