import math

import numpy as np
import pytest

from armeval.evaluate.sticking.rests import sticking_events
from armeval.evaluate.sticking.rests_in_counts import encoder_jitter, still_stretches
from armeval.model.trial import StickingRule
from tests.evaluate.sticking_cases import PERIOD, Case, lap, moved, moved_and_read, ramp, to_and_fro

RULE = StickingRule()


def rests(arm, track):
    return [event for event in sticking_events(arm, track, RULE) if event.kind == "rest"]


def truly_resting(case, target, told):
    angle, speed = moved(case, target, told)
    return angle, (np.abs(told) >= 0.02) & (np.abs(speed) < 0.02 * np.abs(told))


@pytest.mark.parametrize("counts", [4096, 16384, 262144])
@pytest.mark.parametrize("every", [1, 5])
def test_a_joint_moving_at_one_count_every_30_ms_is_moving(counts, every):
    count = 2.0 * math.pi / counts
    speed = max(count / 0.030, 0.0205)  # fast encoders count faster at any speed that matters
    target, _told = ramp(speed, 4.0)
    case = Case(counts=counts)
    assert rests(case.arm(), lap(case.arm(), target, target - 0.003, every=every)) == []


def test_a_joint_that_follows_smoothly_at_a_third_of_its_targets_speed_is_moving():
    target, _told = ramp(0.06, 3.0)
    slowly = target[0] + (target - target[0]) / 3.0
    case = Case(counts=8192, T=0.0, K=0.05)
    assert rests(case.arm(with_map=False), lap(case.arm(), target, slowly)) == []


@pytest.mark.parametrize("counts", [8192, 16384, 65536])
@pytest.mark.parametrize("every", [1, 2, 5])
def test_rests_at_reversals_are_found_where_they_are(counts, every):
    case = Case(counts=counts, Fc=0.006, Fs=0.007)
    target, told = to_and_fro(0.15, turns=6)
    angle, resting = truly_resting(case, target, told)
    found = rests(case.arm(), lap(case.arm(), target, angle, every=every))
    edges = np.diff(np.concatenate([[0], resting.astype(int), [0]]))
    true = [
        (first * PERIOD, stop * PERIOD, angle[first])
        for first, stop in zip(np.flatnonzero(edges == 1), np.flatnonzero(edges == -1), strict=True)
        if stop - first >= 20 and abs(target[stop - 1] - target[first]) >= 3.0 * 2.0 * math.pi / counts
    ]
    assert len(true) >= 5
    for start, end, place in true:
        (event,) = [event for event in found if event.start < end and event.end > start]
        assert event.start == pytest.approx(start, abs=3.0 * event.start_error + 0.010)
        assert event.end == pytest.approx(end, abs=3.0 * event.end_error + 0.010)
        assert event.joint_angle == pytest.approx(place, abs=2.0 * math.pi / counts)
        assert event.dwell == pytest.approx(end - start, abs=0.4 * (end - start) + 0.010)


@pytest.mark.parametrize("jitter", [0.0, 0.3])
def test_a_joint_that_stands_against_an_obstacle_rests_whatever_friction_says(jitter):
    count = 2.0 * math.pi / 16384
    target, _told = ramp(0.1, 2.0)
    angle = target.copy()
    angle[800:1000] = angle[800]  # the pull grows to six times the breakaway friction
    angle[1000:1050] = np.linspace(angle[800], angle[1050], 50)
    angle += jitter * count * np.random.default_rng(8).standard_normal(len(angle))
    (event,) = rests(Case().arm(), lap(Case().arm(), target, angle))
    assert (event.start, event.end) == pytest.approx((0.8, 1.0), abs=0.015)


def test_a_count_that_toggles_does_not_hide_a_rest():
    case = Case(Fc=0.006, Fs=0.007)
    target, told = to_and_fro(0.15, turns=8)
    _angle, speed, read = moved_and_read(case, target, told, jitter=0.3, seed=8)
    found = rests(case.arm(), lap(case.arm(), target, read))
    turns = np.arange(1, 8) * 1.0  # it rests for some 60 ms after each turn of the target
    assert sum(any(event.start < turn + 0.07 and event.end > turn for event in found) for turn in turns) >= 6
    for event in found:
        within = slice(round(event.start / PERIOD), round(event.end / PERIOD))
        assert np.median(np.abs(speed[within])) < 0.1 * np.median(np.abs(told[within]))


def test_a_log_without_targets_moving_has_no_rests():
    target = np.full(3000, 0.7)
    assert rests(Case().arm(), lap(Case().arm(), target, target)) == []


def test_a_log_of_ten_thousand_samples_a_second_is_read_at_the_servos_rate():
    case = Case(Fc=0.006, Fs=0.007)
    target, told = to_and_fro(0.15, turns=4)
    angle, _ = moved(case, target, told)
    often = np.repeat(angle, 10), np.repeat(target, 10)
    slow = rests(case.arm(), lap(case.arm(), target, angle))
    fast = rests(case.arm(), lap(case.arm(), often[1], often[0], period=PERIOD / 10))
    assert len(fast) == len(slow) > 0
    for one, other in zip(fast, slow, strict=True):
        assert one.start == pytest.approx(other.start, abs=0.006)


@pytest.mark.parametrize("sigma", [0.1, 0.3, 0.5])
def test_jitter_is_told_from_the_readings(sigma):
    rng = np.random.default_rng(3)
    place = 40.0 + np.linspace(0.0, 30.0, 30000)
    assert encoder_jitter(np.rint(place + sigma * rng.standard_normal(len(place)))) == pytest.approx(sigma, rel=0.15)


def test_an_encoder_without_jitter_is_known_as_such():
    assert encoder_jitter(np.rint(np.linspace(0.0, 30.0, 30000))) < 0.01


def test_still_stretches_of_quiet_readings_are_the_pieces_between_changes():
    counts = np.array([3.0, 3.0, 4.0, 4.0, 4.0, 3.0])
    assert still_stretches(counts, 0.0).tolist() == [[0, 2], [2, 5], [5, 6]]
