"""Error as a function of where on the path it happens: the same bins of arc length for every lap and run."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from armeval.arrays import FloatArray
from armeval.evaluate.lap_track import LapTrack


@dataclass(frozen=True, eq=False)
class ErrorAlongPath:
    """RMS tracking error in bins of arc length.

    Attributes
    ----------
    arc
        Shape (b,) [m]. Middles of the bins.
    laps
        Shape (laps, b) [m]. RMS of the tracking error of each lap in each bin; NaN where a lap has no sample.
    """

    arc: FloatArray
    laps: FloatArray

    @property
    def rms(self) -> FloatArray:
        """Shape (b,) [m]. RMS over the laps."""
        covered = np.isfinite(self.laps)
        squares = np.where(covered, self.laps, 0.0) ** 2
        count = covered.sum(axis=0)
        return np.asarray(np.sqrt(squares.sum(axis=0) / np.where(count > 0, count, np.nan)))

    @property
    def low(self) -> FloatArray:
        """Shape (b,) [m]. The best lap."""
        return np.asarray(np.fmin.reduce(self.laps, axis=0))

    @property
    def high(self) -> FloatArray:
        """Shape (b,) [m]. The worst lap."""
        return np.asarray(np.fmax.reduce(self.laps, axis=0))


def error_along_path(tracks: Sequence[LapTrack], length: float, *, bins: int = 400) -> ErrorAlongPath:
    """Sort the tracking error of some laps into bins of arc length.

    Parameters
    ----------
    tracks
        Laps over the same path, at least one.
    length
        Length of the path [m].
    bins
        Number of bins over the whole path.
    """
    edges = np.linspace(0.0, length, bins + 1)
    rows = []
    for track in tracks:
        at = np.clip((track.arc / length * bins).astype(np.int64), 0, bins - 1)
        squares = np.bincount(at, weights=track.tracking**2, minlength=bins)
        count = np.bincount(at, minlength=bins)
        rows.append(np.sqrt(squares / np.where(count > 0, count, np.nan)))
    return ErrorAlongPath(arc=0.5 * (edges[1:] + edges[:-1]), laps=np.array(rows))
