"""Sums of harmonics over angles that need not be evenly spaced: exact, and fast by two matrix products.

The harmonic ``exp(i k a)`` of order k = s p + r is the product of ``exp(i s p a)`` and ``exp(i r a)``. With s near
the root of the number of orders, only about 2 s factors an angle are needed; a matrix product does the rest.
"""

from __future__ import annotations

import math
from collections.abc import Iterator

import numpy as np
import numpy.typing as npt

from armeval.arrays import FloatArray

ComplexArray = npt.NDArray[np.complex128]

_PRODUCT = 60_000
"""Multiplications in one matrix product: its factors stay in the processor's cache, and matrix libraries do not start
threads for it, whose waiting for each other takes ten times as long as the work where the processor is busy."""


def _powers(base: ComplexArray, count: int) -> ComplexArray:
    """Shape (k, count). Powers 0 to count - 1 of numbers of size 1, by running products: each adds one rounding."""
    powers = np.repeat(base[:, None], count, axis=1)
    powers[:, 0] = 1.0
    return np.multiply.accumulate(powers, axis=1)


def _blocks(angle: FloatArray, count: int) -> Iterator[tuple[slice, ComplexArray, ComplexArray]]:
    """Low and high factors of the harmonics below ``count``, some angles at a time.

    Yields the slice of the angles and factors of the shapes (k, s) and (k, p) with s p >= count.
    """
    low = math.isqrt(max(count - 1, 0)) + 1
    high = -(-count // low)
    rows = max(_PRODUCT // (low * high), 16)
    for start in range(0, angle.size, rows):
        part = slice(start, start + rows)
        yield part, _powers(np.exp(1j * angle[part]), low), _powers(np.exp(1j * low * angle[part]), high)


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
    for part, low, high in _blocks(angle, highest + 1):
        sums += ((high * weight[part, None]).T @ low).ravel()[: highest + 1]
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
    for part, low, high in _blocks(angle, doubled.size):
        padded = np.zeros(low.shape[1] * high.shape[1], dtype=np.complex128)
        padded[: doubled.size] = doubled
        value[part] = np.einsum("kl,kl->k", high @ padded.reshape(high.shape[1], low.shape[1]), low).real
    return value
