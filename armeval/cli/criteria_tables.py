"""Components of the tip error, and the standard's criteria, as text."""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence

import numpy as np

from armeval.cli.text_table import text_table
from armeval.evaluate.measuring.iso_9283 import PathCriteria
from armeval.evaluate.measuring.rigid import RigidAlignment
from armeval.evaluate.run_errors import RunErrors
from armeval.units import angle_text, length_text, significant, time_text

_STRETCHES_SHOWN = 5


def _or_dash(value: float, write: Callable[[float], str]) -> str:
    return write(value) if math.isfinite(value) else "-"


def _percent(share: float) -> str:
    return f"{significant(100.0 * share)} %"


def _speed(metres_per_second: float) -> str:
    return f"{significant(1e3 * metres_per_second)} mm/s"


_ISO: tuple[tuple[str, str, Callable[[PathCriteria], float], Callable[[float], str]], ...] = (
    ("path accuracy AT", "the laps' mean off the path at its worst", lambda c: c.accuracy, length_text),
    ("path repeatability RT", "scatter between laps at its worst", lambda c: c.repeatability, length_text),
    ("velocity accuracy AV", "mean speed off the commanded one", lambda c: c.velocity_accuracy, _percent),
    ("velocity repeatability RV", "scatter of lap speeds", lambda c: c.velocity_repeatability, _percent),
    ("velocity fluctuation FV", "fastest less slowest in a lap", lambda c: c.velocity_fluctuation, _speed),
    ("corner rounding CR", "worst corner cut", lambda c: c.corner_rounding, length_text),
    ("corner overshoot CO", "worst shot beyond a corner", lambda c: c.corner_overshoot, length_text),
)


def criteria_table(runs: Sequence[RunErrors]) -> str:
    """One row a criterion, one column a run, and what it means; below it, where laps are too few for the standard."""
    rows: list[list[str]] = []
    parts = [run.components for run in runs]
    rows += [
        ["along the path, rms", *(length_text(c.along_rms) if c else "-" for c in parts), "early or late"],
        ["across the path, rms", *(length_text(c.across_rms) if c else "-" for c in parts), "beside the path"],
        ["lag, mean", *(length_text(c.lag_mean) if c else "-" for c in parts), "how far the tip trails its target"],
        [
            "lag in time",
            *(_or_dash(c.lag_time, time_text) if c else "-" for c in parts),
            "the one delay that fits best",
        ],
    ]
    for name, meaning, value, write in _ISO:
        cells = [_or_dash(value(run.iso_9283), write) if run.iso_9283 is not None else "-" for run in runs]
        rows.append([name, *cells, meaning])
    table = text_table(["criterion", *(run.name for run in runs), "meaning"], rows)
    notes = dict.fromkeys(note for run in runs if run.iso_9283 is not None for note in run.iso_9283.notes)
    return "\n".join([table, *notes])


def stretch_table(runs: Sequence[RunErrors]) -> str:
    """Show the stretches with the largest tracking error of each run, worst first."""
    rows = []
    for run in runs:
        worst = np.argsort([-stretch.tracking_rms for stretch in run.stretches], kind="stable")[:_STRETCHES_SHOWN]
        for stretch in (run.stretches[i] for i in worst):
            rows.append(
                [
                    run.name,
                    f"{1e3 * stretch.start:.1f} to {1e3 * stretch.end:.1f} mm",
                    length_text(stretch.tracking_rms),
                    length_text(stretch.deviation_rms),
                    length_text(stretch.components.lag_mean, 2),
                ]
            )
    return text_table(["run", "worst stretches", "tracking rms", "deviation rms", "lag, mean"], rows)


def rigid_table(rigid: RigidAlignment) -> str:
    """Show what is left without one rigid offset of the base."""
    rows = [[run.name, length_text(run.tracking.rms), length_text(run.deviation.rms)] for run in rigid.runs]
    shift = length_text(float(np.linalg.norm(rigid.translation)))
    turn = angle_text(float(np.linalg.norm(rigid.rotation)))
    head = f"without one rigid offset of the base ({shift}, {turn}):"
    return head + "\n" + text_table(["run", "tracking rms", "deviation rms"], rows)
