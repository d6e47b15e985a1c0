"""The samples of a joint log in SI, as they stand in the file."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np
import numpy.typing as npt

from armeval.arrays import FloatArray
from armeval.errors import Findings
from armeval.files.joint_logs.log_columns import LogColumns
from armeval.files.tables.row_faults import note_rows
from armeval.files.tables.table import Table


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


def read_samples(table: Table, columns: LogColumns) -> tuple[Samples, FloatArray | None]:
    """Read a joint log's samples, and the number of each one's lap where it was logged, shape (k,).

    Raises
    ------
    InputError
        If a number is missing, not finite or beyond reason.
    """
    optional = [columns.target, columns.torque, None if columns.lap is None else (columns.lap,)]
    groups = [(columns.time,), columns.angle, *(group for group in optional if group is not None)]
    time, angle, *more = table.read(groups)
    coming = iter(more)
    target, torque, lap = (None if group is None else next(coming) for group in optional)
    samples = Samples(time[:, 0], angle, target, torque, range(len(time)))
    return samples, None if lap is None else lap[:, 0]


def parted(samples: Samples, lap: FloatArray, table: Table, found: Findings) -> list[Samples]:
    """Part the samples by the number of their lap, shape (k,), in the order in which the laps begin.

    A lap of one sample, such as the first of a lap that was not driven any more, is left out with a warning.

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
        laps = [samples.at(slice(first, last)) for first, last in zip(starts.tolist(), ends, strict=True)]
    else:  # samples of one lap stand among those of another: late ones
        laps = [samples.at(np.flatnonzero(lap == number)) for number in dict.fromkeys(numbers.tolist())]
    for single in (each for each in laps if len(each.time) == 1):
        row = table.places([int(single.row[0])])[0]
        found.warning(f"the lap {lap[int(single.row[0])]:g} has one row: left out", "log whole laps", place=row)
    return [each for each in laps if len(each.time) > 1]
