"""Forces at the tip that bounded joint torques hold: the polytope |J_i . F| <= b_i, and sums of bounded joint steps."""

from __future__ import annotations

import numpy as np

from armeval.arrays import FloatArray
from armeval.kernels.compile import jit

_SLACK = 1e-9
"""Share of a bound by which rounding may miss it."""


@jit
def held_forces(levers: FloatArray, bound: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Smallest and largest distance from zero to the edge of the polytope of forces that bounded torques hold.

    Along the unit vector u the edge is at the smallest b_i / |J_i . u|, so the smallest of all directions is
    b_i / |J_i| along some J_i. The largest is a corner: m bounds met at once and no other passed.

    Parameters
    ----------
    levers
        Shape (k, n, m). Joint torque of unit forces along the m directions that the joints reach, J_u^T.
    bound
        Shape (k, n). Largest torque of each joint; 0 and infinity too.

    Returns
    -------
    least, most
        Shape (k,); infinite where nothing bounds the force.
    """
    k, n, m = levers.shape
    least, most = np.empty(k), np.empty(k)
    size = np.empty(n)
    for s in range(k):
        A, b = levers[s], bound[s]
        least[s] = np.inf
        for i in range(n):
            square = 0.0
            for r in range(m):
                square += A[i, r] * A[i, r]
            size[i] = np.sqrt(square)
            if size[i] > 0.0:
                least[s] = min(least[s], b[i] / size[i])
        if m == 1:
            most[s] = least[s]
        elif m == 2:
            most[s] = _farthest_in_plane(A, b, size)
        else:
            most[s] = _farthest_in_space(A, b, size)
    return least, most


@jit
def _farthest_in_plane(A: FloatArray, b: FloatArray, size: FloatArray) -> float:
    n = A.shape[0]
    farthest = -1.0
    for i in range(n):
        for j in range(i + 1, n):
            det = A[i, 0] * A[j, 1] - A[i, 1] * A[j, 0]
            if abs(det) <= _SLACK * size[i] * size[j] or not (np.isfinite(b[i]) and np.isfinite(b[j])):
                continue
            for sign in (-1.0, 1.0):
                x = (b[i] * A[j, 1] - sign * b[j] * A[i, 1]) / det
                y = (sign * b[j] * A[i, 0] - b[i] * A[j, 0]) / det
                held = True
                for o in range(n):
                    held = held and abs(A[o, 0] * x + A[o, 1] * y) <= b[o] + _SLACK * (b[i] + b[j])
                if held:
                    farthest = max(farthest, np.sqrt(x * x + y * y))
    return farthest if farthest >= 0.0 else np.inf


@jit
def _farthest_in_space(A: FloatArray, b: FloatArray, size: FloatArray) -> float:
    n = A.shape[0]
    farthest = -1.0
    for i in range(n):
        for j in range(i + 1, n):
            cx = A[i, 1] * A[j, 2] - A[i, 2] * A[j, 1]
            cy = A[i, 2] * A[j, 0] - A[i, 0] * A[j, 2]
            cz = A[i, 0] * A[j, 1] - A[i, 1] * A[j, 0]
            for h in range(j + 1, n):
                det = cx * A[h, 0] + cy * A[h, 1] + cz * A[h, 2]
                if abs(det) <= _SLACK * size[i] * size[j] * size[h]:
                    continue
                if not (np.isfinite(b[i]) and np.isfinite(b[j]) and np.isfinite(b[h])):
                    continue
                for second in (-1.0, 1.0):
                    for third in (-1.0, 1.0):
                        p, q, r = b[i], second * b[j], third * b[h]
                        # F = (p J_j x J_h + q J_h x J_i + r J_i x J_j) / det
                        x = r * cx + p * (A[j, 1] * A[h, 2] - A[j, 2] * A[h, 1])
                        x = (x + q * (A[h, 1] * A[i, 2] - A[h, 2] * A[i, 1])) / det
                        y = r * cy + p * (A[j, 2] * A[h, 0] - A[j, 0] * A[h, 2])
                        y = (y + q * (A[h, 2] * A[i, 0] - A[h, 0] * A[i, 2])) / det
                        z = r * cz + p * (A[j, 0] * A[h, 1] - A[j, 1] * A[h, 0])
                        z = (z + q * (A[h, 0] * A[i, 1] - A[h, 1] * A[i, 0])) / det
                        slack = _SLACK * (b[i] + b[j] + b[h])
                        held = True
                        for o in range(n):
                            held = held and abs(A[o, 0] * x + A[o, 1] * y + A[o, 2] * z) <= b[o] + slack
                        if held:
                            farthest = max(farthest, np.sqrt(x * x + y * y + z * z))
    return farthest if farthest >= 0.0 else np.inf


@jit
def largest_steps(jacobian: FloatArray, step: FloatArray) -> FloatArray:
    """Farthest that the tip moves if every joint may move one step either way.

    Parameters
    ----------
    jacobian
        Shape (k, 3, n) [m/rad].
    step
        Shape (n,) [rad].

    Returns
    -------
    Shape (k,) [m].
    """
    k, _, n = jacobian.shape
    farthest = np.zeros(k)
    for s in range(k):
        for signs in range(1 << (n - 1)):
            x, y, z = 0.0, 0.0, 0.0
            for i in range(n):
                way = step[i] if (signs >> i) & 1 == 0 else -step[i]
                x += jacobian[s, 0, i] * way
                y += jacobian[s, 1, i] * way
                z += jacobian[s, 2, i] * way
            farthest[s] = max(farthest[s], np.sqrt(x * x + y * y + z * z))
    return farthest
