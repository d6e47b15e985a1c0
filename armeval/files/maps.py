"""The cog maps that a trial or an arm names, read without its logs."""

from __future__ import annotations

import os
from dataclasses import dataclass
from pathlib import Path

from armeval.errors import Finding, Findings, InputError
from armeval.files.arm_file import read_arm
from armeval.files.arm_table import ARM_SCHEMA
from armeval.files.toml_file import read_toml
from armeval.files.trial_file import read_trial
from armeval.files.trial_table import TRIAL_SCHEMA
from armeval.model.arm import Arm
from armeval.model.trial import Compensation


@dataclass(frozen=True, eq=False)
class MapsReading:
    """An arm with its maps, what the firmware's table can do, and what was doubtful."""

    title: str
    arm: Arm
    compensation: Compensation
    findings: tuple[Finding, ...]


def read_maps(path: str | os.PathLike[str]) -> MapsReading:
    """Read the arm of a ``trial.toml``, or an ``arm.toml``.

    Raises
    ------
    InputError
        If it is neither, or holds faults.
    """
    schema = read_toml(path).get("schema")
    if schema == TRIAL_SCHEMA:
        trial = read_trial(path, logs=False)
        return MapsReading(trial.title, trial.arm, trial.compensation, trial.findings)
    if schema == ARM_SCHEMA:
        found = Findings(os.fspath(path))
        arm = read_arm(path, findings=found)
        return MapsReading(arm.name, arm, Compensation(), found.warnings)
    raise InputError(
        f"its schema is {schema!r}" if schema is not None else "it names no schema",
        f'give a file with `schema = "{TRIAL_SCHEMA}"` or `schema = "{ARM_SCHEMA}"`',
        file=Path(path),
    )
