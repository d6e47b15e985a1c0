"""A delimited text table as named float64 columns: fast when it is sound, thorough when it is not."""

from __future__ import annotations

import os
from collections.abc import Iterator, Sequence
from contextlib import contextmanager
from dataclasses import dataclass, replace
from pathlib import Path
from typing import Any, Protocol

from armeval.arrays import FloatArray
from armeval.errors import InputError
from armeval.files.tables.block_parser import in_parallel, parsed
from armeval.files.tables.dialect import Column, Dialect, read_dialect
from armeval.files.tables.growing import GrowingArray
from armeval.files.tables.lines import lines, whole_lines
from armeval.files.tables.reading import existing_file
from armeval.files.tables.scaled import Scaled
from armeval.files.tables.table_faults import Diagnosis

_SAMPLE_BYTES = 1 << 18
_GZIP = b"\x1f\x8b"


class Table(Protocol):
    """Named columns of numbers, whatever file they are in."""

    @property
    def source(self) -> str:
        """The file as the user named it."""

    @property
    def columns(self) -> tuple[Column, ...]:
        """The header's cells, in the order of the file."""

    def read(self, groups: Sequence[Sequence[Scaled]]) -> list[FloatArray]:
        """Give groups of columns in SI, shape (k, columns of the group) each; only they need to hold numbers.

        No column may stand in two places.

        Raises
        ------
        InputError
            With every row that holds something else than finite numbers of a size that can be, or without any row.
        """

    def places(self, samples: Sequence[int]) -> list[str]:
        """Say where in the file samples stand, counted from 0: ``row 17``."""


@dataclass(frozen=True)
class TextTable:
    """A delimited text table, plain or compressed with gzip.

    Attributes
    ----------
    file
        Where it is.
    source
        The file as the user named it.
    dialect
        How it is written.
    """

    file: Path
    source: str
    dialect: Dialect

    @property
    def columns(self) -> tuple[Column, ...]:
        """The header's cells, in the order of the file."""
        return self.dialect.columns

    def read(self, groups: Sequence[Sequence[Scaled]]) -> list[FloatArray]:
        """Give groups of columns in SI; see :meth:`Table.read`."""
        dialect = self.dialect if self.dialect.decimal else replace(self.dialect, decimal=".")
        values = self._sound(groups, dialect)
        if values is None and self.dialect.decimal is None and self._late_decimals_are_commas():
            dialect = replace(self.dialect, decimal=",")
            values = self._sound(groups, dialect)
        if values is None:
            values = self._diagnosed(groups, dialect)
        if not len(values[0]):
            raise InputError("there is a header and no row of numbers", "add rows below the header", file=self.source)
        return values

    def places(self, samples: Sequence[int]) -> list[str]:
        """Say where in the file samples stand, counted from 0; see :meth:`Table.places`."""
        rows: dict[int, int] = {}
        wanted = set(samples)
        seen = -1
        with _opened(self.file) as stream:
            for number, raw in enumerate(lines(stream), start=1):
                if number > self.dialect.header_row and raw.lstrip()[:1] not in (b"", b"#"):
                    seen += 1
                    if seen in wanted:
                        rows[seen] = number
                        if len(rows) == len(wanted):
                            break
        return [f"row {rows[sample]}" if sample in rows else f"sample {sample + 1}" for sample in samples]

    def _sound(self, groups: Sequence[Sequence[Scaled]], dialect: Dialect) -> list[FloatArray] | None:
        """Give the groups as pyarrow reads them; None if anything in them needs a closer look."""
        arrays = [GrowingArray(len(group)) for group in groups]
        for _, rows in self._blocks(groups, dialect):
            if rows is None:
                return None
            for array, values in zip(arrays, rows, strict=True):
                array.append(values)
        return [array.finished() for array in arrays]

    def _diagnosed(self, groups: Sequence[Sequence[Scaled]], dialect: Dialect) -> list[FloatArray]:
        """Give the groups, taking a closer look at the blocks that need one."""
        arrays = [GrowingArray(len(group)) for group in groups]
        diagnosis = Diagnosis(dialect, groups)
        for block, rows in self._blocks(groups, dialect):
            if rows is None:
                rows = diagnosis.read(block)
            else:
                diagnosis.skip(block)
            for array, values in zip(arrays, rows, strict=True):
                array.append(values)
        diagnosis.raise_faults()
        return [array.finished() for array in arrays]

    def _blocks(
        self, groups: Sequence[Sequence[Scaled]], dialect: Dialect
    ) -> Iterator[tuple[bytes | memoryview, list[FloatArray] | None]]:
        """Give blocks of lines with their rows, or None for the rows where a closer look is needed."""
        with _opened(self.file) as stream:
            stream.read(dialect.data_offset)
            yield from in_parallel(lambda block: (block, parsed(block, dialect, groups)), whole_lines(stream))

    def _late_decimals_are_commas(self) -> bool:
        """Tell the mark of decimals that come after the rows from which the dialect was read."""
        if self.dialect.delimiter == ",":
            return False
        with _opened(self.file) as stream:
            stream.read(self.dialect.data_offset)
            counts = [(block.count(b","), block.count(b".")) for block in map(bytes, whole_lines(stream))]
        return sum(commas for commas, _ in counts) > sum(points for _, points in counts)


def open_table(path: str | os.PathLike[str]) -> TextTable:
    """Open a delimited text table and read its header.

    Comma, semicolon or tab; decimal point or comma; UTF-8 with or without byte order mark; any line end; comment lines
    begun with ``#``; quoted cells; plain or gzip. What applies is found in the file.

    Raises
    ------
    InputError
        If there is no such file, it cannot be read, or its header cannot.
    """
    file = existing_file(path)
    try:
        with _opened(file) as stream:
            sample = bytes(stream.read(_SAMPLE_BYTES))
            complete = len(sample) < _SAMPLE_BYTES
        return TextTable(file, os.fspath(path), read_dialect(sample, complete=complete))
    except InputError as fault:
        raise fault.placed(file=path) from fault.__cause__


@contextmanager
def _opened(file: Path) -> Iterator[Any]:
    """Open a file for reading its bytes, unpacked if it is packed by gzip."""
    import pyarrow as pa

    try:
        with pa.OSFile(str(file), "rb") as raw:
            packed = raw.read(2) == _GZIP
            raw.seek(0)
            yield pa.CompressedInputStream(raw, "gzip") if packed else raw
    except OSError as fault:
        raise InputError(f"it cannot be read to its end: {fault}", "copy or pack the file again") from fault
