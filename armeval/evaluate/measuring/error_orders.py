"""The spectrum of a joint's error over its motor angle: cogging shows at the orders of its cog map.

Error over time has no fixed frequency, because the joint's speed changes; over motor angle cogging is periodic. The
error is averaged in cells of motor angle, for each turning direction less its own mean, so that neither speed nor
friction, which changes sign with the direction, weighs in; what is left is windowed over the range that was visited.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from armeval.arrays import FloatArray
from armeval.evaluate.lap_track import LapTrack
from armeval.model.drive import Drive

_CELLS = 4096  # a motor turn
_LEAST_RANGE = 2.0 * np.pi / 60.0  # of motor angle [rad]; below, orders cannot be told apart


@dataclass(frozen=True, eq=False)
class ErrorOrders:
    """Amplitude of a joint's error by order.

    Attributes
    ----------
    joint
        The joint's name.
    order
        Shape (m,). Cycles a motor turn, rising; not whole where the joint turned less than a motor turn.
    amplitude
        Shape (m,) [rad or m]. Amplitude of the joint's error.
    visited
        Range of motor angle that was visited [rad].
    """

    joint: str
    order: FloatArray
    amplitude: FloatArray
    visited: float

    @property
    def resolution(self) -> float:
        """Orders closer than this cannot be told apart: twice the turns visited, inverted (the window's main lobe)."""
        return 2.0 * 2.0 * np.pi / self.visited


def error_orders(drive: Drive, tracks: Sequence[LapTrack], index: int, *, highest: int = 250) -> ErrorOrders | None:
    """Take one joint's error over some laps apart by order of motor angle.

    Parameters
    ----------
    drive
        The joint's drive.
    tracks
        Laps of one run, at least one.
    index
        The joint's place in the chain.
    highest
        Highest order.

    Returns
    -------
    ErrorOrders or None
        None where the motor turned too little to tell orders apart.
    """
    target = np.concatenate([track.target[:, index] for track in tracks])
    error = np.concatenate([track.angle[:, index] for track in tracks]) - target
    speed = np.concatenate([np.gradient(track.target[:, index]) for track in tracks])
    cell = np.floor((drive.gear_ratio * (target + error) + drive.index_offset) * _CELLS / (2.0 * np.pi)).astype(
        np.int64
    )
    cell -= cell.min()
    count = int(cell.max()) + 1
    visited = count * 2.0 * np.pi / _CELLS
    if visited < _LEAST_RANGE:
        return None
    means = np.array([_cell_means(cell[way], error[way], count) for way in (speed > 0.0, speed < 0.0)])
    seen = np.isfinite(means)
    # Friction and lag shift each direction as a whole; where one alone passed, its shift must not pass for a step.
    offset = np.where(seen, means, 0.0).sum(axis=1) / np.maximum(seen.sum(axis=1), 1)
    visits = seen.sum(axis=0)
    total = np.where(seen, means - offset[:, None], 0.0).sum(axis=0)
    profile = total / np.where(visits > 0, visits, np.nan)
    known = np.flatnonzero(visits)
    if len(known) < 8:
        return None
    angle = known * (2.0 * np.pi / _CELLS)
    trend = np.polyfit(angle, profile[known], 1)
    window = np.sin(np.pi * (known + 0.5) / count) ** 2
    weighed = window * (profile[known] - np.polyval(trend, angle))
    step = max(0.25, min(1.0, 0.25 * 2.0 * np.pi / visited))
    order = np.arange(step, highest + step / 2, step)
    waves = np.exp(-1j * np.outer(order, angle))
    return ErrorOrders(drive.joint, order, 2.0 * np.abs(waves @ weighed) / window.sum(), visited)


def _cell_means(cell: np.ndarray, error: FloatArray, count: int) -> FloatArray:
    visits = np.bincount(cell, minlength=count)
    total = np.bincount(cell, weights=error, minlength=count)
    return np.asarray(total / np.where(visits > 0, visits, np.nan))
