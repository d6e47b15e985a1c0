"""What a run truly did: RMS errors and rests, from the plant's true angles and speeds."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

FloatArray = npt.NDArray[np.float64]


@dataclass(frozen=True)
class TrueRest:
    """A joint that rested while told to move: rows [first, last] of the lap and where it rested [rad]."""

    joint: int
    first: int
    last: int
    angle: float


def rests(
    true_angle: FloatArray,
    true_speed: FloatArray,
    target_speed: FloatArray,
    period: float,
    *,
    least_target_speed: float = 0.02,
    speed_share: float = 0.02,
    least_dwell: float = 0.020,
) -> list[TrueRest]:
    """Find every stretch of time in which a joint is told to move and does not; all arrays of shape (k, n)."""
    found = []
    told = np.abs(target_speed)
    resting = (told >= least_target_speed) & (np.abs(true_speed) < speed_share * told)
    for joint in range(resting.shape[1]):
        edges = np.diff(np.concatenate([[0], resting[:, joint].astype(int), [0]]))
        for first, after in zip(np.flatnonzero(edges == 1), np.flatnonzero(edges == -1), strict=True):
            if (after - first) * period >= least_dwell - 1e-9:
                found.append(TrueRest(joint, int(first), int(after - 1), float(true_angle[first, joint])))
    return found


def distance_to_path(tip: FloatArray, arc: FloatArray, points: FloatArray, window: float) -> FloatArray:
    """Shortest distance (k,) [m] from each tip to the legs of the path within ``window`` [m] of where it should be."""
    legs = np.diff(points, axis=0)
    lengths = np.linalg.norm(legs, axis=1)
    start = np.concatenate([[0.0], np.cumsum(lengths)[:-1]])
    nearest = np.empty(len(tip))
    for k, (p, s) in enumerate(zip(tip, arc, strict=True)):
        low = np.clip((s - window - start) / lengths, 0.0, 1.0)
        high = np.clip((s + window - start) / lengths, 0.0, 1.0)
        near = high > low
        part = np.clip(np.einsum("ij,ij->i", p - points[:-1], legs) / lengths**2, low, high)
        gap = np.linalg.norm(points[:-1] + part[:, None] * legs - p, axis=1)
        nearest[k] = gap[near].min()
    return nearest


def rms(error: FloatArray) -> float:
    """Root mean square of error norms."""
    return float(np.sqrt(np.mean(np.square(error))))
