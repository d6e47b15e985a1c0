"""The figures that sum up a row of error samples."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from armeval.arrays import FloatArray
from armeval.errors import InputError
from armeval.evaluate.document import JsonValue
from armeval.evaluate.intervals import rms_interval


@dataclass(frozen=True)
class ErrorSummary:
    """RMS with its 95 % interval, mean, median, 95th percentile, maximum [m] and samples used."""

    rms: float
    rms_low: float
    rms_high: float
    mean: float
    median: float
    p95: float
    max: float
    samples: int

    def to_document(self) -> dict[str, JsonValue]:
        """Give the entry in the JSON document."""
        return {
            "rms_m": self.rms,
            "rms_low_m": self.rms_low,
            "rms_high_m": self.rms_high,
            "mean_m": self.mean,
            "median_m": self.median,
            "p95_m": self.p95,
            "max_m": self.max,
            "samples": self.samples,
        }


def summarise(laps: Sequence[FloatArray]) -> ErrorSummary:
    """Sum up error norms.

    Parameters
    ----------
    laps
        One array of error norms [m] a lap, each of shape (k,); at least one sample in all.

    Raises
    ------
    InputError
        If there is no sample.
    """
    pooled = np.concatenate([np.asarray(lap, dtype=np.float64) for lap in laps]) if laps else np.empty(0)
    if pooled.size == 0:
        raise InputError("there is no sample to sum up", "log at least one whole lap")
    low, high = rms_interval(laps)
    return ErrorSummary(
        rms=float(np.sqrt(np.mean(pooled**2))),
        rms_low=low,
        rms_high=high,
        mean=float(np.mean(pooled)),
        median=float(np.median(pooled)),
        p95=float(np.percentile(pooled, 95.0)),
        max=float(np.max(pooled)),
        samples=int(pooled.size),
    )
