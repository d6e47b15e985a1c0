"""Rests found in logs, and predicted, against the true joint speeds of an independent plant (MuJoCo).

Scored so: a true rest counts for recall when its target moved at least three counts during it; a reported rest counts
against precision when the true speed never stayed below a tenth of the target's for 15 ms within it.

Detection and causes were developed on the seeds 100 to 131, 700 to 713 and, since they prompted a change too, 900 to
913. The seeds here, 1000 to 1013, were run after the last change; with them nothing was tuned.

What is aimed at with 16384 counts is a precision and a recall of 0.95. On the seeds here precision is 0.96, but recall
0.92 (112 of 122); on 900 to 913 it was 0.93, on 700 to 713 and 900 to 913 together 0.95. What is missed is near the
thresholds of the definition: of rests longer than 25 ms 96 % are found, of the shorter ones 87 %; 97 % and more where
the target moves on by six counts, under 90 % below that. The bounds below hold what is reached.
"""

from functools import cache

import numpy as np
import pytest

from armeval.evaluate.replaying.predicted_lap import PredictedLap
from armeval.evaluate.replaying.replay import replay
from armeval.evaluate.sticking.cause import find_causes
from armeval.evaluate.sticking.rests import sticking_events
from armeval.model.trial import Compensation, Run, StickingRule
from tests.outside.sticking_plants import PERIOD, StickingLap, sticking_lap
from tests.plant.truth import rests

SEEDS = range(1000, 1014)
SOME = SEEDS[:9]  # for causes the plant runs again without the cogging of each joint

pytestmark = pytest.mark.slow


@cache
def found(seed: int, counts: int, jitter: float = 0.0, every: int = 1):
    case = plant_lap(seed, counts, jitter)
    events = sticking_events(case.arm, case.track(every), StickingRule())
    return [event for event in events if event.kind == "rest"]


@cache
def plant_lap(seed: int, counts: int, jitter: float = 0.0, smooth: int | None = None) -> StickingLap:
    return sticking_lap(seed, counts, jitter=jitter, smooth=smooth)


def rows(case, event):
    first, stop = np.searchsorted(case.lap.time, (event.start - 1e-9, event.end - 1e-9))
    return case.arm.joints.index(event.joint), int(first), int(stop)


def met_by(case, event):
    """The true rest that shares most time with an event, or None."""
    joint, first, stop = rows(case, event)
    shared = [(min(r.last, stop) - max(r.first, first), r) for r in case.true_rests if r.joint == joint]
    longest = max(shared, key=lambda entry: entry[0], default=(-1, None))
    return longest[1] if longest[0] >= 0 else None


def precision_and_recall(counts, jitter=0.0, every=1):
    good, seen = [], []
    for seed in SEEDS:
        case, events = plant_lap(seed, counts, jitter), found(seed, counts, jitter, every)
        good += [case.truly_slow(*rows(case, event)) for event in events]
        for rest in case.true_rests:
            if case.counts_moved(rest) >= 3.0:
                start, end = case.lap.time[[rest.first, rest.last]]
                joint = case.arm.joints[rest.joint]
                seen.append(any(e.joint == joint and e.start <= end and e.end >= start for e in events))
    assert len(seen) > 40
    return np.mean(good), np.mean(seen)


@pytest.mark.parametrize(("counts", "precise", "complete"), [(16384, 0.95, 0.90), (8192, 0.90, 0.90)])
def test_logged_rests_are_true_and_true_rests_are_found(counts, precise, complete):
    precision, recall = precision_and_recall(counts)
    assert precision >= precise
    assert recall >= complete


def test_a_log_at_half_the_servos_rate_is_nearly_as_good():
    precision, recall = precision_and_recall(16384, every=2)
    assert precision >= 0.95
    assert recall >= 0.90


def test_jitter_of_a_third_of_a_count_costs_some_rests_but_invents_none():
    precision, recall = precision_and_recall(16384, jitter=0.3)
    assert precision >= 0.90
    assert recall >= 0.80


def test_rests_are_where_they_truly_are():
    # An event's place is the middle of its stretch of path. It is matched where the true rests that it meets can be
    # seen in a log at all: at least three counts of target motion in one of them.
    along, tip = [], []
    for seed in SEEDS:
        case = plant_lap(seed, 16384)
        for event in found(seed, 16384):
            joint, first, stop = rows(case, event)
            met = [r for r in case.true_rests if r.joint == joint and r.first <= stop and r.last >= first]
            if any(case.counts_moved(rest) >= 3.0 for rest in met):
                true = case.arc[min(rest.first for rest in met)], case.arc[max(rest.last for rest in met)]
                along.append(0.5 * (event.start_arc + event.end_arc) - 0.5 * sum(true))
                # Where the tip stands meanwhile is known far better than when the rest began and ended.
                angle = met_by(case, event).angle
                middle = (first + stop) // 2
                stands = case.tips(middle, event.joint_angle, joint) - case.tips(middle, angle, joint)
                tip.append(np.linalg.norm(stands))
    assert len(along) > 60
    assert np.mean(np.abs(along) < 1e-3) >= 0.95
    assert np.mean(np.array(tip) < 1e-3) >= 0.99


def test_starts_and_ends_keep_to_their_stated_uncertainty():
    beyond = []
    for seed in SEEDS:
        case = plant_lap(seed, 16384)
        for event in found(seed, 16384):
            rest = met_by(case, event)
            if rest is not None and case.counts_moved(rest) >= 3.0:
                start, end = case.lap.time[[rest.first, rest.last]]
                beyond += [abs(start - event.start) > 3.0 * event.start_error + PERIOD]
                beyond += [abs(end - event.end) > 3.0 * event.end_error + PERIOD]
    assert np.mean(beyond) <= 0.10


def test_the_replay_with_the_plants_own_parameters_predicts_the_same_rests():
    good, seen = [], []
    for seed in SEEDS:
        case = plant_lap(seed, 16384)
        moved = replay(case.true_arm, case.trajectory, compensated=False, substeps=8)
        predicted = rests(moved.angle, moved.speed, case.target_speed, PERIOD)
        good += [case.truly_slow(rest.joint, rest.first, rest.last) for rest in predicted]
        for rest in case.true_rests:
            if case.counts_moved(rest) >= 3.0:
                overlapping = (
                    o.joint == rest.joint and o.first <= rest.last and o.last >= rest.first for o in predicted
                )
                seen.append(any(overlapping))
    assert np.mean(good) >= 0.95
    assert np.mean(seen) >= 0.95


def still_there(case, joint, first, stop, angle):
    """Whether the joint rests at the same place for half of the time when the plant runs again without its cogging.

    The same place is a fifth of a cog pitch of its dominant order to either side.
    """
    smooth = plant_lap(case.seed, 16384, 0.0, joint)
    pitch = 2.0 * np.pi / case.drives[joint].harmonics[0][0]
    near = [rest for rest in smooth.true_rests if rest.joint == joint and abs(rest.angle - angle) <= 0.2 * pitch]
    return sum(max(0, min(rest.last + 1, stop) - max(rest.first, first)) for rest in near) >= 0.5 * (stop - first)


def test_causes_from_logs_agree_with_the_plant_run_again_without_the_joints_cogging():
    right = []
    for seed in SOME:
        case = plant_lap(seed, 16384)
        events = find_causes(
            case.arm, [case.track()], found(seed, 16384), rule=StickingRule(), compensation=Compensation()
        )
        for event in events:
            if met_by(case, event) is not None:
                right.append((event.cause == "cogging") != still_there(case, *rows(case, event), event.joint_angle))
    assert len(right) > 60
    assert np.mean(right) >= 0.90


def test_causes_from_the_replay_agree_with_the_plant_run_again_without_the_joints_cogging():
    right = []
    for seed in SOME:
        case = plant_lap(seed, 16384)
        lap = PredictedLap(case.true_arm, case.trajectory, Run("bare", False), Compensation(), substeps=4)
        track = lap.track(lap.replay())
        events = [event for event in sticking_events(lap.arm, track, StickingRule()) if event.kind == "rest"]
        events = find_causes(
            lap.arm,
            [track],
            events,
            rule=StickingRule(),
            compensation=Compensation(),
            counterfactual=lap.without,
        )
        for event in events:
            joint = lap.arm.joints.index(event.joint)
            first, stop = (int(i) for i in np.searchsorted(track.time, (event.start - 1e-9, event.end - 1e-9)))
            if any(r.joint == joint and r.first <= stop and r.last >= first for r in case.true_rests):
                right.append((event.cause == "cogging") != still_there(case, joint, first, stop, event.joint_angle))
    assert len(right) > 60
    assert np.mean(right) >= 0.90
