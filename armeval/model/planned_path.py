"""The path: the wanted geometric curve of the tip, as the user gives it."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

import numpy as np

from armeval.arrays import FloatArray, frozen
from armeval.errors import InputError


@dataclass(frozen=True, eq=False)
class PlannedPath:
    """Points of a path, as tip points or joint targets, with or without time.

    Attributes
    ----------
    points
        Shape (k, 3) [m] in the base frame where ``space`` is ``tip``; (k, n) [rad or m] where it is ``joint``.
    space
        What the points are.
    time
        Shape (k,) [s], rising; None where the trial's feed and acceleration put time on the path.
    source
        The file as the user named it.
    """

    points: FloatArray
    space: Literal["tip", "joint"] = "tip"
    time: FloatArray | None = None
    source: str = ""

    def __post_init__(self) -> None:
        points = frozen(self.points, (None, 3 if self.space == "tip" else None), "path points")
        if len(points) < 2:
            raise InputError(f"the path has {len(points)} point", "give at least two points", file=self.source)
        if np.ptp(points, axis=0).max() == 0.0:
            raise InputError("all points of the path are the same", "give a path that moves", file=self.source)
        object.__setattr__(self, "points", points)
        if self.time is not None:
            time = frozen(self.time, (len(points),), "path time")
            if (np.diff(time) <= 0.0).any():
                row = int(np.argmax(np.diff(time) <= 0.0)) + 1
                raise InputError(
                    "time does not rise",
                    "let every row be later than the one before",
                    file=self.source,
                    place=f"point {row + 1}",
                )
            object.__setattr__(self, "time", time)
