"""Writing so that a reader finds all of it or nothing of it, and never over somebody's files unasked."""

from __future__ import annotations

import os
import secrets
import shutil
from collections.abc import Iterator
from contextlib import contextmanager, suppress
from pathlib import Path

from armeval.errors import InputError
from armeval.files.text_file import what_is_there


@contextmanager
def write_folder(target: str | os.PathLike[str], *, force: bool = False) -> Iterator[Path]:
    """Fill a folder that appears whole when the context ends, and not at all when it fails.

    Parameters
    ----------
    target
        The folder to make; an empty one that is there already will do.
    force
        Write into a folder that holds files: those of the same name are replaced, one by one, and all others are kept.

    Yields
    ------
    A hidden folder, to be filled.

    Raises
    ------
    InputError
        If the target is a file, or holds files and ``force`` is not set; if it may not be written, or the disk is full.
    """
    folder = Path(target)
    try:
        _refuse_taken(folder, force)
        place = folder.resolve()
        with _filled_beside(place) as filled:
            yield filled
            _refuse_taken(folder, force, besides=filled.name)
            _move(filled, place)
    except OSError as fault:
        raise _unwritable(folder, fault) from fault


@contextmanager
def _filled_beside(place: Path) -> Iterator[Path]:
    """Make the hidden folder, on the disk that the target is on; it goes when the context ends.

    It stands beside a target that is not there yet, and inside one that is: that one may be another disk's root, the
    current folder, or the only place where writing is allowed.
    """
    missing = [folder for folder in place.parents if not folder.exists()]
    home = place if place.exists() else place.parent
    try:
        home.mkdir(parents=True, exist_ok=True)
        filled = home / f".{place.name}.{secrets.token_hex(4)}"
        filled.mkdir()
        try:
            yield filled
        finally:
            shutil.rmtree(filled, ignore_errors=True)
    except BaseException:
        for folder in missing:
            with suppress(OSError):
                folder.rmdir()
        raise


def write_text(file: str | os.PathLike[str], text: str) -> Path:
    """Write a text file that appears whole or not at all.

    Raises
    ------
    InputError
        If it cannot be written there.
    """
    path = Path(file)
    part = path.with_name(f".{path.name}.part")
    try:
        path.parent.mkdir(parents=True, exist_ok=True)
        try:
            part.write_text(text, encoding="utf-8")
            part.replace(path)
        finally:
            part.unlink(missing_ok=True)
    except OSError as fault:
        raise _unwritable(path, fault) from fault
    return path


def _refuse_taken(folder: Path, force: bool, besides: str = "") -> None:
    """Raise an error where something stands that must not be written over."""
    if not folder.exists() and not folder.is_symlink():
        return
    if not folder.is_dir():
        raise InputError("a file stands where a folder is to be written", "choose another name", file=folder)
    if not force and any(entry.name != besides for entry in folder.iterdir()):
        raise InputError(
            "the folder is not empty", f"choose another, or use --force; {what_is_there(folder)}", file=folder
        )


def _move(filled: Path, place: Path) -> None:
    """Put what was written where it belongs: the whole folder, or its files into the one that is there."""
    if not place.exists():
        filled.rename(place)
        return
    written = sorted(file.relative_to(filled) for file in filled.rglob("*"))
    for part in written:
        if (place / part).exists() and (place / part).is_dir() != (filled / part).is_dir():
            raise InputError("a file and a folder have the same name", "choose another folder", file=place / part)
    for part in written:
        if (filled / part).is_dir():
            (place / part).mkdir(exist_ok=True)
        else:
            (filled / part).replace(place / part)


def _unwritable(target: Path, fault: OSError) -> InputError:
    reason = fault.strerror or str(fault)
    at = f" in `{Path(os.fsdecode(fault.filename)).parent}`" if isinstance(fault.filename, str | bytes) else ""
    return InputError(
        f"it cannot be written: {reason[:1].lower()}{reason[1:]}{at}",
        "choose a place that you may write to, with room on the disk",
        file=target,
    )
