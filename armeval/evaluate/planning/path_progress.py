"""Where along the path the tip is, and how far off it, not drawn to another stretch that happens to be near."""

from __future__ import annotations

import numpy as np

from armeval.arrays import FloatArray
from armeval.kernels.polyline import distances_at, nearest_near, progress
from armeval.model.trajectory import Trajectory

_AT_START = 1e-3
"""A first target this much nearer to another part of the path [m] does not begin at the path's start."""


def path_progress(
    tip: FloatArray, expected_arc: FloatArray, trajectory: Trajectory, *, window: float | None = None
) -> tuple[FloatArray, FloatArray]:
    """Shortest distance from the tip to the path near where the tip should be.

    A path may cross itself or run back over itself, so the nearest point is looked for only within a window of arc
    length about the target. Where the tip is a distance e from its target, the nearest point of the path is at most e
    from the tip and so at most 2 e from the target; the way along the path to it is longer where there is a corner
    between them. The window therefore reaches 4 e to either side, each sample with its own e: a small error never sees
    another stretch, a large lag still finds the tip's own.

    Parameters
    ----------
    tip
        Shape (k, 3) [m] in the base frame.
    expected_arc
        Shape (k,) [m]. Arc length of the target at the same instants.
    trajectory
        Holds the path.
    window
        Half the window [m] in place of 4 e; infinite: the whole path.

    Returns
    -------
    deviation
        Shape (k,) [m]. Distance to the nearest point.
    arc
        Shape (k,) [m]. Its arc length. ``expected_arc - arc`` is the lag.
    """
    tip = np.ascontiguousarray(tip, dtype=np.float64)
    expected = np.ascontiguousarray(expected_arc, dtype=np.float64)
    path, arc = trajectory.path, trajectory.path_arc
    half = 4.0 * distances_at(tip, expected, path, arc) if window is None else np.full(len(tip), float(window))
    return nearest_near(tip, expected, half, path, arc)


def follow(points: FloatArray, path: FloatArray, path_arc: FloatArray) -> FloatArray:
    """Progress of a row of target points along the path, at any feed and with any stops; it never goes back.

    The row begins at the path's start unless its first point lies clearly nearer to another part of the path. Closed,
    self-crossing and back-and-forth paths are followed by continuity; nothing is known of time.

    Parameters
    ----------
    points
        Shape (k, 3) [m]. Targets of the tip in the order of time, on the path within rounding.
    path, path_arc
        Shape (p, 3) and (p,) [m]. The path and the arc lengths of its points.

    Returns
    -------
    Shape (k,) [m], never falling.
    """
    points = np.ascontiguousarray(points, dtype=np.float64)
    if len(points) == 0:
        return np.empty(0)
    whole = np.array([np.inf])
    distance, nearest = nearest_near(points[:1], path_arc[:1], whole, path, path_arc)
    from_start = float(np.linalg.norm(points[0] - path[0]))
    start = 0.0 if from_start <= float(distance[0]) + _AT_START else float(nearest[0])
    return progress(points, path, path_arc, start)
