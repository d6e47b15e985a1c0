"""Along the path and across it, lag in distance and time: by stretch, by lap and over a run."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from armeval.arrays import FloatArray
from armeval.evaluate.document import JsonValue
from armeval.evaluate.lap_track import LapTrack
from armeval.kernels.stretches import StretchSums, stretch_sums
from armeval.model.trajectory import Trajectory


@dataclass(frozen=True)
class Components:
    """The tracking error taken apart along the path's direction at the target.

    Attributes
    ----------
    along_mean, along_rms
        Component along the path [m]; positive: the tip is ahead.
    across_rms, across_max
        What is left across the path [m].
    lag_mean, lag_max
        Distance along the path by which the tip trails its target [m], and its greatest amount either way.
    lag_time
        The one delay [s] that explains the lag best: sum of lag * v over sum of v^2, v the target's speed along the
        path (least squares of lag = v * delay; derived, and checked on a pure delay). NaN if the target stands still.
    """

    along_mean: float
    along_rms: float
    across_rms: float
    across_max: float
    lag_mean: float
    lag_max: float
    lag_time: float

    def to_document(self) -> dict[str, JsonValue]:
        """Give the entries in the JSON document."""
        return {
            "along_mean_m": self.along_mean,
            "along_rms_m": self.along_rms,
            "across_rms_m": self.across_rms,
            "across_max_m": self.across_max,
            "lag_mean_m": self.lag_mean,
            "lag_max_m": self.lag_max,
            "lag_time_s": self.lag_time,
        }


@dataclass(frozen=True)
class StretchErrors:
    """Errors on one stretch of the path, over all laps of a run.

    Attributes
    ----------
    stretch
        From 1.
    start, end
        Arc lengths [m] between which it lies.
    samples
        How many there are.
    tracking_rms, tracking_max, deviation_rms, deviation_max
        [m]; NaN where there is no sample.
    components
        Along and across the path.
    """

    stretch: int
    start: float
    end: float
    samples: int
    tracking_rms: float
    tracking_max: float
    deviation_rms: float
    deviation_max: float
    components: Components

    def to_document(self) -> dict[str, JsonValue]:
        """Give the stretch's entry in the JSON document."""
        return {
            "stretch": self.stretch,
            "start_m": self.start,
            "end_m": self.end,
            "samples": self.samples,
            "tracking_rms_m": self.tracking_rms,
            "tracking_max_m": self.tracking_max,
            "deviation_rms_m": self.deviation_rms,
            "deviation_max_m": self.deviation_max,
            **self.components.to_document(),
        }


def lap_sums(track: LapTrack, trajectory: Trajectory) -> StretchSums:
    """Sum up one lap by the stretches of the path."""
    return stretch_sums(
        track.time,
        track.arc,
        track.tip,
        track.target_tip,
        track.deviation,
        track.lag,
        trajectory.path,
        trajectory.path_arc,
        trajectory.corners,
    )


def over_laps(laps: Sequence[StretchSums]) -> StretchSums:
    """Join the sums of several laps, stretch by stretch."""
    return StretchSums(
        *(
            np.max(column, axis=0) if name.endswith("_max") else np.sum(column, axis=0)
            for name, column in zip(StretchSums._fields, zip(*laps, strict=True), strict=True)
        )
    )


def components(sums: StretchSums) -> Components:
    """Take the error apart over all stretches together."""
    joined = StretchSums(
        *(
            np.array([column.max() if name.endswith("_max") else column.sum()])
            for name, column in zip(StretchSums._fields, sums, strict=True)
        )
    )
    return _components(joined, 0)


def stretches(sums: StretchSums, corners: FloatArray) -> tuple[StretchErrors, ...]:
    """Errors of every stretch between two corners, arc lengths of shape (c,) [m]."""
    samples = np.where(sums.samples > 0, sums.samples, np.nan)
    none = np.isnan(samples)
    return tuple(
        StretchErrors(
            stretch=i + 1,
            start=float(corners[i]),
            end=float(corners[i + 1]),
            samples=int(sums.samples[i]),
            tracking_rms=float(np.sqrt(sums.tracking_square[i] / samples[i])),
            tracking_max=float("nan") if none[i] else float(sums.tracking_max[i]),
            deviation_rms=float(np.sqrt(sums.deviation_square[i] / samples[i])),
            deviation_max=float("nan") if none[i] else float(sums.deviation_max[i]),
            components=_components(sums, i),
        )
        for i in range(len(corners) - 1)
    )


def _components(sums: StretchSums, i: int) -> Components:
    samples = float(sums.samples[i]) or float("nan")
    speed_square = float(sums.speed_square[i]) or float("nan")
    known = samples / samples
    return Components(
        along_mean=float(sums.along[i]) / samples,
        along_rms=float(np.sqrt(sums.along_square[i] / samples)),
        across_rms=float(np.sqrt(sums.across_square[i] / samples)),
        across_max=float(sums.across_max[i]) * known,
        lag_mean=float(sums.lag[i]) / samples,
        lag_max=float(sums.lag_max[i]) * known,
        lag_time=float(sums.drift[i]) / speed_square,
    )
