"""Path criteria as ISO 9283:1998 (manipulating industrial robots, performance criteria) defines them.

Confirmed at the source (national adoption GOST R 60.3.3.1-2016): the barycentre and distance formulas of pose accuracy,
on which those of path accuracy are built, and the numbers of cycles of its Table 5. From memory: path accuracy and
repeatability as maxima over planes, the velocity criteria, corner rounding and overshoot. What the standard leaves to
the test (number and place of planes, where speed is constant) is chosen here and said with each figure. A user's own
path does not reproduce the standard's loads, speeds and test paths: the figures are computed the standard's way, they
are no test to the standard.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from armeval.arrays import FloatArray
from armeval.evaluate.document import JsonValue
from armeval.evaluate.lap_track import LapTrack
from armeval.evaluate.planning.path_planes import lay_planes, plane_crossings, points_on
from armeval.kernels.stretches import corner_passes
from armeval.model.trajectory import Trajectory

PATH_LAPS = 10
VELOCITY_LAPS = 10
CORNER_LAPS = 3
"""Cycles that ISO 9283:1998 asks for (Table 5, confirmed)."""

_SPEED_WINDOW = 0.050
_CONSTANT = 0.99


@dataclass(frozen=True)
class PathCriteria:
    """ISO 9283:1998 path criteria of one run.

    Attributes
    ----------
    laps, planes
        How many there are; each stretch of path has its share of planes, at least one, none at a corner. A plane that
        not every lap reached is not counted.
    accuracy, repeatability
        AT_p and RT_p [m]; RT_p needs two laps, else NaN.
    speed, speed_planes
        Commanded speed [m/s] and at how many planes it is constant; NaN and 0 if nowhere.
    velocity_accuracy, velocity_repeatability
        AV and RV as shares of the commanded speed (the standard gives percent).
    velocity_fluctuation
        FV [m/s].
    corner_rounding, corner_overshoot
        CR and CO [m]: mean over laps at the worst corner; NaN if there is no corner.
    corners
        Shape (c,) [m]. Arc lengths of the corners.
    roundings, overshoots
        Shape (c,) [m]. CR and CO of each corner, mean over laps.
    """

    laps: int
    planes: int
    accuracy: float
    repeatability: float
    speed: float
    speed_planes: int
    velocity_accuracy: float
    velocity_repeatability: float
    velocity_fluctuation: float
    corner_rounding: float
    corner_overshoot: float
    corners: tuple[float, ...]
    roundings: tuple[float, ...]
    overshoots: tuple[float, ...]

    @property
    def notes(self) -> tuple[str, ...]:
        """Where there are fewer laps than the standard asks for."""
        asked = (
            ("path accuracy and repeatability", PATH_LAPS),
            ("the velocity criteria", VELOCITY_LAPS),
            ("corner rounding and overshoot", CORNER_LAPS),
        )
        return tuple(
            f"ISO 9283 asks for {laps} laps for {what}; there are {self.laps}"
            for what, laps in asked
            if self.laps < laps
        )

    def to_document(self) -> dict[str, JsonValue]:
        """Give the `iso_9283` entry in the JSON document."""
        return {
            "laps": self.laps,
            "laps_asked": {"path": PATH_LAPS, "velocity": VELOCITY_LAPS, "corner": CORNER_LAPS},
            "planes": self.planes,
            "AT_m": self.accuracy,
            "RT_m": self.repeatability,
            "speed_m_s": self.speed,
            "speed_planes": self.speed_planes,
            "AV": self.velocity_accuracy,
            "RV": self.velocity_repeatability,
            "FV_m_s": self.velocity_fluctuation,
            "CR_m": self.corner_rounding,
            "CO_m": self.corner_overshoot,
            "corners": [
                {"at_m": at, "CR_m": rounding, "CO_m": overshoot}
                for at, rounding, overshoot in zip(self.corners, self.roundings, self.overshoots, strict=True)
            ],
            "notes": list(self.notes),
        }


def path_criteria(tracks: Sequence[LapTrack], trajectory: Trajectory, *, planes: int = 100) -> PathCriteria:
    """Compute the path criteria of the laps of one run.

    Parameters
    ----------
    tracks
        The laps, at least one.
    trajectory
        Holds the path.
    planes
        About how many planes to lay across the path, normal to it.
    """
    laid = lay_planes(trajectory, planes)
    crossings, attained, asked = [], [], []
    for track in tracks:
        crossings.append(plane_crossings(track, laid)[0])
        # Speeds are taken when the target passes the planes, in even steps of time: taken where the tip passes them, a
        # tip that rests and slips would seem faster than it is, for it covers most of its way while it slips.
        when = np.interp(laid.at, track.arc, track.time)
        attained.append(_speeds(track.time, track.tip, when, laid.direction))
        asked.append(_speeds(track.time, track.target_tip, when, laid.direction))
    reached = np.isfinite(crossings).all(axis=(0, 2))
    accuracy, repeatability = accuracy_and_repeatability(np.array(crossings)[:, reached], laid.point[reached])
    commanded = np.mean(asked, axis=0)
    speed = float(commanded.max())
    constant = reached & (commanded >= _CONSTANT * speed)
    AV, RV, FV = velocity_criteria(np.array(attained)[:, constant], speed)

    inner = trajectory.corners[1:-1]
    beyond = _beyond(trajectory, inner)
    passes = [
        corner_passes(track.arc, track.tip, track.lag, trajectory.path, trajectory.path_arc, trajectory.corners, beyond)
        for track in tracks
    ]
    roundings, overshoots = np.mean(np.array(passes), axis=0) if len(inner) else np.empty((2, 0))
    return PathCriteria(
        laps=len(tracks),
        planes=int(reached.sum()),
        accuracy=accuracy,
        repeatability=repeatability,
        speed=speed,
        speed_planes=int(constant.sum()),
        velocity_accuracy=AV,
        velocity_repeatability=RV,
        velocity_fluctuation=FV,
        corner_rounding=_largest(roundings),
        corner_overshoot=_largest(overshoots),
        corners=tuple(map(float, inner)),
        roundings=tuple(map(float, roundings)),
        overshoots=tuple(map(float, overshoots)),
    )


def accuracy_and_repeatability(attained: FloatArray, command: FloatArray) -> tuple[float, float]:
    """AT_p and RT_p from where n laps cross m planes.

    In plane i with barycentre G_i of the n attained points and l_ij their distances from it::

        AT_p = max_i |G_i - command_i|                     (from memory; |G - command| confirmed for poses)
        RT_p = max_i (mean_j l_ij + 3 S_i),  S_i^2 = sum_j (l_ij - mean_j l_ij)^2 / (n - 1)         (from memory)

    Parameters
    ----------
    attained
        Shape (n, m, 3) [m].
    command
        Shape (m, 3) [m].
    """
    if attained.shape[1] == 0:
        return float("nan"), float("nan")
    barycentre = attained.mean(axis=0)
    accuracy = float(np.linalg.norm(barycentre - command, axis=1).max())
    if len(attained) < 2:
        return accuracy, float("nan")
    distance = np.linalg.norm(attained - barycentre, axis=2)
    return accuracy, float((distance.mean(axis=0) + 3.0 * distance.std(axis=0, ddof=1)).max())


def velocity_criteria(speed: FloatArray, commanded: float) -> tuple[float, float, float]:
    """AV, RV and FV from the speeds of n laps at m planes (from memory).

    With v_j the mean speed of lap j, v their mean, v_c the commanded speed::

        AV = (v - v_c) / v_c,  RV = 3 S_v / v_c (n - 1),  FV = max_j (max_i v_ij - min_i v_ij)

    Parameters
    ----------
    speed
        Shape (n, m) [m/s].
    commanded
        v_c [m/s].

    Returns
    -------
    AV and RV as shares, FV in m/s; RV is NaN for a single lap, all are without planes or if the target never moves.
    """
    if speed.shape[1] == 0 or not commanded > 0.0:
        return (float("nan"),) * 3
    of_laps = speed.mean(axis=1)
    repeatability = 3.0 * float(of_laps.std(ddof=1)) / commanded if len(speed) > 1 else float("nan")
    fluctuation = float((speed.max(axis=1) - speed.min(axis=1)).max())
    return (float(of_laps.mean()) - commanded) / commanded, repeatability, fluctuation


def _largest(values: FloatArray) -> float:
    """Largest of the values that are known; NaN where there is none."""
    known = values[np.isfinite(values)]
    return float(known.max()) if len(known) else float("nan")


def _speeds(time: FloatArray, tip: FloatArray, when: FloatArray, direction: FloatArray) -> FloatArray:
    """Speed (m,) [m/s] of a tip along given directions (m, 3) at some instants.

    It is taken over 50 ms: the toggling of one encoder count is no speed.
    """
    ends = [np.clip(when + half, time[0], time[-1]) for half in (-0.5 * _SPEED_WINDOW, 0.5 * _SPEED_WINDOW)]
    early, late = (_between(at, time, tip) for at in ends)
    return np.asarray(np.sum((late - early) * direction, axis=1) / (ends[1] - ends[0]))


def _between(at: FloatArray, time: FloatArray, tip: FloatArray) -> FloatArray:
    """Tip (m, 3) at some instants, linear between samples."""
    after = np.clip(np.searchsorted(time, at), 1, len(time) - 1)
    share = (at - time[after - 1]) / (time[after] - time[after - 1])
    return np.asarray(tip[after - 1] + share[:, None] * (tip[after] - tip[after - 1]))


def _beyond(trajectory: Trajectory, corners: FloatArray) -> FloatArray:
    """Give the unit vectors (c, 3) along which a tip overshoots at corners.

    It is the part of the incoming direction square to the outgoing one; the incoming direction itself where the path
    turns straight back.
    """
    tiny = 1e-9 * trajectory.length
    _, incoming = points_on(trajectory, corners - tiny)
    _, outgoing = points_on(trajectory, corners + tiny)
    square = incoming - np.sum(incoming * outgoing, axis=1, keepdims=True) * outgoing
    size = np.linalg.norm(square, axis=1, keepdims=True)
    return np.where(size > 1e-9, square / np.where(size > 1e-9, size, 1.0), incoming)
