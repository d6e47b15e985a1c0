"""Faults that many rows may share: the first ones told one by one, the others as a number."""

from __future__ import annotations

from collections.abc import Callable, Sequence

import numpy as np
import numpy.typing as npt

from armeval.arrays import FloatArray
from armeval.errors import Findings, InputError
from armeval.files.tables.scaled import LARGEST, Scaled
from armeval.files.tables.table import Table
from armeval.units import time_text

_LISTED = 20


def note_rows(
    samples: Sequence[int] | npt.NDArray[np.intp],
    table: Table,
    found: Findings,
    tell: Callable[[int], tuple[str, str]],
    *,
    rest: str,
    column: str = "",
) -> None:
    """Note an error for each of the samples, up to a limit, and how many more there are.

    Parameters
    ----------
    samples
        Where they stand in the table, counted from 0.
    table
        Knows their rows.
    found
        Gathers the errors.
    tell
        Gives what is wrong and how to mend it for the i-th of the samples.
    rest
        What the others have in common: ``rows where time does not rise``.
    column
        Named beside the row, if given.
    """
    rows = table.places([int(sample) for sample in samples[:_LISTED]])
    for index, row in enumerate(rows):
        what, mend = tell(index)
        found.error(what, mend, place=f"{row}, column `{column}`" if column else row)
    if len(samples) > _LISTED:
        found.error(f"and {len(samples) - _LISTED:,} more {rest}", "mend them likewise")


def refuse_time_that_does_not_rise(
    time: FloatArray,
    later: npt.NDArray[np.intp],
    rows: Sequence[int] | npt.NDArray[np.intp],
    mend: str,
    table: Table,
    found: Findings,
) -> None:
    """Note an error for samples whose time is not later than that of the sample before.

    Parameters
    ----------
    time
        Shape (k,) [s].
    later
        The samples whose time does not rise, from 1.
    rows
        Shape (k,). Where each sample stands in the table.
    mend
        How to mend a time that runs back.
    table, found
        Knows the rows; gathers the errors.
    """

    def tell(index: int) -> tuple[str, str]:
        back = float(time[later[index] - 1] - time[later[index]])
        if back == 0.0:
            return "time stands still", "every row needs its own time: write it with enough digits"
        return f"time runs back by {time_text(back)}", mend

    note_rows([int(rows[int(i)]) for i in later], table, found, tell, rest="rows where time does not rise")


def no_numbers(
    columns: Sequence[FloatArray], groups: Sequence[Sequence[Scaled]], table: Table, first: int = 0
) -> InputError:
    """Make an error of every row that holds no finite number of a size that can be.

    Parameters
    ----------
    columns
        Shape (k,) each, in the units of the table, those of the first group first.
    groups
        The columns that belong together, with their factors.
    table
        Where they come from.
    first
        Sample of the table that the columns begin with.
    """
    found = Findings(table.source)
    for numbers, column in zip(columns, (column for group in groups for column in group), strict=True):
        with np.errstate(invalid="ignore", over="ignore"):
            faulty = ~(np.abs(numbers * column.factor) <= LARGEST)
        note_rows(
            np.flatnonzero(faulty) + first,
            table,
            found,
            lambda _: ("there is no finite number of a size that can be", "give a number, or remove the row"),
            rest="rows of the kind",
            column=table.columns[column.place].text,
        )
    return InputError.of(found.found)
