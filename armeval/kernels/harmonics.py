"""Sums of harmonics over angles that need not be evenly spaced: exact, and fast by two matrix products.

The harmonic ``exp(i k a)`` of order k = s p + r is the product of ``exp(i s p a)`` and ``exp(i r a)``. With s near
the root of the number of orders, only 2 s exponentials an angle are needed; a matrix product does the rest.
"""

from __future__ import annotations

import math

import numpy as np
import numpy.typing as npt

from armeval.arrays import FloatArray

ComplexArray = npt.NDArray[np.complex128]


def _factors(angle: FloatArray, count: int) -> tuple[ComplexArray, ComplexArray]:
    """Low and high factors of the harmonics below ``count``: shapes (k, s) and (k, p) with s p >= count."""
    low = math.isqrt(max(count - 1, 0)) + 1
    high = -(-count // low)
    column = np.asarray(angle, dtype=np.float64)[:, None]
    return np.exp(1j * column * np.arange(low)), np.exp(1j * column * (low * np.arange(high)))


def harmonic_sums(angle: FloatArray, weight: FloatArray, highest: int) -> ComplexArray:
    """Sum ``weight * exp(-i k angle)`` over all angles, for each order.

    Parameters
    ----------
    angle, weight
        Shape (k,) [rad], [any].
    highest
        The largest order wanted.

    Returns
    -------
    ComplexArray
        Shape (highest + 1,), orders 0 to ``highest``.
    """
    low, high = _factors(angle, highest + 1)
    sums = (high * np.asarray(weight, dtype=np.float64)[:, None]).T @ low
    return np.conj(sums.ravel()[: highest + 1])


def harmonic_series(angle: FloatArray, coefficients: ComplexArray) -> FloatArray:
    """Evaluate the real periodic function with coefficients c_k: c_0 + sum over k > 0 of 2 Re(c_k exp(i k angle)).

    Parameters
    ----------
    angle
        Shape (k,) [rad].
    coefficients
        Shape (n,), orders 0 to n - 1.

    Returns
    -------
    FloatArray
        Shape (k,).
    """
    if coefficients.size == 0:
        return np.zeros(np.shape(angle))
    low, high = _factors(angle, coefficients.size)
    padded = np.zeros(low.shape[1] * high.shape[1], dtype=np.complex128)
    padded[: coefficients.size] = 2.0 * coefficients
    padded[0] *= 0.5
    partial = high @ padded.reshape(high.shape[1], low.shape[1])
    return np.asarray(np.einsum("kl,kl->k", partial, low).real)
