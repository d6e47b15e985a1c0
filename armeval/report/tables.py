"""The tables of the report: for reading on the page, and as CSV files in SI units."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from armeval.evaluate.measuring.along_path import error_along_path
from armeval.evaluate.measuring.error_orders import ErrorOrders
from armeval.evaluate.measuring.joint_shares import JointShare
from armeval.evaluate.run_errors import RunErrors, criteria_frame, laps_frame, runs_frame, stretches_frame
from armeval.evaluate.sticking.regions import Region
from armeval.evaluate.sticking.sticking_event import StickingEvent
from armeval.report.answers import Answers
from armeval.report.shown import ShownRun
from armeval.report.verdict import fates_of, millimetres, percent
from armeval.units import significant

if TYPE_CHECKING:
    import pandas as pd

SHOWN_REGIONS = 12
"""So many regions of a run stand on the page; all are in the CSV file."""


@dataclass(frozen=True)
class Table:
    """A table for reading; the first ``words`` columns are text, the others numbers."""

    title: str
    head: tuple[str, ...]
    rows: tuple[tuple[str, ...], ...]
    words: int = 1
    note: str = ""


def runs_table(answers: Answers) -> Table:
    """Every run, measured and predicted: RMS, interval, percentiles."""
    rows = []
    for run in answers.trial.runs:
        state = "compensated" if run.compensated else "bare"
        measured = _measured(answers, run.name)
        for how, errors in (("measured", measured), ("predicted", answers.prediction.run(run.name).errors)):
            if errors is None:
                continue
            for kind, summary in (("tracking", errors.tracking), ("deviation", errors.deviation)):
                values = (summary.rms, summary.rms_low, summary.rms_high, summary.median, summary.p95, summary.max)
                rows.append((run.name, state, how, kind, *(millimetres(value) for value in values)))
    head = ("run", "state", "source", "error", "RMS [mm]", "low", "high", "median", "95th pct", "largest [mm]")
    return Table("All runs", head, tuple(rows), words=4, note="low and high: 95 % interval of the RMS.")


def laps_table(answers: Answers) -> Table | None:
    """Every measured lap; None without logs."""
    if answers.measurement is None:
        return None
    rows = [
        (
            run.name,
            f"{lap.lap}",
            millimetres(lap.tracking.rms),
            millimetres(lap.deviation.rms),
            f"{lap.duration:.2f}",
            "targets logged" if track.targets_logged else f"{1e3 * lap.time_offset:.1f} ms",
        )
        for run in answers.measurement.runs
        for lap, track in zip(run.laps, run.tracks, strict=True)
    ]
    head = ("run", "lap", "tracking RMS [mm]", "deviation RMS [mm]", "duration [s]", "alignment")
    return Table("Laps", head, tuple(rows), words=1)


def joints_table(runs: Sequence[ShownRun], shares: Sequence[tuple[JointShare, ...]], joints: Sequence[str]) -> Table:
    """Each joint's part in the tip error and its rests."""
    rows = []
    for index, joint in enumerate(joints):
        for run, of_joints in zip(runs, shares, strict=True):
            share = of_joints[index]
            rests = [rest for rest in run.sticking.events if rest.joint == joint]
            jumps = sum(jump.joint == joint for jump in run.sticking.jumps)
            rows.append(
                (
                    joint,
                    run.name,
                    percent(share.share) if math.isfinite(share.share) else "–",
                    millimetres(share.tip_rms),
                    f"{len(rests) / run.laps:.1f}",
                    f"{sum(event.dwell for event in rests) / run.laps:.2f}",
                    f"{jumps / run.laps:.1f}",
                    significant(float(run.predicted.ratio.max[index])),
                )
            )
    head = (
        "joint", "run", "share of squared tip error", "tip error alone, RMS [mm]", "rests a lap", "at rest [s a lap]",
        "jumps without rest a lap", "largest sticking ratio",
    )  # fmt: skip
    return Table("Joints", head, tuple(rows), words=2)


def regions_table(answers: Answers, runs: Sequence[ShownRun]) -> Table | None:
    """List the most harmful regions of the first run with what became of them; None where nothing sticks."""
    fate: dict[int, str] = {}
    if len(runs) == 2:
        fate = {pair.first: pair.fate for pair in fates_of(answers, runs) if pair.first is not None}
    return _regions(runs[0], fate)


def regions_after_table(runs: Sequence[ShownRun]) -> Table | None:
    """List the most harmful regions that the second run has; None where there is no second run, or nothing sticks."""
    return _regions(runs[1], {}) if len(runs) == 2 else None


def _regions(run: ShownRun, fate: Mapping[int, str]) -> Table | None:
    regions = run.sticking.regions
    if not regions:
        return None
    rows = [
        (*_region_cells(k, region), *([fate.get(k, "–")] if fate else []))
        for k, region in enumerate(regions[:SHOWN_REGIONS])
    ]
    head = (
        "no.", "joint", "cause", "from [mm]", "to [mm]", "laps", "rest [ms]", "lag [mm]", "release [mm]",
        "harm [%]", *(["afterwards"] if fate else []),
    )  # fmt: skip
    left = len(regions) - SHOWN_REGIONS
    note = "harm: share of the run's squared tip error that falls within the region. "
    if left > 0:
        note += f"{left} more, each less harmful, are in tables/regions.csv."
    return Table(f"Regions of {run.name}, the most harmful first", head, tuple(rows), words=3, note=note)


def causes_table(runs: Sequence[ShownRun]) -> Table | None:
    """Count regions and their harm by joint and cause, runs side by side; None where nothing sticks."""
    keys = dict.fromkeys((region.joint, region.cause) for run in runs for region in run.sticking.regions)
    rows = []
    for joint, cause in keys:
        cells = [joint, cause]
        for run in runs:
            same = [region for region in run.sticking.regions if (region.joint, region.cause) == (joint, cause)]
            cells += [f"{len(same)}", f"{100.0 * sum(region.harm for region in same):.1f}"]
        rows.append(tuple(cells))
    if not rows:
        return None
    head = ["joint", "cause"]
    for run in runs:
        head += [f"{run.name}: regions", "harm [%]"]
    note = "harm: share of the run's squared tip error that falls within these regions; regions may overlap."
    return Table("Causes of sticking", tuple(head), tuple(rows), words=2, note=note)


def routes_table(found: tuple[ShownRun, StickingEvent] | None) -> Table | None:
    """Tell what each way of looking says about the rest that is shown close up; None without one."""
    if found is None or not found[1].routes:
        return None
    _, event = found
    agreeing, able = event.agreement
    rows = tuple((route.name, route.says, route.text) for route in event.routes)
    by = "the one way of looking" if able == 1 else f"{agreeing} of the {able} ways of looking"
    note = f"Put down to {event.cause} by {by} that could tell." if able else "No way of looking could tell."
    return Table("Why it rested there", ("way of looking", "says", "because"), rows, words=3, note=note)


def _region_cells(place: int, region: Region) -> tuple[str, ...]:
    return (
        f"{place + 1}",
        region.joint,
        region.cause,
        f"{1e3 * region.start_arc:.1f}",
        f"{1e3 * region.end_arc:.1f}",
        f"{region.laps} of {region.of_laps}",
        f"{1e3 * region.dwell:.0f}",
        f"{1e3 * region.lag:.2f}",
        f"{1e3 * region.release_distance:.2f}",
        f"{100.0 * region.harm:.2f}",
    )


def stretches_table(runs: Sequence[ShownRun]) -> Table | None:
    """Errors of each stretch between two corners, runs side by side; None where they were not taken apart."""
    if not all(run.errors.stretches for run in runs):
        return None
    rows = []
    for of_runs in zip(*(run.errors.stretches for run in runs), strict=True):
        first = of_runs[0]
        cells = [f"{first.stretch}", f"{1e3 * first.start:.1f}", f"{1e3 * first.end:.1f}"]
        for stretch in of_runs:
            cells += [_known(stretch.tracking_rms), _known(stretch.deviation_rms), _known(stretch.tracking_max)]
        rows.append(tuple(cells))
    head = ["stretch", "from [mm]", "to [mm]"]
    for run in runs:
        head += [f"{run.name}: tracking RMS [mm]", "deviation RMS [mm]", "largest [mm]"]
    return Table("Stretches between corners", tuple(head), tuple(rows), words=0)


def criteria_table(runs: Sequence[RunErrors]) -> Table | None:
    """Path criteria of the standard for each measured run; None where there are none."""
    told = [(run.name, run.iso_9283) for run in runs if run.iso_9283 is not None]
    if not told:
        return None

    def row(name: str, symbol: str, unit: str, values: Sequence[float], scale: float) -> tuple[str, ...]:
        cells = (significant(scale * value) if math.isfinite(value) else "–" for value in values)
        return (name, symbol, unit, *cells)

    found = [criteria for _, criteria in told]
    rows = (
        row("path accuracy", "AT", "mm", [each.accuracy for each in found], 1e3),
        row("path repeatability", "RT", "mm", [each.repeatability for each in found], 1e3),
        row("velocity accuracy", "AV", "%", [each.velocity_accuracy for each in found], 1e2),
        row("velocity repeatability", "RV", "%", [each.velocity_repeatability for each in found], 1e2),
        row("velocity fluctuation", "FV", "mm/s", [each.velocity_fluctuation for each in found], 1e3),
        row("corner rounding, worst corner", "CR", "mm", [each.corner_rounding for each in found], 1e3),
        row("corner overshoot, worst corner", "CO", "mm", [each.corner_overshoot for each in found], 1e3),
    )
    notes = dict.fromkeys(note for criteria in found for note in criteria.notes)
    note = "; ".join(notes)
    return Table(
        "Path criteria of ISO 9283",
        ("criterion", "symbol", "unit", *(name for name, _ in told)),
        rows,
        words=3,
        note=f"{note}." if note else "",
    )


def frames(
    answers: Answers,
    runs: Sequence[ShownRun],
    shares: Sequence[tuple[JointShare, ...]],
    spectra: dict[str, list[tuple[ShownRun, ErrorOrders]]],
) -> dict[str, pd.DataFrame]:
    """Give every table as a data frame in SI units, by the name of its CSV file."""
    import pandas as pd

    length, chain = answers.trajectory.length, answers.trial.arm.chain
    units = {joint: "m" if slides else "rad" for joint, slides in zip(chain.joints, chain.prismatic, strict=True)}
    measured = list(answers.measurement.runs) if answers.measurement is not None else []
    predicted = [run.errors for run in answers.prediction.runs]
    found = {
        "predicted": runs_frame(predicted),
        "regions": answers.location.regions_frame(),
        "events": answers.location.to_frame(),
        "sticking_ratio": pd.concat(
            [run.ratio.to_frame().assign(run=run.name) for run in answers.prediction.runs], ignore_index=True
        ),
        "joints": pd.DataFrame(
            [
                {
                    "run": run.name,
                    "source": run.source,
                    "joint": share.joint,
                    "error_rms": share.error_rms,
                    "error_unit": units[share.joint],
                    "tip_error_alone_rms_m": share.tip_rms,
                    "share_of_squared_tip_error": share.share,
                }
                for run, of_joints in zip(runs, shares, strict=True)
                for share in of_joints
            ]
        ),
        "along_path": pd.concat([_along(run, "log", length) for run in measured]
                                + [_along(run, "prediction", length) for run in predicted], ignore_index=True),
    }  # fmt: skip
    found["budget"] = answers.budget.to_frame()
    if answers.feel is not None:
        found |= {"hand_force": answers.feel.to_frame(), "hand_ripple": answers.feel.lines_frame()}
    bands = [
        run.ensemble.to_frame().assign(run=run.name) for run in answers.prediction.runs if run.ensemble is not None
    ]
    if bands:
        found["predicted_band"] = pd.concat(bands, ignore_index=True)
    if measured:
        found["measured"] = runs_frame(measured)
        found["laps"] = laps_frame(measured)
        found["stretches"] = stretches_frame(measured)
        found["criteria"] = criteria_frame(measured)
    if spectra:
        found["error_orders"] = pd.concat(
            [
                pd.DataFrame({"order": spectrum.order, "amplitude": spectrum.amplitude}).assign(
                    unit=units[joint], run=run.name, joint=joint
                )
                for joint, entries in spectra.items()
                for run, spectrum in entries
            ],
            ignore_index=True,
        )
    return found


def _along(run: RunErrors, source: str, length: float) -> pd.DataFrame:
    import pandas as pd

    error = error_along_path(run.tracks, length)
    columns = {"at_m": error.arc, "rms_m": error.rms, "best_lap_m": error.low, "worst_lap_m": error.high}
    return pd.DataFrame(columns).assign(run=run.name, source=source)


def _measured(answers: Answers, name: str) -> RunErrors | None:
    runs = answers.measurement.runs if answers.measurement is not None else ()
    return next((run for run in runs if run.name == name), None)


def _known(metres: float) -> str:
    return millimetres(metres) if np.isfinite(metres) else "–"
