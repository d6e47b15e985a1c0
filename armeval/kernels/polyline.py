"""Points against a polyline in space: nearest point within a stretch of it, and progress along it.

A polyline has p points with rising arc lengths; the stretch between two arc lengths is looked through segment by
segment, so the cost is that of the segments within the stretches, linear in the number of points.
"""

from __future__ import annotations

import numpy as np

from armeval.arrays import FloatArray, read_only
from armeval.kernels.compile import jit, jit_part

_TIE = 1e-9
"""Distances [m] that differ by less are equal: where a path runs back over itself, rounding must not decide."""


@jit_part
def _segment_at(arc: FloatArray, s: float, guess: int) -> int:
    """Segment that holds arc length s, walked to from a guess."""
    last = arc.shape[0] - 2
    i: int = min(max(guess, 0), last)
    while i > 0 and s < arc[i]:
        i -= 1
    while i < last and s >= arc[i + 1]:
        i += 1
    return i


@jit_part
def _nearest_on_segment(
    path: FloatArray, arc: FloatArray, i: int, low: float, high: float, point: FloatArray
) -> tuple[float, float]:
    """Distance to the part of segment i between two arc lengths, and the arc length of the nearest point."""
    length = arc[i + 1] - arc[i]
    along = 0.0
    for r in range(3):
        along += (point[r] - path[i, r]) * (path[i + 1, r] - path[i, r])
    s = arc[i] + along / length
    s = min(max(s, low, arc[i]), high, arc[i + 1])
    share = (s - arc[i]) / length
    square = 0.0
    for r in range(3):
        square += (point[r] - path[i, r] - share * (path[i + 1, r] - path[i, r])) ** 2
    return np.sqrt(square), s


def nearest_near(
    points: FloatArray, expected: FloatArray, window: FloatArray, path: FloatArray, arc: FloatArray
) -> tuple[FloatArray, FloatArray]:
    """Nearest point on the polyline within a window of arc length about where each point should be.

    Parameters
    ----------
    points
        Shape (k, 3) [m].
    expected
        Shape (k,) [m]. Arc length about which to look; values beyond the ends count as the end.
    window
        Shape (k,) [m]. Half the window; infinite: the whole polyline.
    path, arc
        Shape (p, 3) and (p,) [m], no two neighbours the same.

    Returns
    -------
    distance, arc
        Shape (k,) each [m]. Of equally near points, the one nearest to the expected arc length.
    """
    distance, found = np.empty(len(points)), np.empty(len(points))
    points, expected, window = read_only(points), read_only(expected), read_only(window)
    _nearest_near(points, expected, window, read_only(path), read_only(arc), distance, found)
    return distance, found


@jit
def _nearest_near(
    points: FloatArray,
    expected: FloatArray,
    window: FloatArray,
    path: FloatArray,
    arc: FloatArray,
    distance: FloatArray,
    found: FloatArray,
) -> None:
    k, last = points.shape[0], arc.shape[0] - 2
    begin = guess = 0
    lag = 0.0
    for j in range(k):
        middle = min(max(expected[j], arc[0]), arc[last + 1])
        low, high = middle - window[j], middle + window[j]
        # A first candidate, as far behind as the last point was, lets most of the window be passed over below.
        near = min(max(middle - lag, low, arc[0]), high, arc[last + 1])
        guess = _segment_at(arc, near, guess)
        best, best_s = _nearest_on_segment(path, arc, guess, low, high, points[j])
        taken = best
        begin = _segment_at(arc, low, begin)
        unseen = arc[begin]
        for i in range(begin, last + 1):
            if arc[i] > high:
                break
            if arc[i + 1] < unseen:
                continue
            d, s = _nearest_on_segment(path, arc, i, low, high, points[j])
            if d < taken - _TIE or (d < best + _TIE and abs(s - middle) < abs(best_s - middle)):
                taken, best_s = d, s
            best = min(best, d)
            # The distance to the point falls by no more than the way along the path.
            unseen = arc[i + 1] + (d - best) - _TIE
        lag = middle - best_s
        distance[j], found[j] = best, best_s


@jit
def distances_at(points: FloatArray, expected: FloatArray, path: FloatArray, arc: FloatArray) -> FloatArray:
    """Distance of each point (k, 3) from the polyline's point at its expected arc length (k,) [m]."""
    k = points.shape[0]
    distance = np.empty(k)
    i = 0
    for j in range(k):
        i = _segment_at(arc, expected[j], i)
        share = min(max((expected[j] - arc[i]) / (arc[i + 1] - arc[i]), 0.0), 1.0)
        square = 0.0
        for r in range(3):
            square += (points[j, r] - path[i, r] - share * (path[i + 1, r] - path[i, r])) ** 2
        distance[j] = np.sqrt(square)
    return distance


def progress(points: FloatArray, path: FloatArray, arc: FloatArray, start: float) -> FloatArray:
    """Arc length of a row of points that move along the polyline and never back.

    Each point is looked for from the arc length of the one before onward, no further than four times the way between
    the last three points and the distance by which the last one missed the path allow. So the row can stand still,
    cross its own track, run back over it and close, and finds its way again after a gap.

    Parameters
    ----------
    points
        Shape (k, 3) [m], on the polyline or near it.
    path, arc
        Shape (p, 3) and (p,) [m], no two neighbours the same.
    start
        Arc length [m] from which to look for the first point.

    Returns
    -------
    Shape (k,) [m], never falling.
    """
    found = np.empty(len(points))
    _progress(read_only(points), read_only(path), read_only(arc), start, found)
    return found


@jit
def _progress(points: FloatArray, path: FloatArray, arc: FloatArray, start: float, found: FloatArray) -> None:
    k, last = points.shape[0], arc.shape[0] - 2
    s = start
    segment = 0
    before = 0.0
    missed = 0.0
    for j in range(k):
        way = 0.0
        if j == 0:
            i = _segment_at(arc, s, 0)
            share = (s - arc[i]) / (arc[i + 1] - arc[i])
            for r in range(3):
                way += (points[0, r] - path[i, r] - share * (path[i + 1, r] - path[i, r])) ** 2
        else:
            for r in range(3):
                way += (points[j, r] - points[j - 1, r]) ** 2
        way = np.sqrt(way)
        low = s
        high = s + 2.0 * (way + before) + 4.0 * missed
        segment = _segment_at(arc, low, segment)
        best = np.inf
        for i in range(segment, last + 1):
            if arc[i] > high:
                break
            d, at = _nearest_on_segment(path, arc, i, low, high, points[j])
            if d < best - _TIE:
                best, s = d, at
        missed = best
        before = way
        found[j] = s
