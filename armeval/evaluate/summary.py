"""The figures that sum up a row of error samples."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from armeval.arrays import FloatArray
from armeval.errors import InputError
from armeval.evaluate.document import JsonValue
from armeval.evaluate.measuring.intervals import rms_bootstrap
from armeval.kernels.moments import moments


@dataclass(frozen=True)
class ErrorSummary:
    """RMS with its 95 % interval, mean, median, 95th percentile, maximum [m] and samples used.

    ``effective_samples`` is how many independent samples would tell the RMS as surely (see
    :mod:`armeval.evaluate.measuring.intervals`); NaN where it was not asked for.
    """

    rms: float
    rms_low: float
    rms_high: float
    mean: float
    median: float
    p95: float
    max: float
    samples: int
    effective_samples: float = float("nan")

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
            "effective_samples": self.effective_samples,
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
    filled = [np.ascontiguousarray(lap, dtype=np.float64) for lap in laps if len(lap)]
    if not filled:
        raise InputError("there is no sample to sum up", "log at least one whole lap")
    interval = rms_bootstrap(filled)
    totals, squares, largest = zip(*(moments(lap) for lap in filled), strict=True)
    samples = sum(len(lap) for lap in filled)
    median, p95 = np.quantile(np.concatenate(filled), [0.5, 0.95], overwrite_input=True)
    return ErrorSummary(
        rms=float(np.sqrt(sum(squares) / samples)),
        rms_low=interval.low,
        rms_high=interval.high,
        mean=sum(totals) / samples,
        median=float(median),
        p95=float(p95),
        max=max(largest),
        samples=samples,
        effective_samples=interval.effective_samples,
    )
