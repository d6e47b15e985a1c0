"""TOML files: from text to a checked table, every fault at once and in plain words."""

from __future__ import annotations

import os
import re
import tomllib
import typing
from collections.abc import Sequence
from typing import Any, TypeVar

from pydantic import BaseModel, ConfigDict, ValidationError
from pydantic_core import ErrorDetails

from armeval.errors import Findings, InputError, near
from armeval.files.quantities import JointKind
from armeval.files.text_file import read_text

_AT_LINE = re.compile(r"^(?P<what>.*?) \(at (?:line (?P<line>\d+), column (?P<column>\d+)|end of document)\)$", re.S)

Location = tuple[int | str, ...]


class Table(BaseModel):
    """A table of a TOML file: only the keys it names, and of the type it names."""

    model_config = ConfigDict(extra="forbid", frozen=True, strict=True, allow_inf_nan=False)


TableT = TypeVar("TableT", bound=Table)


def read_toml(path: str | os.PathLike[str]) -> dict[str, Any]:
    """Read a TOML file into plain values.

    Raises
    ------
    InputError
        If the file cannot be read as text, or the text is not TOML (with line and column).
    """
    text = read_text(path)
    try:
        return tomllib.loads(text)
    except tomllib.TOMLDecodeError as fault:
        match = _AT_LINE.match(str(fault))
        what = match["what"] if match else str(fault)
        at_end = match is None or match["line"] is None
        place = "end of the file" if match is None or at_end else f"line {match['line']}, column {match['column']}"
        raise InputError(
            f"this is not TOML: {what[:1].lower()}{what[1:]}",
            'write `key = value`, text and quantities in quotes: `feed = "60 mm/s"`',
            file=path,
            place=place,
        ) from fault
    except RecursionError as fault:
        raise InputError("the file is nested too deeply", "flatten it", file=path) from fault


def check_schema(content: dict[str, Any], wanted: str, findings: Findings) -> bool:
    """Note what is wrong with a file's ``schema``; tell whether the rest is worth reading.

    Parameters
    ----------
    content
        The file's top table.
    wanted
        Such as ``armeval/arm/1``.
    """
    given = content.get("schema")
    add = f'write `schema = "{wanted}"` at its top'
    if given is None:
        findings.error("the file does not say what it is", add, place="schema")
        return True
    if given == wanted:
        return True
    kind = wanted.split("/")[1]
    match = re.fullmatch(r"armeval/(\w+)/(\d+)", given) if isinstance(given, str) else None
    if match is None:
        findings.error(f"the schema is {given!r}", add, place="schema")
        return True
    if match[1] != kind:
        findings.error(
            f"this file is of the kind `{match[1]}`; one of the kind `{kind}` is due",
            f'name a file with `schema = "{wanted}"`',
            place="schema",
        )
        return False
    findings.error(f"this version does not know schema `{given}`", f"{add}, or update armeval", place="schema")
    return True


def validate(
    model: type[TableT],
    content: object,
    findings: Findings,
    *,
    inside: Location = (),
    kind: JointKind | None = None,
) -> TableT | None:
    """Turn plain values into a checked table; None and findings if that cannot be.

    Parameters
    ----------
    model
        What the table must hold.
    content
        Plain values, as :func:`read_toml` gives them.
    findings
        Every fault is noted here.
    inside
        Where in the file the table stands, such as ``("joint", "lift")``.
    kind
        For the table of a joint: whether it slides.
    """
    try:
        return model.model_validate(content, context=kind)
    except ValidationError as error:
        for fault in error.errors(include_url=False):
            what, mend = _in_plain_words(fault, model)
            findings.error(what, mend, place=place((*inside, *fault["loc"])))
        return None


def place(location: Location) -> str:
    """Write where in a file something stands: ``[joint.lift] stiffness``, ``[[run]] 2, name``."""
    parts = list(location)
    entry = f", entry {parts.pop() + 1}" if parts and isinstance(parts[-1], int) else ""  # type: ignore[operator]
    if not parts:
        return ""
    key = f"{parts.pop()}{entry}"
    if not parts:
        return key
    table = ".".join(str(part) for part in parts if isinstance(part, str))
    numbers = [part + 1 for part in parts if isinstance(part, int)]
    return f"[[{table}]] {numbers[0]}, {key}" if numbers else f"[{table}] {key}"


def _in_plain_words(fault: ErrorDetails, model: type[Table]) -> tuple[str, str]:
    """Say what is wrong and how to mend it, from what pydantic says."""
    key, given, about = fault["loc"][-1] if fault["loc"] else "", fault["input"], fault.get("ctx", {})
    cause = about.get("error")
    if isinstance(cause, InputError):
        return cause.findings[0].what, cause.findings[0].mend
    shown = _shown(given)
    match fault["type"]:
        case "missing":
            return f"`{key}` is missing", "add it"
        case "extra_forbidden":
            return f"`{key}` is not known here", near(str(key), _keys_at(model, fault["loc"][:-1]))
        case "literal_error":
            return f"{shown} is not known here", f"write one of {about['expected']}"
        case "string_type":
            return f"{shown} is not text", "put it in quotes"
        case "bool_type":
            return f"{shown} is neither true nor false", "write `true` or `false`, without quotes"
        case "int_type" | "int_from_float":
            return f"{shown} is not a whole number", "write a whole number, without quotes"
        case "greater_than_equal":
            return f"{shown} is too small", f"give {about['ge']} or more"
        case "list_type" if isinstance(given, dict):
            return f"[{key}] is a single table", f"write it as [[{key}]]: there may be several"
        case "list_type":
            return f"{shown} is not a list", "write it in square brackets"
        case "too_short" | "too_long":
            due = about.get("min_length", about.get("max_length"))
            return f"the list has {about['actual_length']} entries", f"give {due}"
        case "dict_type" | "model_type":
            return f"{shown} stands where a table is due", f"write it under a heading such as [{key}]"
    return str(fault["msg"]), ""


def _shown(given: object) -> str:
    """Write a value as it stands in the file."""
    if isinstance(given, dict):
        return "a table"
    if isinstance(given, bool):
        return str(given).lower()
    return f'"{given}"' if isinstance(given, str) else f"{given!r}"


def _keys_at(model: type[Table], location: Sequence[int | str]) -> list[str]:
    """List the keys that the table at a location may have."""
    found: Any = model
    for part in location:
        if isinstance(part, str):
            found = found.model_fields[part].annotation
        found = _table_in(found) or found
    if not (isinstance(found, type) and issubclass(found, Table)):
        return []
    return [field.alias or name for name, field in found.model_fields.items()]


def _table_in(annotation: Any) -> type[Table] | None:
    """Find the table inside ``list[Table]`` or ``Table | None``."""
    if isinstance(annotation, type) and not typing.get_args(annotation):
        return annotation if issubclass(annotation, Table) else None
    for part in typing.get_args(annotation):
        found = _table_in(part)
        if found is not None:
            return found
    return None
