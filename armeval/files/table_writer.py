"""Columns of numbers to a delimited text table, at full precision."""

from __future__ import annotations

import os
from collections.abc import Mapping
from pathlib import Path

from armeval.arrays import FloatArray
from armeval.errors import InputError


def write_text_table(file: str | os.PathLike[str], columns: Mapping[str, FloatArray]) -> None:
    """Write named columns as comma-separated text, every number with all the digits that it takes to read it back.

    Parameters
    ----------
    file
        Where to; packed by gzip where the name ends in ``.gz``. It appears whole or not at all.
    columns
        Header cell to numbers, shape (k,) each.

    Raises
    ------
    InputError
        If the file cannot be written.
    """
    import pyarrow as pa
    from pyarrow import csv

    path = Path(file)
    part = path.with_name(f".{path.name}.part")
    table = pa.table({name: pa.array(values) for name, values in columns.items()})
    try:
        with pa.OSFile(str(part), "wb") as raw:
            if path.suffix == ".gz":
                with pa.CompressedOutputStream(raw, "gzip") as packed:
                    csv.write_csv(table, packed, csv.WriteOptions(quoting_style="needed"))
            else:
                csv.write_csv(table, raw, csv.WriteOptions(quoting_style="needed"))
        part.replace(path)
    except OSError as fault:
        part.unlink(missing_ok=True)
        raise InputError(f"it cannot be written: {fault}", "choose a place that you may write to", file=file) from fault
