"""The ripple's spectrum, per metre of path and in hertz at the hand's speed, each peak with its joint and order."""

from __future__ import annotations

import itertools
from dataclasses import dataclass
from typing import Literal

import numpy as np

from armeval.arrays import FloatArray
from armeval.evaluate.document import JsonValue
from armeval.evaluate.feeling.hand_force import HandForce
from armeval.evaluate.feeling.ripple import Ripple

Axis = Literal["per_metre", "hertz"]

_SEGMENTS = 4
"""The path is cut into so many stretches, which overlap by half; their spectra are averaged (P. D. Welch 1967)."""
_MOST_SAMPLES = 1 << 17
_MOST_PEAKS = 8
_PROMINENCE = 4.0
"""A peak stands out by this factor in power (6 dB) over the dips beside it."""
_LEAST_PERIODS = 2
"""A peak must come so often in a stretch; what comes less often is how the arm's pose changes along the path."""
_LEAST_PEAK = 1e-3
"""Peaks below this share of the largest are not worth telling."""


@dataclass(frozen=True)
class SpectralPeak:
    """A peak: where on the axis, the RMS force of its band [N], and the joint and order that give most of it.

    ``share`` is how much of the power at the peak that line has by itself.
    """

    at: float
    rms: float
    joint: str
    order: int
    share: float


@dataclass(frozen=True, eq=False)
class RippleSpectrum:
    """One-sided power spectral density of the ripple, all three components of the force together.

    Attributes
    ----------
    axis
        ``per_metre``: cycles a metre; ``hertz``: cycles a second.
    frequency
        Shape (f,) [1/m or Hz].
    density
        Shape (f,) [N^2 m or N^2/Hz].
    peaks
        Largest RMS first.
    """

    axis: Axis
    frequency: FloatArray
    density: FloatArray
    peaks: tuple[SpectralPeak, ...]

    def to_document(self) -> list[dict[str, JsonValue]]:
        """Give the peaks' entries in the JSON document."""
        unit = "per_m" if self.axis == "per_metre" else "Hz"
        return [
            {f"at_{unit}": p.at, "rms_N": p.rms, "joint": p.joint, "order": p.order, "share": p.share}
            for p in self.peaks
        ]


def ripple_spectrum(force: HandForce, found: Ripple, axis: Axis) -> RippleSpectrum | None:
    """Work out the spectrum of the ripple; None where the hand does not move or too little of the path is left.

    Parameters
    ----------
    force, found
        The force, and its ripple with the lines to name peaks by.
    axis
        Over way or over time.
    """
    motion = force.motion
    if motion.is_still or force.directions.singular.any():
        return None
    if axis == "per_metre":
        rising = np.concatenate([[True], np.diff(np.maximum.accumulate(motion.arc)) > 0.0])
        count = int(min(max(len(motion.arc), 256), _MOST_SAMPLES))
        even = np.linspace(motion.arc[0], motion.arc[-1], count)
        step = even[1] - even[0]

        def sampled(vector: FloatArray) -> FloatArray:
            return np.column_stack([np.interp(even, motion.arc[rising], column[rising]) for column in vector.T])
    else:
        step, count = motion.period, len(motion.time)

        def sampled(vector: FloatArray) -> FloatArray:
            return vector

    if count < 64 or step <= 0.0:
        return None
    frequency, density = _density(sampled(force.part("cogging")), step)
    own = [_density(sampled(line.force), step)[1] for line in found.lines]
    return RippleSpectrum(axis, frequency, density, _peaks(frequency, density, found, own))


def _density(vector: FloatArray, step: float) -> tuple[FloatArray, FloatArray]:
    from scipy.signal import welch

    length = max(64, 2 * len(vector) // (_SEGMENTS + 1))
    frequency, density = welch(vector, fs=1.0 / step, nperseg=min(length, len(vector)), axis=0)
    return np.asarray(frequency), np.asarray(density.sum(axis=1))


def _peaks(
    frequency: FloatArray, density: FloatArray, found: Ripple, own: list[FloatArray]
) -> tuple[SpectralPeak, ...]:
    from scipy.signal import find_peaks

    if not own or density.max() == 0.0:
        return ()
    level = np.log(np.maximum(density, 1e-12 * density.max()))
    index, _ = find_peaks(level, prominence=np.log(_PROMINENCE), height=level.max() + np.log(_LEAST_PEAK))
    index = index[index >= _LEAST_PERIODS]
    width = frequency[1] - frequency[0]
    dips = [0, *(int(a + np.argmin(density[a:b])) for a, b in itertools.pairwise(index)), len(density)]
    peaks = []
    for number, at in enumerate(index):
        strongest = int(np.argmax([line[at] for line in own]))
        line = found.lines[strongest]
        band = density[dips[number] : dips[number + 1]]
        share = float(own[strongest][at] / density[at])
        rms = float(np.sqrt(band.sum() * width))
        peaks.append(SpectralPeak(float(frequency[at]), rms, line.joint, line.order, share))
    return tuple(sorted(peaks, key=lambda peak: -peak.rms)[:_MOST_PEAKS])
