"""Which column of a table is what: foreign headers renamed, names and units checked."""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import replace

from armeval.errors import Findings, InputError, near
from armeval.files.tables.dialect import Column
from armeval.units import header, scale


def renamed(columns: Sequence[Column], names: Mapping[str, str] | None, found: Findings) -> tuple[Column, ...]:
    """Give foreign headers the names and units of a ``[columns]`` table.

    Parameters
    ----------
    columns
        The table's header.
    names
        Foreign header, whole or without its unit, to ``name [unit]``; without a unit, the header's own one stays.
        A header that is not named keeps its name, unless another one is given that name.
    found
        Gathers what is wrong.

    Returns
    -------
    tuple of Column
        In the order of the table; ``text`` stays what the file holds.
    """
    if not names:
        return tuple(columns)
    given: dict[int, Column] = {}
    for foreign, wanted in names.items():
        key = foreign.strip()
        places = [i for i, column in enumerate(columns) if column.text == key]
        places = places or [i for i, column in enumerate(columns) if column.name == key]
        if not places:
            found.error(
                f"there is no column `{foreign}`", near(foreign, (column.text for column in columns)), place="[columns]"
            )
            continue
        try:
            name, unit = header(wanted)
        except InputError as fault:
            found.take(fault, place=f"[columns] {foreign}")
            continue
        given.update({i: replace(columns[i], name=name, unit=unit or columns[i].unit) for i in places})
    taken = {column.name for column in given.values()}
    return tuple(
        given.get(i, replace(column, name="") if column.name in taken else column) for i, column in enumerate(columns)
    )


def find(columns: Sequence[Column], name: str, found: Findings) -> int | None:
    """Give the place of the column of that name; None if there is none. Two of them are an error."""
    places = [i for i, column in enumerate(columns) if column.name == name]
    if len(places) > 1:
        texts = ", ".join(f"`{columns[i].text}`" for i in places)
        found.error(f"{len(places)} columns are called `{name}`: {texts}", "keep one of them", place="header")
    return places[0] if places else None


def missing(columns: Sequence[Column], absent: Sequence[str], due: str, found: Findings) -> None:
    """Note that columns are missing; ``due`` says how such columns are written."""
    names = ", ".join(f"`{name}`" for name in absent)
    have = {column.name for column in columns if column.name}
    hints = [hint for name in absent if (hint := near(name, have)).startswith("did you mean")]
    have_text = ", ".join(f"`{column.text}`" for column in columns)
    mend = f"add {due}, or name it in [columns]; the header has {have_text}"
    found.error(f"there is no column {names}", "; ".join([*hints, mend]), place="header")


def factor(column: Column, wanted: str, found: Findings) -> float:
    """Give what turns the column's numbers into the SI unit ``wanted``; NaN, and an error noted, if nothing does."""
    place = f"column `{column.text}`"
    if column.unit is None:
        found.error("it has no unit", f"write `{column.name} [{wanted}]` or another unit of the kind", place=place)
        return float("nan")
    try:
        return scale(column.unit, wanted)
    except InputError as fault:
        found.take(fault, place=place)
        return float("nan")


def unused(columns: Sequence[Column], used: Iterable[int], found: Findings, known: Iterable[str]) -> None:
    """Warn of columns that nothing reads: their names may be mistyped."""
    known, used = tuple(known), set(used)
    for index, column in enumerate(columns):
        if index not in used and column.name:
            hint = near(column.name, known)
            mend = hint if hint.startswith("did you mean") else "remove it, if it is not meant to be read"
            found.warning("it is not read", mend, place=f"column `{column.text}`")
