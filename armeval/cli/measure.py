"""``armeval measure``: how far did the tip stray?"""

from __future__ import annotations

from enum import StrEnum
from typing import TYPE_CHECKING, Annotated

import typer

from armeval.cli.answer import AsJson, Force, OutFolder, TrialFile

if TYPE_CHECKING:
    from armeval.evaluate.measure import Measurement


class Alignment(StrEnum):
    """What is taken out before the errors are summed up."""

    TIME = "time"
    RIGID = "rigid"


def measure(
    file: TrialFile,
    align: Annotated[
        Alignment,
        typer.Option("--align", help="rigid: also give the errors without one rigid offset of the arm's base."),
    ] = Alignment.TIME,
    out: OutFolder = None,
    as_json: AsJson = False,
    force: Force = False,
) -> None:
    """How far did the tip stray, according to the encoder logs?"""
    from armeval.cli.answer import hand_over
    from armeval.cli.progress_bar import ProgressBar
    from armeval.evaluate.measure import measure as measure_trial
    from armeval.files.trial_file import read_trial

    with ProgressBar() as progress:
        measurement = measure_trial(
            read_trial(file, progress=progress),
            align=align.value,
            progress=progress,
        )
    tables = {
        "measured": measurement.to_frame(),
        "laps": measurement.laps_frame(),
        "stretches": measurement.stretches_frame(),
        "criteria": measurement.criteria_frame(),
    }
    hand_over(
        measurement,
        measurement_text(measurement),
        tables,
        name="measure",
        findings=measurement.findings,
        as_json=as_json,
        out=out,
        force=force,
    )


def measurement_text(measurement: Measurement) -> str:
    """Write the measurement as tables: tip error of each run, of each lap, criteria, and the worst stretches."""
    from armeval.cli.criteria_tables import criteria_table, rigid_table, stretch_table
    from armeval.cli.error_tables import error_table, lap_table

    parts = [
        f"{measurement.trial}: measured tip error",
        error_table(measurement.runs),
        lap_table(measurement.runs),
        criteria_table(measurement.runs),
        stretch_table(measurement.runs),
    ]
    if measurement.rigid is not None:
        parts.append(rigid_table(measurement.rigid))
    return "\n\n".join(parts)
