"""Tip errors of runs and laps as text."""

from __future__ import annotations

from collections.abc import Sequence

from armeval.cli.text_table import text_table
from armeval.evaluate.run_errors import RunErrors
from armeval.evaluate.summary import ErrorSummary
from armeval.units import significant

_HEAD = ["rms", "95 % interval", "mean", "median", "95th pct", "max", "samples"]


def _cells(summary: ErrorSummary) -> list[str]:
    def mm(metres: float) -> str:
        return f"{significant(1e3 * metres)} mm"

    interval = f"{significant(1e3 * summary.rms_low)} to {significant(1e3 * summary.rms_high)} mm"
    return [
        mm(summary.rms),
        interval,
        mm(summary.mean),
        mm(summary.median),
        mm(summary.p95),
        mm(summary.max),
        f"{summary.samples}",
    ]


def error_table(runs: Sequence[RunErrors]) -> str:
    """One row a run and kind of error."""
    rows = [
        [run.name, kind, *_cells(summary)]
        for run in runs
        for kind, summary in (("tracking", run.tracking), ("path deviation", run.deviation))
    ]
    return text_table(["run", "error", *_HEAD], rows)


def lap_table(runs: Sequence[RunErrors]) -> str:
    """One row a lap: its RMS, duration and file."""
    rows = [
        [
            run.name,
            f"{lap.lap}",
            f"{significant(1e3 * lap.tracking.rms)} mm",
            f"{significant(1e3 * lap.deviation.rms)} mm",
            f"{lap.duration:.2f} s",
            f"{lap.time_offset:.4f} s" if lap.time_offset else "targets logged",
            lap.file or "",
        ]
        for run in runs
        for lap in run.laps
    ]
    return text_table(["run", "lap", "tracking rms", "deviation rms", "duration", "time offset", "file"], rows)
