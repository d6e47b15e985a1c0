"""The thorough reader of a text table: slower, and it names the row and column of everything that is wrong."""

from __future__ import annotations

import csv
import math
from array import array
from collections.abc import Sequence
from dataclasses import dataclass, field
from itertools import islice

import numpy as np

from armeval.arrays import FloatArray
from armeval.errors import Finding, InputError
from armeval.files.dialect import NUMBER, Dialect, cells_of, decoded, is_comment
from armeval.files.lines import Stream, lines
from armeval.files.scaled import LARGEST, Scaled

_LISTED = 20
_NO_NUMBERS = {"nan", "inf", "infinity", "-nan", "-inf", "-infinity", "+nan", "+inf", "+infinity"}


@dataclass
class FaultyRows:
    """Gathers the faults of a table's rows: the first ones in full, the others as a number of rows.

    Attributes
    ----------
    listed
        The findings.
    more
        Rows that are faulty beyond those listed.
    """

    listed: list[Finding] = field(default_factory=list)
    more: int = 0

    def add(self, what: str, mend: str, place: str) -> bool:
        """Note a fault; tell whether it was listed."""
        if len(self.listed) >= _LISTED:
            return False
        self.listed.append(Finding("error", what, mend, place=place))
        return True

    def error(self) -> InputError:
        """Make one error of all."""
        told = list(self.listed)
        if self.more:
            rows = "row" if self.more == 1 else "rows"
            told.append(Finding("error", f"and {self.more:,} more {rows} with faults", "mend them likewise"))
        return InputError.of(told)


def diagnosed(stream: Stream, dialect: Dialect, groups: Sequence[Sequence[Scaled]]) -> list[FloatArray]:
    """Read groups of columns of a table row by row.

    Parameters
    ----------
    stream
        The file's bytes from its start.
    dialect
        How it is written.
    groups
        The columns that belong together.

    Returns
    -------
    list of array
        Shape (k, columns of the group) in SI for each group.

    Raises
    ------
    InputError
        With every row that has a wrong number of cells, or text, NaN, infinity or a number beyond reason in a column
        that is read.
    """
    wanted = [column for group in groups for column in group]
    columns = [array("d") for _ in wanted]
    faults = FaultyRows()
    offset = 0
    for row, raw in enumerate(lines(stream), start=1):
        if row > dialect.header_row:
            line = decoded(raw.rstrip(b"\r\n"), row, offset)
            if not is_comment(line) and not _take(line, dialect, wanted, columns, row, faults):
                faults.more += 1
        offset += len(raw)
    if faults.listed:
        raise faults.error()
    coming = iter(columns)
    return [np.array(list(islice(coming, len(group)))).T.copy() for group in groups]


def _take(
    line: str, dialect: Dialect, wanted: Sequence[Scaled], columns: list[array[float]], row: int, faults: FaultyRows
) -> bool:
    """Take the numbers of one row; tell whether the row is sound or its faults are listed."""
    place = f"row {row}"
    try:
        cells = [cell.strip() for cell in cells_of(line, dialect.delimiter)]
    except csv.Error:
        return faults.add("a quote is opened and not closed", "close it, or remove it", place)
    if cells == [column.text for column in dialect.columns]:
        return faults.add("the header stands here again", "split the file here, or remove the row", place)
    if len(cells) != len(dialect.columns):
        return faults.add(*_wrong_count(len(cells), dialect), place)
    told = True
    for scaled, column in zip(wanted, columns, strict=True):
        value = _number(cells[scaled.place], dialect, scaled.factor)
        if isinstance(value, float):
            column.append(value)
        else:
            told &= faults.add(*value, f"{place}, column `{dialect.columns[scaled.place].text}`")
    return told


def _number(cell: str, dialect: Dialect, factor: float) -> float | tuple[str, str]:
    """Give the number of a cell in SI, or what is wrong with it and how to mend it."""
    text = cell
    if dialect.decimal != ".":
        if dialect.decimal == "," and "." in cell and "," not in cell:
            return f"`{cell}` has a decimal point where the other rows have a comma", "write all decimals alike"
        text = cell.replace(",", ".", 1)
    if NUMBER.fullmatch(text) and math.isfinite(value := float(text)):
        if abs(value * factor) <= LARGEST:
            return value * factor
        return f"`{cell}` is beyond anything an arm does", "correct the number, or the unit of the column"
    if not cell:
        return "the cell is empty", "give a number, or remove the row"
    if cell.lower() in _NO_NUMBERS or NUMBER.fullmatch(text):
        return f"`{cell}` is not a finite number", "give a number, or remove the row"
    if dialect.decimal == "." and NUMBER.fullmatch(cell.replace(",", ".", 1)):
        return f"`{cell}` has a decimal comma where the other rows have a point", "write all decimals alike"
    if NUMBER.fullmatch(cell.replace(",", "").replace(".", "")):
        return f"`{cell}` has marks between its thousands", "write it with a decimal mark only"
    return f"`{cell}` is not a number", "give a number"


def _wrong_count(count: int, dialect: Dialect) -> tuple[str, str]:
    due = len(dialect.columns)
    what = f"{count} {'cell' if count == 1 else 'cells'} where the header has {due}"
    if dialect.delimiter == "," and count == 2 * due:
        return what, "where decimals are commas, part the cells by semicolon or tab"
    if count < due:
        return what, "give every column a cell: the row may have been cut off"
    return what, "remove the cells that have no header, or give them one"
