"""A Parquet file as named float64 columns."""

from __future__ import annotations

import os
from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path

import numpy as np

from armeval.errors import Findings, InputError
from armeval.files.dialect import Column
from armeval.files.reading import existing_file
from armeval.files.row_faults import note_rows
from armeval.files.table import Pieces, finite_pieces
from armeval.units import header

PARQUET_MAGIC = b"PAR1"


@dataclass(frozen=True)
class ParquetTable:
    """A table in a Parquet file; see :class:`armeval.files.table.Table`.

    Attributes
    ----------
    file
        Where it is.
    source
        The file as the user named it.
    columns
        Its columns, named and with units like those of a text table.
    """

    file: Path
    source: str
    columns: tuple[Column, ...]

    def numbers(self, wanted: Sequence[int]) -> list[Pieces]:
        """Give the wanted columns; see :meth:`armeval.files.table.Table.numbers`."""
        import pyarrow as pa
        from pyarrow import parquet

        texts = [self.columns[index].text for index in wanted]
        found = Findings(self.source)
        try:
            with parquet.ParquetFile(self.file) as opened:
                arrow = opened.schema_arrow
                for text in texts:
                    kind = arrow.field(text).type
                    if not (pa.types.is_integer(kind) or pa.types.is_floating(kind)):
                        found.error(f"it holds {kind}, not numbers", "store numbers", place=f"column `{text}`")
                found.raise_errors()
                table = opened.read(columns=texts).select(texts)
            table = table.cast(pa.schema([(text, pa.float64()) for text in texts]), safe=False)
        except (pa.ArrowException, OSError) as fault:
            raise _damaged(fault) from fault
        if not table.num_rows:
            raise InputError("it has columns and no row", "log a whole lap", file=self.source)
        pieces = finite_pieces(table, len(texts))
        if pieces is not None:
            return pieces
        for text in texts:
            numbers = table.column(text).to_numpy()
            note_rows(
                np.flatnonzero(~np.isfinite(numbers)),
                self,
                found,
                lambda _: ("there is no finite number", "give a number, or remove the row"),
                rest="rows without a number",
                column=text,
            )
        raise InputError.of(found.found)

    def places(self, samples: Sequence[int]) -> list[str]:
        """Say where samples stand, counted from 0: rows of Parquet count from 1."""
        return [f"row {sample + 1}" for sample in samples]


def open_parquet(path: str | os.PathLike[str]) -> ParquetTable:
    """Open a Parquet file and read the names of its columns.

    Raises
    ------
    InputError
        If it cannot be read, or a column's name cannot.
    """
    import pyarrow as pa
    from pyarrow import parquet

    file = existing_file(path)
    try:
        names = parquet.read_schema(file).names
    except (pa.ArrowException, OSError) as fault:
        raise _damaged(fault).placed(file=path) from fault
    if len(set(names)) < len(names):
        twice = next(name for name in names if names.count(name) > 1)
        raise InputError(f"two columns are called `{twice}`", "keep one of them", file=path)
    return ParquetTable(file, os.fspath(path), tuple(Column(name, *header(name)) for name in names))


def _damaged(fault: Exception) -> InputError:
    first_line = str(fault).splitlines()[0]
    return InputError(f"the Parquet file cannot be read: {first_line}", "copy or write the file again")
