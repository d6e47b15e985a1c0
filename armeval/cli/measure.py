"""``armeval measure``: how far did the tip stray?"""

from __future__ import annotations

from typing import TYPE_CHECKING

from armeval.cli.answer import AsJson, Force, OutFolder, TrialFile

if TYPE_CHECKING:
    from armeval.evaluate.measure import Measurement


def measure(file: TrialFile, out: OutFolder = None, as_json: AsJson = False, force: Force = False) -> None:
    """How far did the tip stray, according to the encoder logs?"""
    from armeval.cli.answer import hand_over
    from armeval.cli.progress_bar import ProgressBar
    from armeval.evaluate.measure import measure as measure_trial
    from armeval.files.trial_file import read_trial

    with ProgressBar() as progress:
        measurement = measure_trial(read_trial(file, progress=progress), progress=progress)
    tables = {"measured": measurement.to_frame()}
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
    """Write the measurement as tables: tip error of each run, then of each lap."""
    from armeval.cli.error_tables import error_table, lap_table

    parts = [
        f"{measurement.trial}: measured tip error",
        error_table(measurement.runs),
        lap_table(measurement.runs),
    ]
    return "\n\n".join(parts)
