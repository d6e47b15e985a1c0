"""How a text table is written: where its header stands, what parts its cells, what marks its decimals."""

from __future__ import annotations

import codecs
import csv
import re
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Literal

from armeval.errors import InputError
from armeval.units import header

#: A number with a decimal point; a decimal comma is turned into a point first.
NUMBER = re.compile(r"\s*[+-]?(?:[0-9]+\.?[0-9]*|\.[0-9]+)(?:[eE][+-]?[0-9]+)?\s*", re.ASCII)
_COMMA_NUMBER = re.compile(r"\s*[+-]?(?:[0-9]+,[0-9]*|,[0-9]+)(?:[eE][+-]?[0-9]+)?\s*", re.ASCII)
_LINE = re.compile(rb"[^\r\n]*(?:\r\n|\r|\n|$)")
_BLANK = " \t\r\n\v\f"
_DELIMITERS = (";", "\t", ",")
_SAMPLED_LINES = 2000


@dataclass(frozen=True)
class Column:
    """One cell of a table's header.

    Attributes
    ----------
    text
        The cell as it stands in the file.
    name, unit
        What stands before, and what within the brackets; ``unit`` is None where there are none.
    """

    text: str
    name: str
    unit: str | None


@dataclass(frozen=True)
class Dialect:
    """How a text table is written.

    Attributes
    ----------
    delimiter
        What parts the cells: comma, semicolon or tab.
    decimal
        What marks the decimals; None where the first rows hold whole numbers only.
    columns
        The header's cells.
    header_row
        Line number of the header, from 1.
    data_offset
        Bytes from the start of the file to the line after the header.
    """

    delimiter: str
    decimal: Literal[".", ","] | None
    columns: tuple[Column, ...]
    header_row: int
    data_offset: int


def cells_of(line: str, delimiter: str) -> list[str]:
    """Part one line into its cells.

    Raises
    ------
    csv.Error
        If a quote is opened and not closed, or something follows a closed one.
    """
    return next(csv.reader([line], delimiter=delimiter, strict=True, skipinitialspace=True), [])


def is_comment(line: str) -> bool:
    """Whether a line says nothing about the data: blank, or begun with ``#``."""
    text = line.lstrip(_BLANK)
    return not text or text.startswith("#")


def read_dialect(sample: bytes, *, complete: bool) -> Dialect:
    """Find out how a text table is written from its first bytes.

    Parameters
    ----------
    sample
        The first bytes of the file.
    complete
        Whether they are the whole file; if not, the last line of the sample may be cut and is left out.

    Raises
    ------
    InputError
        If the file is empty, no UTF-8 text, has no header, or a header that cannot be read.
    """
    _refuse_other_encodings(sample)
    lines = _lines(sample, complete)
    forced: str | None = None
    comment: tuple[int, str, int] | None = None
    start: tuple[int, str, int] | None = None
    body: list[str] = []
    for number, (line, end) in enumerate(lines, start=1):
        if start is not None:
            if not is_comment(line):
                body.append(line)
        elif number == 1 and (separator := re.fullmatch(r"sep=([;,\t])", line.strip("\r\n"))):
            forced = separator[1]
        elif is_comment(line):
            comment = (number, line.strip().lstrip("#"), end) if line.strip() else comment
        else:
            start = (number, line, end)
    if start is None:
        raise InputError("the file is empty", "give a header row and rows of numbers")
    if _all_numbers(start[1]):
        if comment is None or _all_numbers(comment[1]) or not _same_count(comment[1], start[1]):
            raise InputError(
                "the first row is numbers, not a header",
                "put a header row such as `time [s], lift.angle [deg]` above it",
                place=f"row {start[0]}",
            )
        body.insert(0, start[1])  # the header was written as a comment, as numpy.savetxt does
        start = comment
    number, text, end = start
    delimiter = forced or _delimiter(text, body)
    return Dialect(delimiter, _decimal(body, delimiter), _columns(text, delimiter, number), number, end)


def _refuse_other_encodings(sample: bytes) -> None:
    """Raise an error where the bytes are no UTF-8 text."""
    if sample.startswith((codecs.BOM_UTF16_LE, codecs.BOM_UTF16_BE)):
        raise InputError("the text is UTF-16", "save it as UTF-8", place="byte 1")
    if (at := sample.find(b"\0")) >= 0:
        row = sample.count(b"\n", 0, at) + 1
        raise InputError(
            "it holds bytes that are no text", "give a text table in UTF-8", place=f"row {row}, byte {at + 1}"
        )


def _lines(sample: bytes, complete: bool) -> list[tuple[str, int]]:
    """Lines of the sample with the byte after each of them."""
    lines: list[tuple[str, int]] = []
    for match in _LINE.finditer(sample):
        raw = match.group()
        if not raw:
            continue
        if match.end() == len(sample) and not complete and lines:
            break
        lines.append((decoded(raw, len(lines) + 1, match.start()), match.end()))
        if len(lines) >= _SAMPLED_LINES:
            break
    return lines


def decoded(line: bytes, row: int, offset: int) -> str:
    """Decode one line of the file.

    Raises
    ------
    InputError
        If it is not UTF-8; the place names row and byte.
    """
    try:
        return line.decode("utf-8-sig" if row == 1 else "utf-8")
    except UnicodeDecodeError as fault:
        at = offset + fault.start + 1
        raise InputError(
            f"byte 0x{line[fault.start]:02x} is not UTF-8 text", "save the file as UTF-8", place=f"row {row}, byte {at}"
        ) from fault


def _count(line: str, delimiter: str) -> int:
    try:
        return len(cells_of(line, delimiter))
    except csv.Error:
        return 0


def _same_count(one: str, other: str) -> bool:
    return any(_count(one, mark) == _count(other, mark) > 1 for mark in _DELIMITERS)


def _all_numbers(line: str) -> bool:
    """Whether a line is numbers in any of the ways that a table may be written."""
    for mark in _DELIMITERS:
        cells = re.split(re.escape(mark), line.strip().replace('"', ""))
        if all(NUMBER.fullmatch(cell.replace(",", ".")) for cell in cells if cell.strip()):
            return True
    return False


def _delimiter(head: str, body: Sequence[str]) -> str:
    """Find the mark that parts header and rows into the same number of cells, more than one.

    A comma comes last: where the decimals are commas, it is found within the cells of another mark.
    """
    counts = {mark: _count(head, mark) for mark in _DELIMITERS}
    for mark, count in counts.items():
        if count > 1 and all(_count(line, mark) == count for line in body):
            return mark
    for mark, count in counts.items():  # some rows are faulty: most of them may do
        if count > 1 and 2 * sum(_count(line, mark) == count for line in body) > len(body):
            return mark
    return max(reversed(_DELIMITERS), key=lambda mark: counts[mark])


def _decimal(body: Sequence[str], delimiter: str) -> Literal[".", ","] | None:
    """Find the mark of the decimals: the one that more of the cells show."""
    points = commas = 0
    for line in body:
        try:
            cells = cells_of(line, delimiter)
        except csv.Error:
            continue
        commas += sum(bool(_COMMA_NUMBER.fullmatch(cell)) for cell in cells)
        points += sum("." in cell and bool(NUMBER.fullmatch(cell)) for cell in cells)
    if points == commas == 0:
        return None
    return "," if commas > points else "."


def _columns(text: str, delimiter: str, row: int) -> tuple[Column, ...]:
    place = f"row {row}"
    try:
        cells = [cell.strip() for cell in cells_of(text, delimiter)]
    except csv.Error as fault:
        raise InputError(f"the header cannot be read: {fault}", "close the quotes of its cells", place=place) from fault
    if len(cells) < 2:
        raise InputError(
            f"the header `{text.strip()}` has one column only",
            "part the columns by comma, semicolon or tab",
            place=place,
        )
    return tuple(column_of(cell) for cell in cells)


def column_of(text: str) -> Column:
    """Part a header's cell into name and unit; one in which brackets mean something else is all name."""
    try:
        return Column(text, *header(text))
    except InputError:
        return Column(text, text, None)
