"""Do two cog maps say the same? The same motor measured twice, or two motors of one make."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np

from armeval.arrays import FloatArray
from armeval.evaluate.cogging.cog_orders import significant_coefficients
from armeval.evaluate.document import JsonValue
from armeval.kernels.harmonics import ComplexArray, harmonic_series
from armeval.model.cogmap import CogMap


@dataclass(frozen=True)
class MapAgreement:
    """How well a second map agrees with a first once its angles are shifted as well as can be.

    Attributes
    ----------
    joint
        The joint that the first map belongs to; empty where that is not known.
    shift
        Motor angle [rad] in (-pi, pi] by which the second map lies ahead: second(angle + shift) is about first(angle).
    ambiguous
        Whether other shifts fit as well within the noise: motors without tolerance orders repeat themselves. The
        smallest is given.
    correlation
        Between the first map and the shifted second, 1 where they are alike but for their size.
    scale
        Factor on the first map that fits the shifted second best.
    residual_rms
        RMS of their difference after the shift [N m].
    residual_share
        The same over the RMS of the first map.
    noise_rms
        What the noise of both maps alone would leave [N m].
    friction_difference
        Friction of the second less that of the first [N m]; None where either is not known.
    """

    joint: str
    shift: float
    ambiguous: bool
    correlation: float
    scale: float
    residual_rms: float
    residual_share: float
    noise_rms: float
    friction_difference: float | None

    def to_document(self) -> dict[str, JsonValue]:
        """Give the entry in the JSON document."""
        return {
            "joint": self.joint,
            "shift_rad": self.shift,
            "shift_ambiguous": self.ambiguous,
            "correlation": self.correlation,
            "scale": self.scale,
            "residual_rms_Nm": self.residual_rms,
            "residual_share": self.residual_share,
            "noise_rms_Nm": self.noise_rms,
            "friction_difference_Nm": self.friction_difference,
        }


def agreement(first: CogMap, second: CogMap, *, joint: str = "") -> MapAgreement:
    """Compare two cog maps.

    The shift is sought on the orders that stand out of the noise in both maps, as the highest peak of their circular
    correlation; the differences are taken over all orders that both maps hold.

    Parameters
    ----------
    first, second
        The maps; they may differ in their number of entries.
    joint
        The joint, to tell it by.
    """
    orders = min(first.bandwidth, second.bandwidth) + 1
    a, b = first.spectrum[:orders], second.spectrum[:orders]
    a[0] = b[0] = 0.0
    cross = np.conj(significant_coefficients(first)[:orders]) * significant_coefficients(second)[:orders]
    power_a, power_b = 2.0 * float(np.sum(np.abs(a) ** 2)), 2.0 * float(np.sum(np.abs(b) ** 2))
    noise = math.hypot(first.noise, second.noise)
    shift, ambiguous = _best_shift(cross, noise_power=noise**2 / (2.0 * max(orders - 1, 1)))
    turned = b * np.exp(1j * np.arange(orders) * shift)
    common = 2.0 * float(np.sum((np.conj(a) * turned).real))
    residual = math.sqrt(2.0 * float(np.sum(np.abs(turned - a) ** 2)))
    difference = None
    if first.friction is not None and second.friction is not None:
        difference = second.friction - first.friction
    return MapAgreement(
        joint=joint,
        shift=shift,
        ambiguous=ambiguous,
        correlation=common / math.sqrt(power_a * power_b) if power_a > 0.0 and power_b > 0.0 else 0.0,
        scale=common / power_a if power_a > 0.0 else 0.0,
        residual_rms=residual,
        residual_share=residual / math.sqrt(power_a) if power_a > 0.0 else 0.0,
        noise_rms=noise,
        friction_difference=difference,
    )


def _best_shift(cross: ComplexArray, noise_power: float) -> tuple[float, bool]:
    """Find the shift of largest correlation, the smallest among those that noise cannot tell apart.

    ``cross`` holds conj(a_k) b_k, and the correlation at the shift d is the sum of 2 Re(cross_k exp(i k d)). Its peaks
    are taken from a row of 16 points a period of the highest order, and sharpened by Newton's method on its slope.
    """
    present = np.flatnonzero(cross)
    if present.size == 0:
        return 0.0, True
    points = 16 * int(present[-1]) + 16
    step = 2.0 * np.pi / points
    row: FloatArray = np.asarray(step * (np.arange(points) - points // 2), dtype=np.float64)
    value = harmonic_series(row, cross)
    peak = np.flatnonzero((value >= np.roll(value, 1)) & (value > np.roll(value, -1)))
    order = np.arange(cross.size)
    angle: FloatArray = row[peak]
    for _ in range(6):
        slope = harmonic_series(angle, 1j * order * cross)
        curvature = harmonic_series(angle, -(order**2) * cross)
        change = np.divide(-slope, curvature, out=np.zeros_like(angle), where=curvature < 0.0)
        angle = np.asarray(np.clip(angle + change, row[peak] - step, row[peak] + step), dtype=np.float64)
    value = harmonic_series(angle, cross)
    best = float(value.max())
    # noise of mean power p in either map moves the sum by about 2 sqrt(sum |c|^2 p); |c|^2 is about |cross|
    margin = 3.0 * 2.0 * math.sqrt(float(np.sum(np.abs(cross))) * noise_power) + 1e-9 * best
    alike = np.flatnonzero(value >= best - margin)
    chosen = alike[np.argmin(np.abs(angle[alike]))]
    return float(angle[chosen]), alike.size > 1
