"""One pass along a lap: what its errors sum up to in every stretch, and how it takes every corner."""

from __future__ import annotations

from typing import NamedTuple

import numpy as np

from armeval.arrays import FloatArray
from armeval.kernels.compile import jit


class StretchSums(NamedTuple):
    """Sums over the samples of each stretch, shape (stretches,) each, lengths in metres.

    The error is tip minus target; `along` is its component along the path's direction at the target (positive: the tip
    is ahead), `across` the norm of the rest. `drift` and `speed_square` sum lag * v and v^2, v being the target's speed
    along the path [m/s].
    """

    samples: FloatArray
    tracking_square: FloatArray
    tracking_max: FloatArray
    deviation_square: FloatArray
    deviation_max: FloatArray
    along: FloatArray
    along_square: FloatArray
    across_square: FloatArray
    across_max: FloatArray
    lag: FloatArray
    lag_max: FloatArray
    drift: FloatArray
    speed_square: FloatArray


@jit
def stretch_sums(
    time: FloatArray,
    arc: FloatArray,
    tip: FloatArray,
    target_tip: FloatArray,
    deviation: FloatArray,
    lag: FloatArray,
    path: FloatArray,
    path_arc: FloatArray,
    corners: FloatArray,
) -> StretchSums:
    """Sum up one lap of k samples by the stretches between corners.

    Parameters
    ----------
    time, arc, deviation, lag
        Shape (k,) [s], [m]; arc length of the target, never falling.
    tip, target_tip
        Shape (k, 3) [m].
    path, path_arc
        Shape (p, 3), (p,) [m].
    corners
        Shape (c,) [m]. Arc lengths of the ends of the c - 1 stretches. A target on a corner belongs to what follows.
    """
    k, stretches, last = len(time), len(corners) - 1, len(path_arc) - 2
    sums = StretchSums(
        np.zeros(stretches),
        np.zeros(stretches),
        np.zeros(stretches),
        np.zeros(stretches),
        np.zeros(stretches),
        np.zeros(stretches),
        np.zeros(stretches),
        np.zeros(stretches),
        np.zeros(stretches),
        np.zeros(stretches),
        np.zeros(stretches),
        np.zeros(stretches),
        np.zeros(stretches),
    )
    stretch = segment = 0
    for j in range(k):
        while stretch < stretches - 1 and arc[j] >= corners[stretch + 1]:
            stretch += 1
        while segment < last and arc[j] >= path_arc[segment + 1]:
            segment += 1
        length = path_arc[segment + 1] - path_arc[segment]
        square = along = 0.0
        for r in range(3):
            e = tip[j, r] - target_tip[j, r]
            square += e * e
            along += e * (path[segment + 1, r] - path[segment, r]) / length
        across_square = max(square - along * along, 0.0)
        before, after = max(j - 1, 0), min(j + 1, k - 1)
        speed = (arc[after] - arc[before]) / (time[after] - time[before])
        sums.samples[stretch] += 1.0
        sums.tracking_square[stretch] += square
        sums.tracking_max[stretch] = max(sums.tracking_max[stretch], np.sqrt(square))
        sums.deviation_square[stretch] += deviation[j] * deviation[j]
        sums.deviation_max[stretch] = max(sums.deviation_max[stretch], deviation[j])
        sums.along[stretch] += along
        sums.along_square[stretch] += along * along
        sums.across_square[stretch] += across_square
        sums.across_max[stretch] = max(sums.across_max[stretch], np.sqrt(across_square))
        sums.lag[stretch] += lag[j]
        sums.lag_max[stretch] = max(sums.lag_max[stretch], abs(lag[j]))
        sums.drift[stretch] += lag[j] * speed
        sums.speed_square[stretch] += speed * speed
    return sums


@jit
def corner_passes(
    arc: FloatArray,
    tip: FloatArray,
    lag: FloatArray,
    path: FloatArray,
    path_arc: FloatArray,
    corners: FloatArray,
    beyond: FloatArray,
) -> tuple[FloatArray, FloatArray]:
    """How near a lap passes to each corner between stretches, and how far it shoots beyond.

    A corner's samples are those whose target is nearer to it than the middles of the two stretches that meet there.

    Parameters
    ----------
    arc, lag
        Shape (k,) [m]. Arc length of the target, and by how much the tip's own falls behind it.
    tip
        Shape (k, 3) [m].
    path, path_arc
        Shape (p, 3), (p,) [m].
    corners
        Shape (c,) [m]. The path's two ends included.
    beyond
        Shape (c - 2, 3). Unit vector at each inner corner that says which way is beyond.

    Returns
    -------
    rounding, overshoot
        Shape (c - 2,) each [m]. Least distance from the corner to the attained path (between samples as a straight
        line); greatest distance of the tip along `beyond` from the path that follows the corner, 0 at least. NaN where
        the lap has no sample there.
    """
    inner, last = len(corners) - 2, len(path_arc) - 2
    rounding = np.full(inner, np.nan)
    overshoot = np.full(inner, np.nan)
    corner = np.empty(3)
    j, segment = 0, 0
    for c in range(inner):
        s = corners[c + 1]
        low, high = 0.5 * (corners[c] + s), 0.5 * (s + corners[c + 2])
        at = segment
        while at < last and s >= path_arc[at + 1]:
            at += 1
        share = (s - path_arc[at]) / (path_arc[at + 1] - path_arc[at])
        for r in range(3):
            corner[r] = path[at, r] + share * (path[at + 1, r] - path[at, r])
        segment = at
        while j < len(arc) and arc[j] < low:
            j += 1
        first = j
        nearest = np.inf
        farthest = 0.0
        while j < len(arc) and arc[j] <= high:
            square = moved = along = 0.0
            for r in range(3):
                square += (tip[j, r] - corner[r]) ** 2
                if j > first:
                    step = tip[j, r] - tip[j - 1, r]
                    moved += step * step
                    along += step * (corner[r] - tip[j - 1, r])
            if j > first and 0.0 < along < moved:
                share = along / moved
                square = 0.0
                for r in range(3):
                    square += (tip[j - 1, r] + share * (tip[j, r] - tip[j - 1, r]) - corner[r]) ** 2
            nearest = min(nearest, square)
            own = arc[j] - lag[j]
            if own >= s:
                while at < last and own >= path_arc[at + 1]:
                    at += 1
                while at > segment and own < path_arc[at]:
                    at -= 1
                share = (own - path_arc[at]) / (path_arc[at + 1] - path_arc[at])
                out = 0.0
                for r in range(3):
                    on_path = path[at, r] + share * (path[at + 1, r] - path[at, r])
                    out += (tip[j, r] - on_path) * beyond[c, r]
                farthest = max(farthest, out)
            j += 1
        if j > first:
            rounding[c] = np.sqrt(nearest)
            overshoot[c] = farthest
    return rounding, overshoot
