"""Rests of one joint in encoder counts: where the counts stay, weighed between rest and slow motion.

A count that stays, or toggles by one, may be rest or slow motion. While a joint truly rests its target moves away, so
the servo's torque builds up until friction gives way; and slow motion is smooth. Both are in the equation of motion,
so many simulated joints follow each stretch of still counts under the torque that the servo sent
(:mod:`armeval.kernels.rest_filter`), and the share of them that rested is the probability of a rest.
"""

from __future__ import annotations

import math
from collections.abc import Iterator

import numpy as np

from armeval.arrays import FloatArray, IntArray
from armeval.evaluate.joint_in_log import JointInLog
from armeval.evaluate.rest import Rest, stretches
from armeval.evaluate.threads import spread
from armeval.kernels.rest_filter import RestPrior, normal_pool, rest_probability
from armeval.model.trial import StickingRule

LEAST_COUNTS = 2.6
"""While its counts stay, a joint's target must move by this many: a rest of three counts, less rounding at both ends."""

_PARTICLES = 500
_LEAD, _TAIL, _LEAST_TAIL = 0.060, 0.030, 0.010  # s of the log before and after the still counts that are looked at
_EDGE = 0.080  # s: further inside a long stretch of still counts, every fifth sample will do
_DWELL_SHARE = 0.8  # a rest counts from this share of the least dwell: its ends are uncertain by a few milliseconds
_PEAK, _FLANK = 0.75, 0.4  # probability that a rest must reach, and where it begins and ends
_TOLERANCE = 0.25  # counts by which a simulated joint may miss a reading, one sigma, besides the encoder's jitter


def rests_in_counts(joint: JointInLog, rule: StickingRule) -> Iterator[Rest]:
    """Find the rests of one joint in a log.

    A rest during which the target moves less than three counts cannot be seen.

    Parameters
    ----------
    joint
        The joint in its log.
    rule
        When a joint counts as resting.
    """
    probability, angle, angle_spread = _rest_probability(joint, rule)
    told = np.abs(joint.told) >= rule.least_target_speed
    period = float(np.median(np.diff(joint.time)))
    for first, stop in stretches((probability >= _FLANK) & told):
        last = min(stop, len(joint.time) - 1)
        dwell = joint.time[last] - joint.time[first]
        peak = float(probability[first:stop].max())
        if peak < _PEAK or dwell < _DWELL_SHARE * rule.least_dwell - 1e-9:
            continue
        within = slice(first, stop)
        start_error = _flank_spread(probability[:stop][::-1], stop - 1 - first, period)
        end_error = _flank_spread(probability[first:], stop - 1 - first, period)
        weight = probability[within] / probability[within].sum()
        mean = float(weight @ angle[within])
        scatter = float(np.sqrt(weight @ (angle_spread[within] ** 2 + (angle[within] - mean) ** 2)))
        yield Rest(
            float(joint.time[first]),
            float(joint.time[last]),
            start_error,
            end_error,
            joint.count * mean,
            joint.count * max(scatter, 0.05),
            peak,
        )


def still_stretches(counts: FloatArray) -> IntArray:
    """Find where counts stay, or toggle by one.

    Parameters
    ----------
    counts
        Shape (k,).

    Returns
    -------
    Shape (h, 2), in order of their first samples: first sample and the one after the last. Counts that go to and fro
    between two neighbours make one stretch, as long as they do.
    """
    first = np.concatenate(([0], np.flatnonzero(np.diff(counts) != 0.0) + 1))
    stop = np.append(first[1:], len(counts))
    value = counts[first]
    # Piece p and piece p + 2 hold the same count and p + 1 its neighbour: the counts toggle.
    toggles = np.zeros(len(first), dtype=np.bool_)
    if len(first) > 2:
        toggles[1:-1] = (value[:-2] == value[2:]) & (np.abs(value[1:-1] - value[:-2]) == 1.0)
    found = []
    inside = np.zeros(len(first), dtype=np.bool_)
    for a, b in stretches(toggles):
        found.append((first[a - 1], stop[b]))
        inside[a - 1 : b + 1] = True
    alone = np.column_stack([first[~inside], stop[~inside]])
    together = np.array(found, dtype=np.int64).reshape(-1, 2)
    both = np.concatenate([alone, together])
    return np.asarray(both[np.argsort(both[:, 0], kind="stable")])


def encoder_jitter(counts: FloatArray) -> float:
    """Estimate the encoder's jitter [counts, one sigma] from readings that leave their neighbours' count for one sample.

    With jitter s below half a count, a reading away from the nearest count has the probability 2 s / sqrt(2 pi) when
    all places between two counts are alike.
    """
    if len(counts) < 3:
        return 0.0
    strays = (counts[:-2] == counts[2:]) & (np.abs(counts[1:-1] - counts[:-2]) == 1.0)
    share = float(np.mean(strays))
    return min(share * math.sqrt(math.pi / 2.0), 1.0)


def _rest_probability(joint: JointInLog, rule: StickingRule) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Probability of rest at every sample, and mean and spread [counts] of the angle there."""
    k = len(joint.time)
    probability, angle, scatter = np.zeros(k), joint.counts.copy(), np.zeros(k)
    told = np.abs(joint.told) >= rule.least_target_speed
    path = np.concatenate(([0.0], np.cumsum(np.abs(np.diff(joint.target)) * told[1:])))
    holds = still_stretches(joint.counts)
    ends = np.minimum(holds[:, 1], k - 1)
    moved = (path[ends] - path[holds[:, 0]]) / joint.count
    lasted = joint.time[ends] - joint.time[holds[:, 0]]
    holds = holds[(moved >= LEAST_COUNTS) & (lasted >= _DWELL_SHARE * rule.least_dwell)]
    slow = rule.speed_share * np.maximum(np.abs(joint.told), rule.least_target_speed)
    tolerance = _TOLERANCE + encoder_jitter(joint.counts)
    normals = normal_pool(0)

    def weigh(hold: IntArray) -> tuple[IntArray, FloatArray]:
        samples = _window(joint, hold)
        found = rest_probability(
            samples,
            joint.time,
            joint.counts,
            joint.torque,
            slow,
            joint.count,
            tolerance,
            _prior(joint, int(samples[0]), hold),
            _DWELL_SHARE * rule.least_dwell,
            _PARTICLES,
            normals,
        )
        return samples, found

    for samples, found in spread(weigh, list(holds)):
        whole = np.arange(samples[0], samples[-1] + 1)
        filled = [np.interp(whole, samples, row) for row in found]
        better = filled[0] > probability[whole]
        for into, values in zip((probability, angle, scatter), filled, strict=True):
            into[whole[better]] = values[better]
    return probability, angle, scatter


def _window(joint: JointInLog, hold: IntArray) -> IntArray:
    """Samples to follow: the still counts with what leads to them and what follows."""
    first, stop = int(hold[0]), min(int(hold[1]), len(joint.time) - 1)
    time = joint.time
    start = int(np.searchsorted(time, time[first] - _LEAD))
    # One change of the counts before is enough to know the speed, if it is near.
    changes = np.flatnonzero(np.diff(joint.counts[start:first]) != 0.0)
    start = start + int(changes[-1]) if len(changes) else start
    later = np.flatnonzero(joint.counts[stop : int(np.searchsorted(time, time[stop] + _TAIL))] != joint.counts[stop])
    end = stop + int(later[0]) if len(later) else int(np.searchsorted(time, time[stop] + _TAIL))
    end = min(max(end, int(np.searchsorted(time, time[stop] + _LEAST_TAIL))), len(time) - 1)
    samples = np.arange(start, end + 1)
    deep = (time[samples] > time[first] + _EDGE) & (time[samples] < time[stop] - _EDGE)
    return np.asarray(samples[~deep | (samples % 5 == 0)])


def _prior(joint: JointInLog, start: int, hold: IntArray) -> RestPrior:
    """What to think of the joint at the start of a window, from the counts about it and from the arm."""
    before, after = (int(i) for i in np.searchsorted(joint.time, joint.time[start] + np.array([-0.012, 0.012])))
    after = min(max(after, before + 1), len(joint.time) - 1)
    span = joint.time[after] - joint.time[before]
    speed = float((joint.counts[after] - joint.counts[before]) * joint.count / span)
    inertia, stiffness = float(joint.inertia[start]), float(joint.stiffness[start])
    told = float(np.mean(np.abs(joint.told[hold[0] : hold[1]])))
    return RestPrior(
        speed=speed,
        speed_spread=0.5 * abs(speed) + joint.count / span,
        acceleration_spread=max(told, abs(speed)) * float(np.sqrt(stiffness / inertia)),
        inertia=inertia,
        inertia_spread=0.15,
        friction_spread=0.25,
        coulomb=joint.coulomb,
        static=joint.static,
        stribeck_speed=joint.stribeck_speed,
        slope=float(joint.cog_slope[hold[0]]),
        slope_spread=joint.cog_slope_spread + 0.1 * stiffness,
        wander=0.1 * joint.coulomb,
    )


def _flank_spread(probability: FloatArray, inside: int, period: float) -> float:
    """Spread of a flank in time: outwards of sample ``inside`` the probability falls as fewer particles rest."""
    level = probability[max(inside - 40, 0) : inside + 41] / max(float(probability[: inside + 1].max()), 1e-9)
    between = np.count_nonzero((level > 0.16) & (level < 0.84))
    return period * max(0.5 * between, 0.5)
