"""Small symmetric positive definite systems, solved in place without allocating."""

from __future__ import annotations

import numpy as np

from armeval.arrays import FloatArray
from armeval.kernels.compile import jit


@jit
def factor_in_place(A: FloatArray) -> bool:
    """Turn the lower triangle of a matrix into its Cholesky factor; False where it is not positive definite."""
    n = A.shape[0]
    for j in range(n):
        pivot = A[j, j]
        for k in range(j):
            pivot -= A[j, k] * A[j, k]
        if not pivot > 0.0:
            return False
        root = np.sqrt(pivot)
        A[j, j] = root
        for i in range(j + 1, n):
            entry = A[i, j]
            for k in range(j):
                entry -= A[i, k] * A[j, k]
            A[i, j] = entry / root
    return True


@jit
def solve_in_place(A: FloatArray, b: FloatArray) -> None:
    """Turn b into the solution, with the factor of :func:`factor_in_place`."""
    n = A.shape[0]
    for i in range(n):
        for k in range(i):
            b[i] -= A[i, k] * b[k]
        b[i] /= A[i, i]
    for i in range(n - 1, -1, -1):
        for k in range(i + 1, n):
            b[i] -= A[k, i] * b[k]
        b[i] /= A[i, i]
