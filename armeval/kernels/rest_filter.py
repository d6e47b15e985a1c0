"""Rest or slow motion? Many simulated joints follow one stretch of a log, and those that contradict it die out.

A particle filter (Gordon, Salmond & Smith 1993) over one joint with dry friction under a known servo torque. Each
particle is one way in which the joint may have moved: angle, speed and torque at the start, its inertia, friction and
cogging slope are drawn at random; its motion is then J v' = torque - friction with friction as a bounded impulse, so
that a particle can come to rest, wait until the torque has built up, and break away. Each is weighed by the encoder
counts. The share of the weight that rested is the probability of a rest; when and where these rested is the answer.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np

from armeval.arrays import FloatArray, IntArray
from armeval.kernels.compile import jit

_Q, _V, _W, _SLOPE, _INERTIA, _COULOMB, _STATIC, _SINCE, _RESTS, _SLOTS = range(10)
_MOST_RESTS = 4  # that a particle remembers, each as first sample, last sample and angle
_FIELDS = _SLOTS + 3 * _MOST_RESTS
_POOL = 1 << 16
_LEAST_LOG_WEIGHT = -50.0
_PART = 0.05  # of their spreads, by which copies of a particle are changed
MISFIT_STEPS = 64  # entries a count of the table of misfits


class RestPrior(NamedTuple):
    """What is thought of the joint before the counts are looked at; angles and torques at the joint.

    Attributes
    ----------
    place, place_spread
        Angle at the start of the stretch [counts], and half the width over which it is spread evenly [counts].
    speed, speed_spread
        At the start of the stretch [rad/s].
    may_rest
        Whether the joint may rest at the start; half of the particles do then.
    acceleration_spread
        Spread of the acceleration at the start [rad/s^2].
    kick
        By how much the servo's torque stands above its mean [N m] at the very start: a change of the count, which lets
        the differenced angle leap, kicks the joint for a moment.
    inertia, inertia_spread, friction_spread
        Inertia [kg m^2] and the relative spreads of it and of friction (logarithmic).
    coulomb, static, stribeck_speed
        Friction [N m], [N m], [rad/s].
    slope, slope_spread
        Cogging torque per angle here [N m/rad].
    wander
        Torque [N m] by which a millisecond of motion changes the unknown rest of the torque, one sigma.
    """

    place: float
    place_spread: float
    speed: float
    speed_spread: float
    may_rest: bool
    acceleration_spread: float
    kick: float
    inertia: float
    inertia_spread: float
    friction_spread: float
    coulomb: float
    static: float
    stribeck_speed: float
    slope: float
    slope_spread: float
    wander: float


def normal_pool(seed: int) -> FloatArray:
    """Draw the standard normal numbers that :func:`rest_probability` uses over and over, shape (65536,)."""
    return np.random.default_rng(seed).standard_normal(_POOL)


def even_normals(count: int, seed: int) -> FloatArray:
    """Give standard normal numbers, shape (count, 5), that fill their space evenly (Sobol's sequence, scrambled).

    The rows are in random order; ``count`` must be a power of two.
    """
    from scipy.special import ndtri
    from scipy.stats import qmc

    points = qmc.Sobol(5, rng=np.random.default_rng(seed)).random(count)
    np.random.default_rng(seed + 1).shuffle(points)
    return np.ascontiguousarray(ndtri(np.clip(points, 1e-6, 1.0 - 1e-6)))


@jit
def rest_probability(
    samples: IntArray,
    time: FloatArray,
    counts: FloatArray,
    torque: FloatArray,
    slow: FloatArray,
    count: float,
    misfit: FloatArray,
    prior: RestPrior,
    least_dwell: float,
    first: FloatArray,
    normals: FloatArray,
) -> FloatArray:
    """Weigh rest against slow motion over one stretch of a log.

    Parameters
    ----------
    samples
        Shape (s,). Samples of the log to step through, rising.
    time, counts, torque, slow
        Shape (k,). The log: time [s], encoder counts, servo torque without gravity [N m], and the speed [rad/s] below
        which the joint counts as resting.
    count
        Angle of one count [rad].
    misfit
        Shape (m,). Minus the logarithm of the likelihood of a reading that is 0, 1/64, 2/64 ... counts away from the
        place.
    prior
        What is thought before.
    least_dwell
        Shortest rest that counts [s].
    first
        Shape (p, 5). Standard normal numbers for the start of each particle, evenly spread (:func:`even_normals`).
    normals
        Shape (65536,). Standard normal numbers for its way.

    Returns
    -------
    Shape (3, s): the probability that a sample lies within a rest of at least ``least_dwell``; mean and spread of the
    angle [counts] at which it rests then.
    """
    particles = first.shape[0]
    P = np.empty((particles, _FIELDS))
    Q = np.empty((particles, _FIELDS))
    log_weight = np.zeros(particles)
    weight = np.empty(particles)
    mask = normals.shape[0] - 1
    draw = 0
    origin = prior.place
    for p in range(particles):
        row = P[p]
        row[_Q] = count * prior.place_spread * ((2.0 * p + 1.0) / particles - 1.0)
        row[_V] = prior.speed + prior.speed_spread * first[p, 0]
        row[_INERTIA] = prior.inertia * np.exp(prior.inertia_spread * first[p, 1])
        scale = np.exp(prior.friction_spread * first[p, 2])
        row[_COULOMB] = prior.coulomb * scale
        row[_STATIC] = prior.static * scale
        row[_SLOPE] = prior.slope + prior.slope_spread * first[p, 3]
        if p % 2 == 0 and prior.may_rest:
            row[_V] = 0.0
            row[_W] = row[_STATIC] * (2.0 * ((0.618034 * p) % 1.0) - 1.0)
        else:
            push = row[_INERTIA] * prior.acceleration_spread * first[p, 4]
            row[_W] = push + row[_COULOMB] * np.sign(row[_V])
        row[_W] += prior.kick
        row[_SINCE] = -1.0
        for field in range(_RESTS, _FIELDS):
            row[field] = 0.0
    steps = samples.shape[0]
    for s in range(steps - 1):
        i, j = samples[s], samples[s + 1]
        dt = time[j] - time[i]
        rise = torque[j] - torque[i]
        wander = prior.wander * np.sqrt(dt / 1e-3)
        bound_speed = slow[i]
        seen = counts[j] - origin
        largest = -1e300
        for p in range(particles):
            row = P[p]
            v = row[_V]
            if v == 0.0:
                bound = row[_STATIC]
            else:
                # A rational curve in the place of Stribeck's exponential: close enough here, and much faster.
                bound = row[_COULOMB] + (row[_STATIC] - row[_COULOMB]) / (1.0 + (v / prior.stribeck_speed) ** 2)
            free = v + dt * row[_W] / row[_INERTIA]
            held = dt * bound / row[_INERTIA]
            v = free - held if free > held else (free + held if free < -held else 0.0)
            row[_V] = v
            row[_W] += rise
            if v != 0.0:
                row[_Q] += dt * v
                row[_W] += row[_SLOPE] * dt * v + wander * normals[draw & mask]
                draw += 1
            away = min(int(MISFIT_STEPS * abs(row[_Q] / count - seen)), misfit.shape[0] - 1)
            log_weight[p] = max(log_weight[p] - misfit[away], _LEAST_LOG_WEIGHT)
            largest = max(largest, log_weight[p])
            if abs(v) < bound_speed:
                if row[_SINCE] < 0.0:
                    row[_SINCE] = s
                since = int(row[_SINCE])
                if time[j] - time[samples[since]] >= least_dwell - 1e-9:
                    slot = _SLOTS + 3 * int(row[_RESTS])
                    row[slot] = since
                    row[slot + 1] = s + 1
                    row[slot + 2] = row[_Q] / count
            elif row[_SINCE] >= 0.0:
                row[_SINCE] = -1.0
                if row[_SLOTS + 3 * int(row[_RESTS]) + 1] > 0.0:
                    row[_RESTS] = min(row[_RESTS] + 1, _MOST_RESTS - 1)
        total = squares = 0.0
        for p in range(particles):
            weight[p] = np.exp(log_weight[p] - largest) if log_weight[p] < largest else 1.0
            total += weight[p]
            squares += weight[p] ** 2
        if total * total < 0.5 * particles * squares:
            # Systematic resampling; small changes let the copies part company.
            reach = 0.5 / particles
            chosen, sum_to = 0, weight[0] / total
            for p in range(particles):
                while reach > sum_to and chosen < particles - 1:
                    chosen += 1
                    sum_to += weight[chosen] / total
                for field in range(_FIELDS):  # as an assignment of rows it would take a second longer to compile
                    Q[p, field] = P[chosen, field]
                Q[p, _V] *= 1.0 + _PART * normals[draw & mask]
                Q[p, _SLOPE] += _PART * prior.slope_spread * normals[(draw + 1) & mask]
                change = 1.0 + _PART * prior.friction_spread * normals[(draw + 2) & mask]
                Q[p, _COULOMB] *= change
                Q[p, _STATIC] *= change
                if Q[p, _V] != 0.0:
                    Q[p, _W] += (change - 1.0) * Q[p, _COULOMB] * np.sign(Q[p, _V])
                draw += 3
                log_weight[p] = 0.0
                reach += 1.0 / particles
            P, Q = Q, P
    # Every rest adds its weight from its first sample to its last: sums of steps up and steps down.
    result = np.zeros((3, steps))
    largest = -1e300
    for p in range(particles):
        largest = max(largest, log_weight[p])
    total = 0.0
    for p in range(particles):
        w = np.exp(log_weight[p] - largest)
        total += w
        for r in range(_MOST_RESTS):
            slot = _SLOTS + 3 * r
            begin, last, angle = int(P[p, slot]), int(P[p, slot + 1]), P[p, slot + 2]
            if last > 0:
                term = w
                for c in range(3):
                    result[c, begin] += term
                    result[c, last] -= term
                    term *= angle
    for c in range(3):
        for s in range(1, steps):
            result[c, s] += result[c, s - 1]
    for s in range(steps):
        mass = result[0, s]
        if mass > 1e-9 * total:
            mean = result[1, s] / mass
            result[2, s] = np.sqrt(max(result[2, s] / mass - mean * mean, 0.0))
            result[1, s] = origin + mean
        else:
            result[1, s] = origin
            result[2, s] = 0.0
        result[0, s] = max(mass / total, 0.0)
    return result
