"""Columns of numbers to rows in SI, and what no number of an arm can be."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from armeval.arrays import FloatArray

#: No time, angle, torque or length [SI] of an arm is larger; what is, is a fault of the logger or of a unit.
LARGEST = 1e12


@dataclass(frozen=True)
class Scaled:
    """One column and what turns its numbers into SI.

    Attributes
    ----------
    place
        The column's place in the table.
    factor
        SI units per unit of the column.
    """

    place: int
    factor: float = 1.0


def scaled_rows(columns: Sequence[FloatArray], groups: Sequence[Sequence[Scaled]]) -> list[FloatArray] | None:
    """Put columns side by side, group by group, in SI.

    Parameters
    ----------
    columns
        Shape (k,) each, those of the first group first.
    groups
        The columns that belong together, with their factors.

    Returns
    -------
    list of array, or None
        Shape (k, columns of the group) for each group; None if any number is not finite, or beyond ``LARGEST``.
    """
    rows = []
    coming = iter(columns)
    with np.errstate(over="ignore", invalid="ignore"):
        for group in groups:
            values = np.empty((len(columns[0]), len(group)))
            for index, (column, numbers) in enumerate(zip(group, coming, strict=False)):
                np.multiply(numbers, column.factor, out=values[:, index])
            if values.size and not (values.min() >= -LARGEST and values.max() <= LARGEST):  # false for NaN, too
                return None
            rows.append(values)
    return rows
