"""One lap against its plan: where the tip was, where it should have been. Measured and predicted laps look the same."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

import numpy as np

from armeval.arrays import FloatArray, frozen


@dataclass(frozen=True, eq=False)
class LapTrack:
    """One lap of a run, sample by sample, from the first target to the last.

    Attributes
    ----------
    run, compensated
        The run it belongs to.
    source
        ``log`` where it was measured, ``prediction`` where it was replayed.
    lap
        From 1.
    file
        The log's file; None for a prediction.
    time
        Shape (k,) [s]. The log's own clock; from 0 in a prediction.
    arc
        Shape (k,) [m]. Arc length along the planned path of the target at that instant; never falls.
    angle, target
        Shape (k, n) [rad or m]. Joint angles (as the encoder gave them, or as predicted) and joint targets.
    tip, target_tip
        Shape (k, 3) [m]. Tip and tip target in the base frame.
    deviation
        Shape (k,) [m]. Shortest distance from the tip to the path near where the tip should be.
    lag
        Shape (k,) [m]. Distance along the path by which the tip trails its target (negative: leads).
    resolution
        Shape (n,) [rad or m]. Joint angle of one count; 0 where exact.
    speed
        Shape (k, n) [rad/s]. True joint speeds, known only in a prediction.
    torque
        Shape (k, n) [N m]. Commanded joint torque, where known.
    time_offset
        Shift [s] that was found between log and planned trajectory; 0 where targets were logged.
    targets_logged
        Whether the targets come from the log.
    """

    run: str
    compensated: bool
    source: Literal["log", "prediction"]
    lap: int
    file: str | None
    time: FloatArray
    arc: FloatArray
    angle: FloatArray
    target: FloatArray
    tip: FloatArray
    target_tip: FloatArray
    deviation: FloatArray
    lag: FloatArray
    resolution: FloatArray
    speed: FloatArray | None = None
    torque: FloatArray | None = None
    time_offset: float = 0.0
    targets_logged: bool = True

    def __post_init__(self) -> None:
        k, n = np.shape(self.angle)
        shapes: dict[str, tuple[int | None, ...]] = {
            "time": (k,),
            "arc": (k,),
            "angle": (k, n),
            "target": (k, n),
            "tip": (k, 3),
            "target_tip": (k, 3),
            "deviation": (k,),
            "lag": (k,),
            "resolution": (n,),
            "speed": (k, n),
            "torque": (k, n),
        }
        for name, shape in shapes.items():
            value = getattr(self, name)
            if value is not None:
                object.__setattr__(self, name, frozen(value, shape, f"lap {name}"))

    @property
    def tracking(self) -> FloatArray:
        """Shape (k,) [m]. Norm of the tracking error, tip minus target at the same instant; worked out anew."""
        from armeval.kernels.distances import distances

        found = distances(self.tip, self.target_tip)
        found.setflags(write=False)
        return found

    @property
    def duration(self) -> float:
        """Time from the first sample to the last [s]."""
        return float(self.time[-1] - self.time[0])
