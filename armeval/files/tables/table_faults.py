"""The thorough reader of a text table: slower, and it names the row and column of everything that is wrong."""

from __future__ import annotations

import csv
import math
from array import array
from collections.abc import Sequence
from itertools import islice

import numpy as np

from armeval.arrays import FloatArray
from armeval.errors import Finding, InputError
from armeval.files.tables.dialect import NUMBER, Dialect, cells_of, decoded, is_comment
from armeval.files.tables.lines import count_lines
from armeval.files.tables.scaled import LARGEST, Scaled

_LISTED = 20
_NO_NUMBERS = {"nan", "inf", "infinity", "-nan", "-inf", "-infinity", "+nan", "+inf", "+infinity"}


class Diagnosis:
    """Reads a table's rows one by one, block by block, and gathers what is wrong with them.

    The first faults are told in full, the others as a number of rows.

    Parameters
    ----------
    dialect
        How the table is written.
    groups
        The columns that are read, those that belong together in one group.
    """

    def __init__(self, dialect: Dialect, groups: Sequence[Sequence[Scaled]]) -> None:
        self._dialect = dialect
        self._groups = groups
        self._wanted = [column for group in groups for column in group]
        self._row = dialect.header_row
        self._offset = dialect.data_offset
        self._listed: list[Finding] = []
        self._more = 0

    def skip(self, block: bytes | memoryview) -> None:
        """Count the lines of a block that is known to be sound."""
        self._row += count_lines(block)
        self._offset += len(block)

    def read(self, block: bytes | memoryview) -> list[FloatArray]:
        """Read a block of whole lines; give the groups in SI, shape (k, columns of the group), NaN at the faults.

        Raises
        ------
        InputError
            If it is not UTF-8 text.
        """
        columns = [array("d") for _ in self._wanted]
        for raw in bytes(block).splitlines(keepends=True):
            self._row += 1
            line = decoded(raw.rstrip(b"\r\n"), self._row, self._offset)
            self._offset += len(raw)
            if not is_comment(line):
                self._take(line, columns)
        coming = iter(columns)
        return [np.array(list(islice(coming, len(group)))).T.reshape(-1, len(group)) for group in self._groups]

    def raise_faults(self) -> None:
        """Raise one error with every row that has a wrong number of cells, or no number of a size that can be."""
        if self._more:
            rows = "row" if self._more == 1 else "rows"
            what = f"and {self._more:,} more {rows} with faults"
            self._listed.append(Finding("error", what, "mend them likewise"))
        if self._listed:
            raise InputError.of(self._listed)

    def _take(self, line: str, columns: list[array[float]]) -> None:
        """Take the numbers of one row, or note its faults."""
        place = f"row {self._row}"
        try:
            cells = [cell.strip() for cell in cells_of(line, self._dialect.delimiter)]
        except csv.Error:
            self._note([Finding("error", "a quote is opened and not closed", "close it, or remove it", place=place)])
            return
        if len(cells) != len(self._dialect.columns) or cells == [column.text for column in self._dialect.columns]:
            self._note([Finding("error", *_no_row(cells, self._dialect), place=place)])
            return
        numbers = [_number(cells[column.place], self._dialect, column.factor) for column in self._wanted]
        faults = [
            Finding("error", *number, place=f"{place}, column `{self._dialect.columns[column.place].text}`")
            for column, number in zip(self._wanted, numbers, strict=True)
            if isinstance(number, tuple)
        ]
        if faults:
            self._note(faults)
        for column, number in zip(columns, numbers, strict=True):
            column.append(math.nan if isinstance(number, tuple) else number)

    def _note(self, faults: list[Finding]) -> None:
        """Note the faults of one row."""
        if len(self._listed) < _LISTED:
            self._listed.extend(faults)
        else:
            self._more += 1


def _number(cell: str, dialect: Dialect, factor: float) -> float | tuple[str, str]:
    """Give the number of a cell in SI, or what is wrong with it and how to mend it."""
    text = cell
    if dialect.decimal == ",":
        if "." in cell and "," not in cell:
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


def _no_row(cells: list[str], dialect: Dialect) -> tuple[str, str]:
    """Say why cells are no row of the table, and how to mend it."""
    if cells == [column.text for column in dialect.columns]:
        return "the header stands here again", "split the file here, or remove the row"
    count, due = len(cells), len(dialect.columns)
    what = f"{count} {'cell' if count == 1 else 'cells'} where the header has {due}"
    if dialect.delimiter == "," and count == 2 * due:
        return what, "where decimals are commas, part the cells by semicolon or tab"
    if count < due:
        return what, "give every column a cell: the row may have been cut off"
    return what, "remove the cells that have no header, or give them one"
