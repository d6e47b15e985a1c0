"""Blocks of a text table parsed by pyarrow, several at a time: the fast way, for tables that are sound."""

from __future__ import annotations

import os
from collections import deque
from collections.abc import Callable, Iterable, Iterator, Sequence
from concurrent.futures import Future, ThreadPoolExecutor
from itertools import chain, islice
from typing import TypeVar

import numpy as np

from armeval.arrays import FloatArray
from armeval.files.tables.arrow import from_arrow
from armeval.files.tables.dialect import Dialect
from armeval.files.tables.lines import without_comments
from armeval.files.tables.scaled import Scaled, scaled_rows

_MOST_HANDS = 8

Given = TypeVar("Given")
Made = TypeVar("Made")


def in_parallel(work: Callable[[Given], Made], parts: Iterable[Given]) -> Iterator[Made]:
    """Work on parts in threads and give the results in order.

    Hardly more parts are taken than there are hands to work on them, so that few of them are in memory at a time.

    Parameters
    ----------
    work
        Gains from threads if it lets go of the interpreter.
    parts
        Taken one by one; with one only, no thread is started.
    """
    coming = iter(parts)
    first = list(islice(coming, 2))
    if len(first) < 2:
        yield from map(work, first)
        return
    hands = min(_MOST_HANDS, os.cpu_count() or 1)
    with ThreadPoolExecutor(hands) as pool:
        waiting: deque[Future[Made]] = deque()
        for part in chain(first, coming):
            waiting.append(pool.submit(work, part))
            if len(waiting) > hands:
                yield waiting.popleft().result()
        while waiting:
            yield waiting.popleft().result()


def parsed(block: bytes | memoryview, dialect: Dialect, groups: Sequence[Sequence[Scaled]]) -> list[FloatArray] | None:
    """Parse whole lines of a table.

    Returns
    -------
    list of array, or None
        For each group of columns, its rows in SI, shape (k, columns of the group); None if a closer look is needed.
    """
    # A comment passes for a row where nobody looks at the column that it begins in.
    first_is_read = any(column.place == 0 for group in groups for column in group)
    if first_is_read or b"#" not in bytes(block):
        rows = _parsed(block, dialect, groups)
        if rows is not None:
            return rows
    plain = without_comments(block)
    return None if first_is_read and len(plain) == len(block) else _parsed(plain, dialect, groups)


def _parsed(block: bytes | memoryview, dialect: Dialect, groups: Sequence[Sequence[Scaled]]) -> list[FloatArray] | None:
    import pyarrow as pa
    from pyarrow import csv

    names = [str(index) for index in range(len(dialect.columns))]
    kept = [names[column.place] for group in groups for column in group]
    try:
        table = csv.read_csv(
            pa.BufferReader(pa.py_buffer(block)),
            read_options=csv.ReadOptions(column_names=names, use_threads=False, block_size=len(block) + 1),
            parse_options=csv.ParseOptions(delimiter=dialect.delimiter),
            convert_options=csv.ConvertOptions(
                column_types=dict.fromkeys(names, pa.float64()),
                include_columns=kept,
                null_values=[],
                decimal_point=dialect.decimal or ".",
            ),
        )
    except pa.ArrowInvalid as fault:
        return [np.empty((0, len(group))) for group in groups] if "Empty CSV file" in str(fault) else None
    return scaled_rows([from_arrow(column) for column in table.columns], groups)
