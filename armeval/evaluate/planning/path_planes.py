"""Planes laid across a path, and where laps go through them."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from armeval.arrays import FloatArray
from armeval.evaluate.lap_track import LapTrack
from armeval.model.trajectory import Trajectory

_REACH = 3.0
"""A plane is looked for while the target is within so many times the lap's largest error of it."""


@dataclass(frozen=True, eq=False)
class Planes:
    """Planes laid across a path, normal to it.

    Attributes
    ----------
    at
        Shape (m,) [m]. Their arc lengths, rising.
    begin, end
        Shape (m,) [m]. The ends of the stretch that each lies in.
    point, direction
        Shape (m, 3) [m]. Point and direction of the path there.
    """

    at: FloatArray
    begin: FloatArray
    end: FloatArray
    point: FloatArray
    direction: FloatArray


def lay_planes(trajectory: Trajectory, planes: int) -> Planes:
    """Lay about so many planes: evenly within each stretch, half a spacing away from its ends, at least one in each."""
    corners = trajectory.corners
    lengths = np.diff(corners)
    shares = np.maximum(1, np.round(planes * lengths / lengths.sum())).astype(np.int64)
    begin, end = np.repeat(corners[:-1], shares), np.repeat(corners[1:], shares)
    at = begin + np.concatenate([(np.arange(n) + 0.5) / n for n in shares]) * (end - begin)
    return Planes(at, begin, end, *points_on(trajectory, at))


def points_on(trajectory: Trajectory, at: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Points of the path at arc lengths (m,) and its direction there, shape (m, 3) each."""
    segment = np.clip(np.searchsorted(trajectory.path_arc, at, side="right") - 1, 0, len(trajectory.path_arc) - 2)
    direction = np.diff(trajectory.path, axis=0)[segment] / np.diff(trajectory.path_arc)[segment, None]
    return trajectory.path[segment] + (at - trajectory.path_arc[segment])[:, None] * direction, direction


def plane_crossings(track: LapTrack, planes: Planes) -> tuple[FloatArray, FloatArray]:
    """Where and when a lap first crosses each plane while its target is on that stretch and near it.

    The tip is never farther from its target than the lap's largest error, so its target is then within a few times that
    of the plane; elsewhere a curve may meet the plane again.

    Returns
    -------
    point, time
        Shape (m, 3) [m] and (m,) [s], linear between the two samples that lie on either side; NaN where the lap does
        not cross.
    """
    reach = _REACH * float(track.tracking.max())
    first = np.searchsorted(track.arc, np.maximum(planes.begin, planes.at - reach))
    last = np.searchsorted(track.arc, np.minimum(planes.end, planes.at + reach), side="right")
    point, time = np.full((len(planes.at), 3), np.nan), np.full(len(planes.at), np.nan)
    for i, (begin, end) in enumerate(zip(np.maximum(first - 1, 0), np.minimum(last + 1, len(track.arc)), strict=True)):
        side = (track.tip[begin:end] - planes.point[i]) @ planes.direction[i]
        through = np.flatnonzero((side[:-1] < 0.0) & (side[1:] >= 0.0))
        if len(through):
            j = int(through[0])
            share = side[j] / (side[j] - side[j + 1])
            before, after = begin + j, begin + j + 1
            point[i] = track.tip[before] + share * (track.tip[after] - track.tip[before])
            time[i] = track.time[before] + share * (track.time[after] - track.time[before])
    return point, time
