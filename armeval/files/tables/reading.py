"""What every reader does first and last: find the file, and hand on what was found in it."""

from __future__ import annotations

import os
import warnings
from pathlib import Path
from types import TracebackType

from armeval.errors import Findings, InputError, InputWarning, near


class Reading:
    """The reading of one file, as a context: gathers its findings and hands them on when it ends.

    An :class:`InputError` raised inside is joined to the errors noted so far, and all of them leave as one. Without an
    error the warnings go to ``listener``, or where there is none to :func:`warnings.warn`.

    Parameters
    ----------
    path
        The file as the user named it.
    listener
        Who gathers the warnings; None: Python's own warnings, as :class:`InputWarning`.
    """

    def __init__(self, path: str | os.PathLike[str], listener: Findings | None) -> None:
        self.found = Findings(os.fspath(path))
        self._listener = listener

    def __enter__(self) -> Findings:
        return self.found

    def __exit__(
        self, kind: type[BaseException] | None, fault: BaseException | None, trace: TracebackType | None
    ) -> None:
        if isinstance(fault, InputError):
            known = set(self.found.found)
            self.found.extend(each for each in fault.placed(file=self.found.file).findings if each not in known)
            raise InputError.of(self.found.found) from fault.__cause__
        if fault is not None:
            return
        self.found.raise_errors()
        if self._listener is not None:
            self._listener.extend(self.found.warnings)
            return
        for warning in self.found.warnings:
            warnings.warn(str(warning), InputWarning, stacklevel=3)


def existing_file(path: str | os.PathLike[str]) -> Path:
    """Give the path of a file that is there and can be read.

    Raises
    ------
    InputError
        If it is missing (with a name near to it, if there is one), is a directory, or may not be read.
    """
    file = Path(path)
    try:
        with file.open("rb"):
            return file
    except FileNotFoundError as fault:
        raise InputError("there is no such file", _near_names(file), file=path) from fault
    except IsADirectoryError as fault:
        raise InputError("it is a directory", "name a file in it", file=path) from fault
    except PermissionError as fault:
        if file.is_dir():
            raise InputError("it is a directory", "name a file in it", file=path) from fault
        raise InputError("it may not be read", "give yourself permission to read it", file=path) from fault
    except (OSError, ValueError) as fault:
        raise InputError(f"it cannot be opened: {fault}", "name a file that can be read", file=path) from fault


def _near_names(file: Path) -> str:
    """Say what in the directory may have been meant."""
    parent = file.parent
    if not parent.is_dir():
        return f"there is no directory `{parent}` either"
    names = [entry.name for entry in parent.iterdir() if entry.is_file()]
    if not names:
        return f"the directory `{parent}` holds no files"
    hint = near(file.name, names)
    return hint if hint.startswith("did you mean") else f"look in the directory `{parent}`"
