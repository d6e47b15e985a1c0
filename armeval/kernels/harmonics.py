"""Sums of harmonics over angles that need not be evenly spaced: exact, and fast by two matrix products.

The harmonic ``exp(i k a)`` of order k = s p + r is the product of ``exp(i s p a)`` and ``exp(i r a)``. With s near
the root of the number of orders, only about 2 s factors an angle are needed; a matrix product does the rest.
"""

from __future__ import annotations

import math

import numpy as np
import numpy.typing as npt

from armeval.arrays import FloatArray

ComplexArray = npt.NDArray[np.complex128]

_BLOCK = 32768
"""So many angles at a time keep the factors of a few thousand orders below 100 MB."""


def _powers(base: ComplexArray, count: int) -> ComplexArray:
    """Shape (k, count). Powers 0 to count - 1 of numbers of size 1, by running products: each adds one rounding."""
    powers = np.repeat(base[:, None], count, axis=1)
    powers[:, 0] = 1.0
    return np.multiply.accumulate(powers, axis=1)


def _factors(angle: FloatArray, count: int) -> tuple[ComplexArray, ComplexArray]:
    """Low and high factors of the harmonics below ``count``: shapes (k, s) and (k, p) with s p >= count."""
    low = math.isqrt(max(count - 1, 0)) + 1
    return _powers(np.exp(1j * angle), low), _powers(np.exp(1j * low * angle), -(-count // low))


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
    sums = np.zeros(highest + 1, dtype=np.complex128)
    for start in range(0, angle.size, _BLOCK):
        low, high = _factors(angle[start : start + _BLOCK], highest + 1)
        product = (high * weight[start : start + _BLOCK, None]).T @ low
        sums += product.ravel()[: highest + 1]
    return np.conj(sums)


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
    doubled = 2.0 * coefficients
    doubled[:1] *= 0.5
    value = np.zeros(angle.size)
    for start in range(0, angle.size, _BLOCK):
        low, high = _factors(angle[start : start + _BLOCK], doubled.size)
        padded = np.zeros(low.shape[1] * high.shape[1], dtype=np.complex128)
        padded[: doubled.size] = doubled
        partial = high @ padded.reshape(high.shape[1], low.shape[1])
        value[start : start + _BLOCK] = np.einsum("kl,kl->k", partial, low).real
    return value
