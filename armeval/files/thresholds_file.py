"""Perception thresholds from their TOML file: the shipped one, or the user's own."""

from __future__ import annotations

import os
from pathlib import Path
from typing import Annotated, Any

import numpy as np
from annotated_types import Ge, Len
from pydantic import Field

from armeval.errors import Findings, InputError
from armeval.files.quantities import Unit
from armeval.files.toml_file import Table, check_schema, read_toml, validate
from armeval.model.thresholds import Thresholds

THRESHOLDS_SCHEMA = "armeval/thresholds/1"

_Share = Annotated[float, Unit("", above=0.0)]


class ForceTable(Table):
    """``[force]``: changes of force."""

    share: _Share
    share_low: _Share
    share_high: _Share
    force_range: Annotated[list[Annotated[float, Unit("N", least=0.0)]], Len(2, 2)]
    highest_frequency: Annotated[float, Unit("Hz", above=0.0)]
    source: str = ""


class VibrationTable(Table):
    """``[vibration]``: displacement of the handle."""

    frequency: Annotated[list[Annotated[float, Unit("Hz", above=0.0)]], Len(2)]
    displacement: Annotated[list[Annotated[float, Unit("m", above=0.0)]], Len(2)]
    spread: Annotated[float, Unit("", above=0.0), Ge(1.0)]
    hand_mass: Annotated[float, Unit("kg", least=0.0)]
    source: str = ""


class ThresholdsTable(Table):
    """The whole file."""

    schema_: Any = Field(default=THRESHOLDS_SCHEMA, alias="schema")
    force: ForceTable
    vibration: VibrationTable


def shipped_thresholds() -> Path:
    """Give the file of the thresholds that come with the program; copy it to edit it."""
    return Path(__file__).with_name("thresholds.toml")


def read_thresholds(path: str | os.PathLike[str] | None = None) -> Thresholds:
    """Read perception thresholds.

    Parameters
    ----------
    path
        The file; None: the shipped one.

    Raises
    ------
    InputError
        With all faults of the file.
    """
    file = shipped_thresholds() if path is None else Path(path)
    found = Findings(os.fspath(file))
    content = read_toml(file)
    table = validate(ThresholdsTable, content, found) if check_schema(content, THRESHOLDS_SCHEMA, found) else None
    if table is None or found.has_errors:
        raise InputError.of(found.found)
    force, vibration = table.force, table.vibration
    try:
        return Thresholds(
            force_share=force.share,
            force_share_low=force.share_low,
            force_share_high=force.share_high,
            force_range=(force.force_range[0], force.force_range[1]),
            highest_force_frequency=force.highest_frequency,
            vibration_frequency=np.array(vibration.frequency),
            vibration_displacement=np.array(vibration.displacement),
            vibration_spread=vibration.spread,
            hand_mass=vibration.hand_mass,
            force_source=" ".join(force.source.split()),
            vibration_source=" ".join(vibration.source.split()),
            source="" if path is None else os.fspath(path),
        )
    except InputError as fault:
        raise fault.placed(file=file) from None
