"""A periodic function of an angle as a table for the kernels: value and slope at equal steps of one turn.

Between two nodes the function is the cubic that has the right value and slope at both (cubic Hermite interpolation), so
value and slope are continuous everywhere, and the error of the value falls with the fourth power of the step.
"""

from __future__ import annotations

import numpy as np

from armeval.arrays import FloatArray
from armeval.kernels.compile import jit, jit_part

_TURN = 2.0 * np.pi


def hermite_table(values: FloatArray) -> FloatArray:
    """Make the table of a function that is known at equal steps of one turn.

    The slopes are those of the trigonometric polynomial through the values.

    Parameters
    ----------
    values
        Shape (m,). The function at the angles ``2 pi k / m``.

    Returns
    -------
    Shape (m, 2). Values, and slopes per radian.
    """
    values = np.asarray(values, dtype=np.float64)
    m = values.shape[0]
    spectrum = np.fft.rfft(values) * 1j * np.arange(m // 2 + 1)
    if m % 2 == 0:
        spectrum[-1] = 0.0  # at the nodes, the highest harmonic of an even count stands on its crests
    return np.ascontiguousarray(np.column_stack([values, np.fft.irfft(spectrum, n=m)]))


@jit_part
def _cell(table: FloatArray, angle: float) -> tuple[float, float, float, float, float]:
    """Place within its cell (0 to 1), value at its start, rise over it, and both slopes per cell."""
    m = table.shape[0]
    place = angle * (m / _TURN)
    node = np.floor(place)
    i = int(node) % m
    j = i + 1 if i + 1 < m else 0
    step = _TURN / m
    return place - node, table[i, 0], table[j, 0] - table[i, 0], step * table[i, 1], step * table[j, 1]


@jit
def periodic_value(table: FloatArray, angle: float) -> float:
    """Value of the function at an angle [rad], any number of turns away; the table is that of :func:`hermite_table`."""
    t, y0, rise, d0, d1 = _cell(table, angle)
    value: float = y0 + t * (d0 + t * ((3.0 * rise - 2.0 * d0 - d1) + t * (d0 + d1 - 2.0 * rise)))
    return value


@jit
def periodic_slope(table: FloatArray, angle: float) -> float:
    """Slope of the function per radian at an angle [rad], any number of turns away."""
    t, _, rise, d0, d1 = _cell(table, angle)
    per_cell: float = d0 + t * (2.0 * (3.0 * rise - 2.0 * d0 - d1) + 3.0 * t * (d0 + d1 - 2.0 * rise))
    slope: float = per_cell * (table.shape[0] / _TURN)
    return slope


@jit
def periodic_values(table: FloatArray, angle: FloatArray) -> FloatArray:
    """Values at many angles, shape (k,) [rad]."""
    values = np.empty(angle.shape[0])
    for k in range(angle.shape[0]):
        values[k] = periodic_value(table, angle[k])
    return values


@jit
def periodic_slopes(table: FloatArray, angle: FloatArray) -> FloatArray:
    """Slopes per radian at many angles, shape (k,) [rad]."""
    slopes = np.empty(angle.shape[0])
    for k in range(angle.shape[0]):
        slopes[k] = periodic_slope(table, angle[k])
    return slopes
