"""Text out of a file, or a plain word on why not."""

from __future__ import annotations

import os
from pathlib import Path

from armeval.errors import InputError
from armeval.files.tables.reading import existing_file

_SHOWN = 8


def read_text(path: str | os.PathLike[str]) -> str:
    """Read a whole UTF-8 file; a byte order mark is dropped.

    Raises
    ------
    InputError
        If there is no such file, it is a directory, may not be read, is empty or not UTF-8.
    """
    try:
        content = existing_file(path).read_bytes()
    except OSError as fault:
        raise InputError(f"it cannot be read: {fault.strerror}", "give another file", file=path) from fault
    try:
        text = content.decode("utf-8-sig")
    except UnicodeDecodeError as fault:
        line = content.count(b"\n", 0, fault.start) + 1
        raise InputError("the text is not UTF-8", "save it as UTF-8", file=path, place=f"line {line}") from fault
    if not text.strip():
        raise InputError("the file is empty", "fill it, or give another file", file=path)
    return text


def what_is_there(folder: Path) -> str:
    """Say what a folder holds, where something looked for in it was not found."""
    if not folder.is_dir():
        there = next((above for above in folder.parents if above.is_dir()), Path())
        return f"there is no directory `{folder}`; {what_is_there(there)}"
    try:
        names = sorted(entry.name for entry in folder.iterdir() if not entry.name.startswith("."))
    except OSError as fault:
        return f"the directory `{folder}` cannot be read: {fault.strerror}"
    if not names:
        return f"the directory `{folder}` is empty"
    more = f" and {len(names) - _SHOWN} more" if len(names) > _SHOWN else ""
    return f"the directory `{folder}` holds " + ", ".join(f"`{name}`" for name in names[:_SHOWN]) + more
