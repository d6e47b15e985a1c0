"""Columns of numbers to a table in a file, at full precision."""

from __future__ import annotations

import os
from collections.abc import Mapping
from pathlib import Path

from armeval.arrays import FloatArray
from armeval.errors import InputError
from armeval.files.tables.arrow import to_arrow


def write_table(file: str | os.PathLike[str], columns: Mapping[str, FloatArray]) -> None:
    """Write named columns so that reading them gives the same numbers.

    Parameters
    ----------
    file
        Where to: Parquet where the name ends in ``.parquet``, else comma-separated text, packed by gzip where the name
        ends in ``.gz``. It appears whole or not at all.
    columns
        Header cell to numbers, shape (k,) each.

    Raises
    ------
    InputError
        If the file cannot be written.
    """
    import pyarrow as pa
    from pyarrow import csv, parquet

    path = Path(file)
    part = path.with_name(f".{path.name}.part")
    table = pa.table({name: to_arrow(values) for name, values in columns.items()})
    try:
        try:
            with part.open("wb") as raw:
                if path.suffix == ".parquet":
                    parquet.write_table(table, raw, compression="zstd")
                elif path.suffix == ".gz":
                    with pa.CompressedOutputStream(raw, "gzip") as packed:
                        csv.write_csv(table, packed, csv.WriteOptions(quoting_style="needed"))
                else:
                    csv.write_csv(table, raw, csv.WriteOptions(quoting_style="needed"))
            part.replace(path)
        finally:
            part.unlink(missing_ok=True)
    except OSError as fault:
        raise InputError(
            f"it cannot be written: {fault.strerror or fault}", "choose a place that you may write to", file=path
        ) from fault
