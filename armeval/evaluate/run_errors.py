"""Tip error of a run and of each of its laps; the same for measured and predicted runs."""

from __future__ import annotations

import os
from collections.abc import Sequence
from concurrent.futures import ThreadPoolExecutor
from dataclasses import dataclass
from typing import TYPE_CHECKING

from armeval.evaluate.document import JsonValue
from armeval.evaluate.lap_track import LapTrack
from armeval.evaluate.measuring.criteria import Components, StretchErrors, components, lap_sums, over_laps, stretches
from armeval.evaluate.measuring.iso_9283 import PathCriteria, path_criteria
from armeval.evaluate.summary import ErrorSummary, summarise
from armeval.model.trajectory import Trajectory

if TYPE_CHECKING:
    import pandas as pd


@dataclass(frozen=True)
class LapErrors:
    """Tracking error and path deviation of one lap; its components where the path is known."""

    lap: int
    file: str | None
    duration: float
    time_offset: float
    tracking: ErrorSummary
    deviation: ErrorSummary
    components: Components | None = None

    def to_document(self) -> dict[str, JsonValue]:
        """Give the lap's entry in the JSON document."""
        return {
            "lap": self.lap,
            "file": self.file,
            "duration_s": self.duration,
            "time_offset_s": self.time_offset,
            "tracking": self.tracking.to_document(),
            "deviation": self.deviation.to_document(),
            **(self.components.to_document() if self.components else {}),
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
    components, stretches, iso_9283
        Along and across the path; stretch by stretch; path criteria of the standard. None and empty where the planned
        path was not given.
    """

    name: str
    compensated: bool
    tracking: ErrorSummary
    deviation: ErrorSummary
    laps: tuple[LapErrors, ...]
    tracks: tuple[LapTrack, ...]
    components: Components | None = None
    stretches: tuple[StretchErrors, ...] = ()
    iso_9283: PathCriteria | None = None

    def to_document(self) -> dict[str, JsonValue]:
        """Give the run's entry in the JSON document."""
        entry: dict[str, JsonValue] = {
            "name": self.name,
            "compensated": self.compensated,
            "tracking": self.tracking.to_document(),
            "deviation": self.deviation.to_document(),
            "laps": [lap.to_document() for lap in self.laps],
        }
        if self.components is not None:
            entry.update(self.components.to_document())
            entry["stretches"] = [stretch.to_document() for stretch in self.stretches]
        if self.iso_9283 is not None:
            entry["iso_9283"] = self.iso_9283.to_document()
        return entry


def run_errors(tracks: Sequence[LapTrack], trajectory: Trajectory | None = None) -> RunErrors:
    """Sum up the laps of one run.

    Parameters
    ----------
    tracks
        At least one lap.
    trajectory
        The plan; with it errors are also told along and across the path, by stretch and the standard's way.
    """
    with ThreadPoolExecutor(os.cpu_count()) as pool:
        standard = pool.submit(path_criteria, tracks, trajectory) if trajectory is not None else None
        sums = [pool.submit(lap_sums, track, trajectory) for track in tracks] if trajectory is not None else []
        tracking = list(pool.map(lambda track: track.tracking, tracks))
        deviation = [track.deviation for track in tracks]
        of_laps = [[pool.submit(summarise, [error]) for error in errors] for errors in (tracking, deviation)]
        # Of a single lap the lap's figures are the run's.
        of_run = [
            found[0] if len(tracks) == 1 else pool.submit(summarise, errors)
            for found, errors in zip(of_laps, (tracking, deviation), strict=True)
        ]
    found_sums = [future.result() for future in sums]
    laps = tuple(
        LapErrors(
            lap=track.lap,
            file=track.file,
            duration=track.duration,
            time_offset=track.time_offset,
            tracking=of_laps[0][i].result(),
            deviation=of_laps[1][i].result(),
            components=components(found_sums[i]) if found_sums else None,
        )
        for i, track in enumerate(tracks)
    )
    joined = over_laps(found_sums) if found_sums else None
    return RunErrors(
        name=tracks[0].run,
        compensated=tracks[0].compensated,
        tracking=of_run[0].result(),
        deviation=of_run[1].result(),
        laps=laps,
        tracks=tuple(tracks),
        components=components(joined) if joined is not None else None,
        stretches=stretches(joined, trajectory.corners) if joined is not None and trajectory is not None else (),
        iso_9283=standard.result() if standard is not None else None,
    )


def runs_frame(runs: Sequence[RunErrors]) -> pd.DataFrame:
    """One row a run and kind of error, lengths in metres."""
    import pandas as pd

    return pd.DataFrame(
        [
            {"run": run.name, "compensated": run.compensated, "error": kind, **summary.to_document()}
            for run in runs
            for kind, summary in (("tracking", run.tracking), ("deviation", run.deviation))
        ]
    )


def laps_frame(runs: Sequence[RunErrors]) -> pd.DataFrame:
    """One row a run, lap and kind of error, lengths in metres."""
    import pandas as pd

    return pd.DataFrame(
        [
            {
                "run": run.name,
                "lap": lap.lap,
                "file": lap.file,
                "duration_s": lap.duration,
                "time_offset_s": lap.time_offset,
                "error": kind,
                **summary.to_document(),
            }
            for run in runs
            for lap in run.laps
            for kind, summary in (("tracking", lap.tracking), ("deviation", lap.deviation))
        ]
    )


def stretches_frame(runs: Sequence[RunErrors]) -> pd.DataFrame:
    """One row a run and stretch of path, lengths in metres."""
    import pandas as pd

    return pd.DataFrame([{"run": run.name, **stretch.to_document()} for run in runs for stretch in run.stretches])


def criteria_frame(runs: Sequence[RunErrors]) -> pd.DataFrame:
    """One row a run: components of the error, lag, and the path criteria of ISO 9283, SI units."""
    import pandas as pd

    rows = []
    for run in runs:
        standard = run.iso_9283.to_document() if run.iso_9283 else {}
        single = {key: value for key, value in standard.items() if not isinstance(value, list | dict)}
        rows.append({"run": run.name, **(run.components.to_document() if run.components else {}), **single})
    return pd.DataFrame(rows)
