"""An array that grows row by row without ever being in memory twice."""

from __future__ import annotations

import numpy as np

from armeval.arrays import FloatArray

_FIRST_ROWS = 1 << 16


class GrowingArray:
    """Rows of numbers, appended block by block.

    The array is enlarged in place: what is reserved and not yet filled takes no memory.

    Parameters
    ----------
    width
        Numbers in a row, n.
    """

    def __init__(self, width: int) -> None:
        self._values = np.empty((_FIRST_ROWS, width))
        self._filled = 0

    def append(self, rows: FloatArray) -> None:
        """Append rows, shape (some, n)."""
        needed = self._filled + len(rows)
        if needed > len(self._values):
            # No view of the array exists before `finished` gives it away.
            self._values.resize((max(needed, 3 * len(self._values) // 2), self._values.shape[1]), refcheck=False)
        self._values[self._filled : needed] = rows
        self._filled = needed

    def finished(self) -> FloatArray:
        """Give the rows, shape (k, n); nothing can be appended after."""
        self._values.resize((self._filled, self._values.shape[1]), refcheck=False)
        return self._values
