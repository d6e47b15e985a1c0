"""The joint log: encoder angles of one lap over time."""

from __future__ import annotations

import itertools
from dataclasses import dataclass

import numpy as np

from armeval.arrays import FloatArray, frozen
from armeval.errors import InputError

#: A step of time that is longer than so many median periods is a gap.
GAP_PERIODS = 10.0
#: Of longer logs, the period is the median over about so many steps, evenly picked.
_STEPS_LOOKED_AT = 100_000


@dataclass(frozen=True, eq=False)
class JointLog:
    """What was logged during one lap, in the chain's order of joints.

    Attributes
    ----------
    time
        Shape (k,) [s], rising; the log's own clock.
    angle
        Shape (k, n) [rad or m]. Joint angles from the encoders.
    target
        Shape (k, n) [rad or m]. Joint targets; None where they were not logged.
    torque
        Shape (k, n) [N m or N]. Commanded torque at the joint; None likewise.
    resolution
        Shape (n,) [rad or m]. Joint angle of one encoder count; 0 where unknown.
    lap
        From 1, over all files of the run in file-name order.
    source
        The file as the user named it.
    """

    time: FloatArray
    angle: FloatArray
    target: FloatArray | None = None
    torque: FloatArray | None = None
    resolution: FloatArray | None = None
    lap: int = 1
    source: str = ""

    def __post_init__(self) -> None:
        time = frozen(self.time, (None,), "log time")
        k = len(time)
        n = np.shape(self.angle)[-1]
        object.__setattr__(self, "time", time)
        object.__setattr__(self, "angle", frozen(self.angle, (k, n), "log angle"))
        for name in ("target", "torque"):
            value = getattr(self, name)
            if value is not None:
                object.__setattr__(self, name, frozen(value, (k, n), f"log {name}"))
        steps = np.zeros(n) if self.resolution is None else self.resolution
        object.__setattr__(self, "resolution", frozen(steps, (n,), "encoder resolution"))
        if k < 2:
            raise InputError(f"the log has {k} row", "log a whole lap", file=self.source)
        if not (time[1:] > time[:-1]).all():
            row = int(np.argmax(np.diff(time) <= 0.0)) + 1
            raise InputError("time does not rise", "remove the row", file=self.source, place=f"sample {row + 1}")

    @property
    def period(self) -> float:
        """Median time from one sample to the next [s]."""
        return _median_step(np.diff(self.time))

    @property
    def segments(self) -> tuple[slice, ...]:
        """Stretches of samples without a gap, in the order of time; nothing is known of what happened between them.

        A gap is a step of time longer than ``GAP_PERIODS`` median periods: a jittered clock makes none.
        """
        steps = np.diff(self.time)
        starts = [0, *(np.flatnonzero(steps > GAP_PERIODS * _median_step(steps)) + 1).tolist(), len(self.time)]
        return tuple(slice(first, last) for first, last in itertools.pairwise(starts))


def _median_step(steps: FloatArray) -> float:
    """Median of the steps of time, shape (k - 1,) [s]; of a long log, of some of them."""
    return float(np.median(steps[:: max(1, len(steps) // _STEPS_LOOKED_AT)]))
