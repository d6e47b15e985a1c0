"""Where a report comes from: every file that was read, every version, every parameter."""

from __future__ import annotations

import hashlib
import importlib.metadata
import os
import platform
from dataclasses import dataclass, fields, is_dataclass
from pathlib import Path

import numpy as np

from armeval._version import __version__
from armeval.evaluate.document import JsonValue
from armeval.model.trial import Trial

_LIBRARIES = ("numpy", "scipy", "pandas", "pin", "numba", "matplotlib", "pint", "pyarrow", "jinja2")


@dataclass(frozen=True)
class FileRecord:
    """One input file: its name as seen from the trial's folder, its size in bytes and its SHA-256."""

    name: str
    size: int
    sha256: str


@dataclass(frozen=True)
class Provenance:
    """Where a report comes from.

    Attributes
    ----------
    files
        Every file that was read.
    versions
        Program, Python and libraries, with their versions.
    parameters
        What the trial and its arm set, defaults included; names and values as text, SI units.
    command
        The command line; empty where it was called from Python.
    """

    files: tuple[FileRecord, ...]
    versions: tuple[tuple[str, str], ...]
    parameters: tuple[tuple[str, str], ...]
    command: str

    def to_document(self) -> dict[str, JsonValue]:
        """Give the entry in the JSON document."""
        return {
            "command": self.command,
            "files": [{"file": entry.name, "bytes": entry.size, "sha256": entry.sha256} for entry in self.files],
            "versions": dict(self.versions),
            "parameters": dict(self.parameters),
        }


def provenance(trial: Trial, command: str = "") -> Provenance:
    """Gather where a report on a trial comes from."""
    home = Path(trial.source).absolute().parent if trial.source else Path.cwd()
    return Provenance(
        files=tuple(_record(Path(file), home) for file in dict.fromkeys(trial.files)),
        versions=(
            ("armeval", __version__),
            ("Python", platform.python_version()),
            *((name, importlib.metadata.version(name)) for name in _LIBRARIES),
        ),
        parameters=tuple(_parameters(trial)),
        command=command,
    )


def _record(file: Path, home: Path) -> FileRecord:
    digest = hashlib.sha256()
    with file.open("rb") as stream:
        while block := stream.read(1 << 20):
            digest.update(block)
    name = os.path.relpath(file.absolute(), home)
    return FileRecord(Path(name).as_posix(), file.stat().st_size, digest.hexdigest())


def _parameters(trial: Trial) -> list[tuple[str, str]]:
    found = [(name, _text(getattr(trial, name))) for name in ("feed", "acceleration", "corner_angle")]
    for name, part in (
        ("compensation", trial.compensation),
        ("sticking", trial.sticking),
        ("uncertainty", trial.uncertainty),
        ("servo", trial.arm.servo),
    ):
        found.extend((f"{name}.{field.name}", _text(getattr(part, field.name))) for field in fields(part))
    found.append(("gravity", _text(trial.arm.gravity)))
    for drive in trial.arm.drives:
        for field in fields(drive):
            value = getattr(drive, field.name)
            if field.name != "joint" and not is_dataclass(value):
                found.append((f"joint.{drive.joint}.{field.name}", _text(value)))
    return found


def _text(value: object) -> str:
    if value is None:
        return "not given"
    if isinstance(value, np.ndarray):
        return ", ".join(f"{entry:.9g}" for entry in value.tolist())
    return f"{value:.9g}" if isinstance(value, float) else str(value)
