"""The samples of a joint log in SI, as they stand in the file."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np
import numpy.typing as npt

from armeval.arrays import FloatArray
from armeval.errors import Findings
from armeval.files.log_columns import LogColumns, Signal
from armeval.files.row_faults import note_rows, refuse_huge
from armeval.files.table import Table


@dataclass(frozen=True, eq=False)
class Samples:
    """Samples of one lap, in whatever order.

    Attributes
    ----------
    time
        Shape (k,) [s].
    angle, target, torque
        Shape (k, n) in SI at the joints; None where not logged.
    row
        Where each stands in the table: a range, or shape (k,).
    """

    time: FloatArray
    angle: FloatArray
    target: FloatArray | None
    torque: FloatArray | None
    row: Sequence[int] | npt.NDArray[np.intp]

    def at(self, chosen: slice | npt.NDArray[np.intp]) -> Samples:
        """Give some of the samples; without a copy where they are a slice."""
        row = self.row[chosen] if isinstance(chosen, slice) else np.asarray(self.row)[chosen]
        target = None if self.target is None else self.target[chosen]
        torque = None if self.torque is None else self.torque[chosen]
        return replace(self, time=self.time[chosen], angle=self.angle[chosen], target=target, torque=torque, row=row)


def read_samples(table: Table, columns: LogColumns, found: Findings) -> tuple[Samples, FloatArray | None]:
    """Read a joint log's samples, and the number of each one's lap where it was logged, shape (k,).

    The columns are freed one by one while they are copied, so that hardly more memory is used than the samples take.

    Raises
    ------
    InputError
        If a number is missing, not finite or beyond reason.
    """
    signals = [columns.time, *columns.angle, *(columns.target or ()), *(columns.torque or ())]
    places = [signal.place for signal in (*signals, *(() if columns.lap is None else (columns.lap,)))]
    pieces = dict(zip(places, table.numbers(places), strict=True))

    def in_si(group: Sequence[Signal]) -> FloatArray:
        values = np.empty((sum(map(len, pieces[group[0].place])), len(group)))
        for index, signal in enumerate(group):
            start = 0
            for piece in pieces.pop(signal.place):
                with np.errstate(over="ignore"):
                    np.multiply(piece, signal.factor, out=values[start : start + len(piece), index])
                start += len(piece)
            refuse_huge(values[:, index], table.columns[signal.place], table, found)
        return values

    lap = None if columns.lap is None else in_si((columns.lap,))[:, 0]
    samples = Samples(
        time=in_si((columns.time,))[:, 0],
        angle=in_si(columns.angle),
        target=None if columns.target is None else in_si(columns.target),
        torque=None if columns.torque is None else in_si(columns.torque),
        row=range(0),
    )
    found.raise_errors()
    return replace(samples, row=range(len(samples.time))), lap


def parted(samples: Samples, lap: FloatArray, table: Table, found: Findings) -> list[Samples]:
    """Part the samples by the number of their lap, shape (k,), in the order in which the laps begin.

    Raises
    ------
    InputError
        If the number of a lap is not whole.
    """
    broken = np.flatnonzero(lap != np.rint(lap))
    mend = "number laps in whole numbers"
    note_rows(
        broken, table, found, lambda index: (f"the lap is {lap[broken[index]]:g}", mend), rest="rows with such a lap"
    )
    found.raise_errors()
    starts = np.flatnonzero(np.diff(lap, prepend=np.nan) != 0.0)
    ends = [*starts[1:].tolist(), len(lap)]
    numbers = lap[starts]
    if len(np.unique(numbers)) == len(numbers):
        return [samples.at(slice(first, last)) for first, last in zip(starts.tolist(), ends, strict=True)]
    # Samples of one lap stand among those of another: late ones.
    return [samples.at(np.flatnonzero(lap == number)) for number in dict.fromkeys(numbers.tolist())]
