"""Tip error of a run and of each of its laps; the same for measured and predicted runs."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

from armeval.evaluate.document import JsonValue
from armeval.evaluate.lap_track import LapTrack
from armeval.evaluate.summary import ErrorSummary, summarise

if TYPE_CHECKING:
    import pandas as pd


@dataclass(frozen=True)
class LapErrors:
    """Tracking error and path deviation of one lap."""

    lap: int
    file: str | None
    duration: float
    time_offset: float
    tracking: ErrorSummary
    deviation: ErrorSummary

    def to_document(self) -> dict[str, JsonValue]:
        """Give the lap's entry in the JSON document."""
        return {
            "lap": self.lap,
            "file": self.file,
            "duration_s": self.duration,
            "time_offset_s": self.time_offset,
            "tracking": self.tracking.to_document(),
            "deviation": self.deviation.to_document(),
        }


@dataclass(frozen=True, eq=False)
class RunErrors:
    """Tracking error and path deviation of a run over all its laps.

    Attributes
    ----------
    name, compensated
        The run.
    tracking, deviation
        Over all laps together.
    laps
        Each lap alone.
    tracks
        The laps sample by sample.
    """

    name: str
    compensated: bool
    tracking: ErrorSummary
    deviation: ErrorSummary
    laps: tuple[LapErrors, ...]
    tracks: tuple[LapTrack, ...]

    def to_document(self) -> dict[str, JsonValue]:
        """Give the run's entry in the JSON document."""
        return {
            "name": self.name,
            "compensated": self.compensated,
            "tracking": self.tracking.to_document(),
            "deviation": self.deviation.to_document(),
            "laps": [lap.to_document() for lap in self.laps],
        }


def run_errors(tracks: Sequence[LapTrack]) -> RunErrors:
    """Sum up the laps of one run (at least one)."""
    laps = tuple(
        LapErrors(
            lap=track.lap,
            file=track.file,
            duration=track.duration,
            time_offset=track.time_offset,
            tracking=summarise([track.tracking]),
            deviation=summarise([track.deviation]),
        )
        for track in tracks
    )
    return RunErrors(
        name=tracks[0].run,
        compensated=tracks[0].compensated,
        tracking=summarise([track.tracking for track in tracks]),
        deviation=summarise([track.deviation for track in tracks]),
        laps=laps,
        tracks=tuple(tracks),
    )


def runs_frame(runs: Sequence[RunErrors]) -> pd.DataFrame:
    """One row a run and kind of error, lengths in metres."""
    import pandas as pd

    rows = []
    for run in runs:
        for kind, summary in (("tracking", run.tracking), ("deviation", run.deviation)):
            rows.append({"run": run.name, "compensated": run.compensated, "error": kind, **summary.to_document()})
    return pd.DataFrame(rows)
