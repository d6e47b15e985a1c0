import dataclasses
import json

import numpy as np
import pytest

from armeval.errors import InputError
from armeval.evaluate.locate import locate
from tests.evaluate.sticking_cases import PERIOD, REACH, Case, lap, moved, ramp

CASE = Case(T=0.06, K=1.5, N=84, Fc=0.006, Fs=0.006, J=5e-4, D=0.02)
EVENT_KEYS = (
    "lap joint start_s end_s start_m end_m joint_angle_rad motor_angle_rad lag_m dwell_s release_rad release_m cause"
)
REGION_KEYS = "joint start_m end_m laps of_laps dwell_s cause"


@pytest.fixture(scope="module")
def location():
    arm = CASE.arm()
    target, told = ramp(0.12, 5.0)
    angle, speed = moved(CASE, target, told)
    gentle, _ = moved(Case(T=0.0), target, told)
    bare = [lap(arm, target, angle, lap=n) for n in (1, 2)]
    smoothed = [lap(arm, target, gentle, lap=1, run="smoothed", compensated=True)]
    predicted = [lap(arm, target, angle, speed=speed)]
    return locate(arm, [bare, smoothed, predicted, []], trial="One joint", warnings=["made up"])


def test_the_document_has_every_promised_key(location):
    content = json.loads(location.to_json())
    assert content["schema"] == "armeval/locate/1"
    assert content["trial"] == "One joint"
    assert content["warnings"] == ["made up"]
    assert [(r["name"], r["compensated"], r["source"]) for r in content["runs"]] == [
        ("bare", False, "log"),
        ("smoothed", True, "log"),
        ("bare", False, "prediction"),
    ]
    first = content["runs"][0]
    assert set(EVENT_KEYS.split()) <= set(first["events"][0])
    assert set(REGION_KEYS.split()) <= set(first["regions"][0])
    assert {"start_error_s", "end_error_s", "angle_error_rad"} <= set(first["events"][0])


def test_events_tell_where_the_joint_rested(location):
    for event in location.runs[2].events:
        assert event.dwell == pytest.approx(event.end - event.start)
        assert event.motor_angle == pytest.approx(event.joint_angle % (2.0 * np.pi))
        # While it rests, the tip falls behind by as much as its target moves on.
        assert event.lag == pytest.approx(event.end_arc - event.start_arc, rel=0.02, abs=2.0 * REACH * 0.12 * PERIOD)
        assert event.release_distance == pytest.approx(REACH * abs(event.release_angle), rel=0.05)


def test_the_pull_builds_up_by_stiffness_times_what_the_target_moved(location):
    for event in location.runs[2].events:
        moved_on = (event.end_arc - event.start_arc) / REACH
        assert event.pull_end - event.pull_start == pytest.approx(CASE.K * moved_on, rel=0.05, abs=3e-4)


def test_both_laps_stick_at_the_same_places(location):
    assert all(region.laps == region.of_laps == 2 for region in location.runs[0].regions)
    harms = [region.harm for region in location.runs[0].regions]
    assert harms == sorted(harms, reverse=True)


def test_bare_is_set_beside_compensated_and_measured_beside_predicted(location):
    kinds = {matching.kind: matching for matching in location.matchings}
    compensation, prediction = kinds["compensation"], kinds["prediction"]
    assert (compensation.first, compensation.second) == (0, 1)
    assert (prediction.first, prediction.second) == (0, 2)
    bare = location.runs[0].regions
    steady = [pair for pair in compensation.pairs if pair.first is not None and bare[pair.first].start_arc > 0.01]
    assert {pair.fate for pair in steady} == {"gone"}
    documents = {entry["kind"]: entry["regions"] for entry in location.to_document()["matchings"]}
    found = [entry["found_in"] for entry in documents["prediction"]]
    assert found.count("both") >= 0.8 * len(found)


def test_the_frames_have_a_row_for_each(location):
    events = sum(len(run.events) + len(run.jumps) for run in location.runs)
    assert len(location.to_frame()) == events
    assert len(location.regions_frame()) == sum(len(run.regions) for run in location.runs)


def test_the_text_can_be_read_aloud(location):
    text = location.to_text(most=2)
    assert "bare (bare, measured, 2 laps)" in text
    assert "turn at" in text
    assert "Compensate turn's cogging first" in text
    assert "no joint sticks" in text or "smoothed" in text


def test_nothing_to_look_at_is_an_error():
    with pytest.raises(InputError, match="no lap"):
        locate(CASE.arm(), [[], []])


def test_the_second_of_two_regions_with_the_same_advice_refers_to_the_first(location):
    region = dataclasses.replace(location.runs[0].regions[0], action="Stiffen it at 2.0 N·m/rad. It is slow here.")
    other = dataclasses.replace(region, action="Stiffen it at 2.0 N·m/rad. It is fast here.")
    run = dataclasses.replace(location.runs[0], regions=(region, other, region))
    text = dataclasses.replace(location, runs=(run,)).to_text()
    assert text.count("Stiffen it at 2.0 N·m/rad.") == 1
    assert "     As for 1. It is fast here." in text
    assert text.splitlines()[-1] == "     As for 1."
