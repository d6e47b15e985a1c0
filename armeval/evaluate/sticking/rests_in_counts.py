"""Rests of one joint in encoder counts: where the counts stay, weighed between rest and slow motion.

A count that stays, or toggles by one, may be rest or slow motion. While a joint truly rests its target moves away, so
the servo's torque builds up until friction gives way; and slow motion is smooth. Both are in the equation of motion,
so many simulated joints follow each stretch of still counts under the torque that the servo sent
(:mod:`armeval.kernels.rest_filter`), and the share of them that rested is the probability of a rest.
"""

from __future__ import annotations

import math
from collections.abc import Iterator
from functools import cache

import numpy as np

from armeval.arrays import FloatArray, IntArray
from armeval.evaluate.sticking.joint_in_log import JointInLog
from armeval.evaluate.sticking.rest import Rest, sample_period, stretches
from armeval.evaluate.threads import spread
from armeval.kernels.rest_filter import MISFIT_STEPS, RestPrior, even_normals, normal_pool, rest_probability
from armeval.kernels.still import within_width
from armeval.model.trial import StickingRule

LEAST_COUNTS = 2.8
"""While it rests, a joint's target must move by this many counts: three, less what rounding takes at both ends."""

_PILOT, _PARTICLES = 256, 2048  # simulated joints: the many follow only where some of the few have rested
_HOPELESS = 0.02  # probability of rest below which the few decide
_LEAD, _TAIL, _LEAST_TAIL = 0.060, 0.060, 0.010  # s of the log before and after the still counts that are looked at
_EDGE = 0.080  # s: further inside a long stretch of still counts, every fifth sample will do
_SURE_COUNTS = 40.0  # so far the target moves while the joint's count stays: whatever holds it, it hardly moves
_SURE = 0.9  # probability that is taken for that
_DWELL_SHARE = 0.8  # a rest counts from this share of the least dwell: its ends are uncertain by a few milliseconds
_PEAK, _FLANK = 0.55, 0.5  # probability that a rest must reach, and where it begins and ends
_TOLERANCE = 0.2  # counts by which a simulated joint may miss a reading of an encoder without jitter, one sigma
_NO_JITTER = 0.05  # counts, one sigma: less is none
_ODD_READINGS = 1e-4  # share of readings that may be anything
_STILL_WIDTH = 0.7  # counts within which averaged readings keep while a joint rests
_SMOOTH = 7  # samples over which jittery readings are averaged to find out whether they stay


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
    period = sample_period(joint.time)
    for first, stop in stretches((probability >= _FLANK) & told):
        last = min(stop, len(joint.time) - 1)
        dwell = joint.time[last] - joint.time[first]
        peak = float(probability[first:stop].max())
        moved = np.abs(np.diff(joint.target[first : last + 1])).sum() / joint.count
        if peak < _PEAK or dwell < _DWELL_SHARE * rule.least_dwell - 1e-9 or moved < LEAST_COUNTS:
            continue
        within = slice(first, stop)
        # Whatever moves less than half a count hides in it.
        hidden = 0.5 * joint.count / float(np.mean(np.abs(joint.told[first : last + 1])))
        start_error = math.hypot(hidden, _flank_spread(probability[:stop][::-1], stop - 1 - first, period))
        end_error = math.hypot(hidden, _flank_spread(probability[first:], stop - 1 - first, period))
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


def still_stretches(counts: FloatArray, jitter: float) -> IntArray:
    """Find where counts stay, within what jitter explains.

    Without jitter that is every stretch of equal counts. With jitter, readings are averaged over a few samples, and it
    is every longest stretch over which the averages keep within a little less than a count.

    Parameters
    ----------
    counts
        Shape (k,).
    jitter
        The encoder's, one sigma [counts].

    Returns
    -------
    Shape (h, 2), in order of time: first sample and the one after the last.
    """
    if jitter < _NO_JITTER:
        first = np.concatenate(([0], np.flatnonzero(np.diff(counts) != 0.0) + 1))
        return np.column_stack([first, np.append(first[1:], len(counts))])
    window = np.full(_SMOOTH, 1.0 / _SMOOTH)
    place = np.convolve(np.pad(counts, _SMOOTH // 2, mode="edge"), window, mode="valid")
    return within_width(place, _STILL_WIDTH + 3.0 * jitter / _SMOOTH**0.5)


def encoder_jitter(counts: FloatArray) -> float:
    """Estimate the encoder's jitter from readings that leave the count of both their neighbours.

    At a standing joint's place u between two counts a reading is c with the probability p_c = P(c - 1/2 < u + jitter <
    c + 1/2); the share of such strays, sum of p_c^2 p_(c+1) + p_c p_(c+1)^2 over all c and evenly over u, rises with
    the jitter.

    Parameters
    ----------
    counts
        Shape (k,).

    Returns
    -------
    One sigma [counts], from 0 to 1.
    """
    here, near = counts[1:-1], counts[:-2]
    lone = (near == counts[2:]) & (np.abs(here - near) == 1.0)
    slow = np.abs(counts[4:] - counts[:-4]) <= 1.0
    share = float(np.count_nonzero(lone[1:-1] & slow)) / max(int(np.count_nonzero(slow)), 1)
    sigma, expected = _expected_strays()
    return float(np.interp(share, expected, sigma))


@cache
def _expected_strays() -> tuple[FloatArray, FloatArray]:
    from scipy.special import ndtr

    sigma = np.concatenate(([1e-6], np.linspace(0.02, 1.0, 50)))
    u = (np.arange(200) + 0.5)[:, None, None] / 200.0
    c = np.arange(-6, 8)[None, :, None]
    p = ndtr((c + 0.5 - u) / sigma) - ndtr((c - 0.5 - u) / sigma)
    share = (p[:, 1:] * p[:, :-1] * (p[:, 1:] + p[:, :-1])).sum(axis=1).mean(axis=0)
    return sigma, np.maximum.accumulate(share)


def _misfit(jitter: float) -> FloatArray:
    """Minus log likelihood of a reading so many 64ths of a count away from the place."""
    away = np.arange(8 * MISFIT_STEPS) / MISFIT_STEPS
    if jitter < _NO_JITTER:
        return np.asarray(0.5 * (np.maximum(away - 0.5, 0.0) / _TOLERANCE) ** 2)
    from scipy.special import log_ndtr

    # The far tail of the normal distribution would let one odd reading decide: a small share of readings is anything.
    inside = log_ndtr((0.5 - away) / jitter) + np.log1p(
        -np.exp(log_ndtr((-0.5 - away) / jitter) - log_ndtr((0.5 - away) / jitter))
    )
    return np.asarray(-np.logaddexp(inside, np.log(_ODD_READINGS)))


def _rest_probability(joint: JointInLog, rule: StickingRule) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Give the probability of rest at every sample, and mean and spread [counts] of the angle there."""
    k = len(joint.time)
    probability, angle, scatter = np.zeros(k), joint.counts.copy(), np.zeros(k)
    told = np.abs(joint.told) >= rule.least_target_speed
    jitter = encoder_jitter(joint.counts)
    path = np.concatenate(([0.0], np.cumsum(np.abs(np.diff(joint.target)) * told[1:]))) / joint.count
    still = still_stretches(joint.counts, jitter)
    ends = np.minimum(still[:, 1], k - 1)
    long_enough = joint.time[ends] - joint.time[still[:, 0]] >= _DWELL_SHARE * rule.least_dwell - 1e-9
    still = still[(path[ends] - path[still[:, 0]] >= LEAST_COUNTS) & long_enough]
    bound = rule.speed_share * np.maximum(np.abs(joint.told), rule.least_target_speed)
    misfit = _misfit(jitter)
    starts, normals = [even_normals(count, 0) for count in (_PILOT, _PARTICLES)], normal_pool(0)

    def weigh(stretch: IntArray) -> tuple[IntArray, FloatArray]:
        samples = _window(joint, stretch)
        prior = _prior(joint, int(samples[0]), stretch, jitter)
        least = _DWELL_SHARE * rule.least_dwell
        for first in starts:
            found = rest_probability(
                samples,
                joint.time,
                joint.counts,
                joint.torque,
                bound,
                joint.count,
                misfit,
                prior,
                least,
                first,
                normals,
            )
            if found[0].max() < _HOPELESS:
                break
        return samples, found

    for (first, stop), (samples, found) in zip(still, spread(weigh, list(still)), strict=True):
        whole = np.arange(samples[0], samples[-1] + 1)
        filled = [np.interp(whole, samples, row) for row in found]
        last = min(stop, k - 1)
        inside = (whole >= first) & (whole < stop)
        explained = float(np.mean(filled[0][inside] >= _FLANK))
        if explained < 0.8 and path[last] - path[first] >= _SURE_COUNTS:
            # Stop, obstacle, or more friction than the arm's files know: the model does not hold, the counts do.
            filled = [np.where(inside, _SURE, 0.0), np.full(len(whole), float(np.mean(joint.counts[first:stop])))]
            filled.append(np.full(len(whole), 0.3))
        better = filled[0] > probability[whole]
        for into, values in zip((probability, angle, scatter), filled, strict=True):
            into[whole[better]] = values[better]
    return probability, angle, scatter


def _window(joint: JointInLog, hold: IntArray) -> IntArray:
    """Choose the samples to follow: the still counts with what leads to them and what follows."""
    first, stop = int(hold[0]), min(int(hold[1]), len(joint.time) - 1)
    time = joint.time
    start = int(np.searchsorted(time, time[first] - _LEAD))
    # One change of the counts before is enough to know the speed, if it is near.
    changes = np.flatnonzero(np.diff(joint.counts[start:first]) != 0.0)
    start = start + int(changes[-1]) + 1 if len(changes) else start
    later = np.flatnonzero(joint.counts[stop : int(np.searchsorted(time, time[stop] + _TAIL))] != joint.counts[stop])
    end = stop + int(later[0]) if len(later) else int(np.searchsorted(time, time[stop] + _TAIL))
    end = min(max(end, int(np.searchsorted(time, time[stop] + _LEAST_TAIL))), len(time) - 1)
    samples = np.arange(start, end + 1)
    deep = (time[samples] > time[first] + _EDGE) & (time[samples] < time[stop] - _EDGE)
    return np.asarray(samples[~deep | (samples % 5 == 0)])


def _prior(joint: JointInLog, start: int, hold: IntArray, jitter: float) -> RestPrior:
    """Say what to think of the joint at the start of a window, from the counts about it and from the arm."""
    before, after = (int(i) for i in np.searchsorted(joint.time, joint.time[start] + np.array([-0.012, 0.012])))
    after = min(max(after, before + 1), len(joint.time) - 1)
    span = joint.time[after] - joint.time[before]
    speed = float((joint.counts[after] - joint.counts[before]) * joint.count / span)
    inertia, stiffness = float(joint.inertia[start]), float(joint.stiffness[start])
    place, place_spread = _place(joint, start, jitter)
    told = float(np.mean(np.abs(joint.told[hold[0] : hold[1]])))
    return RestPrior(
        place=place,
        place_spread=place_spread,
        may_rest=start == 0 or joint.counts[start] == joint.counts[start - 1],
        speed=speed,
        speed_spread=0.5 * abs(speed) + joint.count / span,
        acceleration_spread=max(told, abs(speed)) * float(np.sqrt(stiffness / inertia)),
        kick=float(joint.torque[start] - np.mean(joint.torque[before : after + 1])),
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


def _place(joint: JointInLog, start: int, jitter: float) -> tuple[float, float]:
    """Give the angle [counts] at the start of a window, and half the width of what it may be."""
    counts = joint.counts
    if jitter >= _NO_JITTER:
        near = counts[max(start - 2, 0) : start + 3]
        return float(near.mean()), 0.5 + jitter
    step = float(counts[start] - counts[start - 1]) if start > 0 else 0.0
    if abs(step) != 1.0:
        return float(counts[start]), 0.5
    # The joint has just come over the edge between two counts.
    return float(counts[start] - 0.5 * step + 0.2 * step), 0.25


def _flank_spread(probability: FloatArray, inside: int, period: float) -> float:
    """Spread of a flank in time: outwards of sample ``inside`` the probability falls as fewer particles rest."""
    level = probability[max(inside - 40, 0) : inside + 41] / max(float(probability[: inside + 1].max()), 1e-9)
    between = np.count_nonzero((level > 0.16) & (level < 0.84))
    return period * max(0.5 * between, 0.5)
