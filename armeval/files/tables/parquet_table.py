"""A Parquet file as named float64 columns."""

from __future__ import annotations

import os
from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING

from armeval.arrays import FloatArray
from armeval.errors import Findings, InputError
from armeval.files.tables.arrow import from_arrow
from armeval.files.tables.dialect import Column, column_of
from armeval.files.tables.growing import GrowingArray
from armeval.files.tables.reading import existing_file
from armeval.files.tables.row_faults import no_numbers
from armeval.files.tables.scaled import Scaled, scaled_rows

if TYPE_CHECKING:
    import pyarrow as pa

PARQUET_MAGIC = b"PAR1"


@dataclass(frozen=True)
class ParquetTable:
    """A table in a Parquet file; see :class:`armeval.files.tables.table.Table`.

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

    def read(self, groups: Sequence[Sequence[Scaled]]) -> list[FloatArray]:
        """Give groups of columns in SI; see :meth:`armeval.files.tables.table.Table.read`."""
        import pyarrow as pa
        from pyarrow import parquet

        texts = [self.columns[column.place].text for group in groups for column in group]
        arrays = [GrowingArray(len(group)) for group in groups]
        done = 0
        try:
            with parquet.ParquetFile(self.file) as opened:
                self._refuse_other_types(opened.schema_arrow, texts)
                for index in range(opened.num_row_groups):
                    table = opened.read_row_group(index, columns=texts).select(texts)
                    table = table.cast(pa.schema([(text, pa.float64()) for text in texts]), safe=False)
                    columns = [from_arrow(column) for column in table.columns]
                    rows = scaled_rows(columns, groups)
                    if rows is None:
                        raise no_numbers(columns, groups, self, done)
                    for array, values in zip(arrays, rows, strict=True):
                        array.append(values)
                    done += table.num_rows
        except (pa.ArrowException, OSError) as fault:
            raise _damaged(fault) from fault
        if not done:
            raise InputError("it has columns and no row", "log a whole lap", file=self.source)
        return [array.finished() for array in arrays]

    def _refuse_other_types(self, schema: pa.Schema, texts: Sequence[str]) -> None:
        """Raise an error with every column that is read and does not hold numbers."""
        import pyarrow as pa

        found = Findings(self.source)
        for text in texts:
            kind = schema.field(text).type
            if not (pa.types.is_integer(kind) or pa.types.is_floating(kind)):
                found.error(f"it holds {kind}, not numbers", "store numbers", place=f"column `{text}`")
        found.raise_errors()

    def places(self, samples: Sequence[int]) -> list[str]:
        """Say where samples stand, counted from 0: rows of Parquet count from 1."""
        return [f"row {sample + 1}" for sample in samples]


def open_parquet(path: str | os.PathLike[str]) -> ParquetTable:
    """Open a Parquet file and read the names of its columns.

    Raises
    ------
    InputError
        If it cannot be read, or two columns have the same name.
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
    return ParquetTable(file, os.fspath(path), tuple(map(column_of, names)))


def _damaged(fault: Exception) -> InputError:
    first_line = str(fault).splitlines()[0]
    return InputError(f"the Parquet file cannot be read: {first_line}", "copy or write the file again")
