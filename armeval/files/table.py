"""A delimited text table as named float64 columns: fast when it is sound, thorough when it is not."""

from __future__ import annotations

import os
from collections.abc import Iterator, Sequence
from contextlib import contextmanager
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING, Any, Protocol, TypeAlias

import numpy as np

from armeval.arrays import FloatArray
from armeval.errors import InputError
from armeval.files.dialect import Column, Dialect, read_dialect
from armeval.files.lines import WithoutComments, lines
from armeval.files.reading import existing_file
from armeval.files.table_faults import diagnosed

if TYPE_CHECKING:
    import pyarrow as pa

#: One column as the pieces in which it was read, each of shape (some,).
Pieces: TypeAlias = list[FloatArray]

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

    def numbers(self, wanted: Sequence[int]) -> list[Pieces]:
        """Give the wanted columns, by their places in ``columns``; only they need to hold numbers.

        Raises
        ------
        InputError
            With every row that holds something else than finite numbers, and if there are no rows.
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

    def numbers(self, wanted: Sequence[int]) -> list[Pieces]:
        """Give the wanted columns; see :meth:`Table.numbers`."""
        pieces = self._fast(wanted)
        if pieces is None:
            with _opened(self.file) as stream:
                pieces = diagnosed(stream, self.dialect, wanted)
        if not pieces or not sum(map(len, pieces[0])):
            raise InputError("there is a header and no row of numbers", "add rows below the header", file=self.source)
        return pieces

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
        return [f"row {rows[sample]}" for sample in samples]

    def _fast(self, wanted: Sequence[int]) -> list[Pieces] | None:
        """Give the wanted columns as pyarrow reads them; None if anything in them needs a closer look."""
        # A comment passes for a row where the column that it begins in is not looked at.
        passes = (False, True) if 0 in wanted else (True,)
        for comments in passes:
            for decimal in (self.dialect.decimal,) if self.dialect.decimal else (".", ","):
                pieces = self._parsed(wanted, decimal, comments=comments)
                if pieces is not None:
                    return pieces
        return None

    def _parsed(self, wanted: Sequence[int], decimal: str, *, comments: bool) -> list[Pieces] | None:
        import pyarrow as pa
        from pyarrow import csv

        names = [str(index) for index in range(len(self.columns))]
        kept = [names[index] for index in wanted]
        try:
            with _opened(self.file) as stream:
                stream.read(self.dialect.data_offset)
                source = WithoutComments(stream) if comments else stream
                table = csv.read_csv(
                    source,
                    read_options=csv.ReadOptions(column_names=names),
                    parse_options=csv.ParseOptions(delimiter=self.dialect.delimiter),
                    convert_options=csv.ConvertOptions(
                        column_types=dict.fromkeys(names, pa.float64()),
                        include_columns=kept,
                        null_values=[],
                        decimal_point=decimal,
                    ),
                )
        except pa.ArrowInvalid as fault:
            return [[] for _ in wanted] if "Empty CSV file" in str(fault) else None
        return finite_pieces(table, len(kept))


def finite_pieces(table: pa.Table, count: int) -> list[Pieces] | None:
    """Columns of an arrow table of float64 without a copy; None if a number among them is missing or not finite."""
    if any(table.column(index).null_count for index in range(count)):
        return None
    pieces = [[chunk.to_numpy(zero_copy_only=True) for chunk in table.column(index).chunks] for index in range(count)]
    return pieces if all(np.isfinite(piece).all() for column in pieces for piece in column) else None


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


def joined(pieces: Pieces) -> FloatArray:
    """Give a column as one array; without a copy where it is in one piece."""
    return pieces[0] if len(pieces) == 1 else np.concatenate(pieces)


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
