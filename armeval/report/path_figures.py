"""Figures of the report about the path: the tip along it, error and regions against its length, the arm beside it."""

from __future__ import annotations

from collections.abc import Mapping, Sequence

import numpy as np
from matplotlib.figure import Figure

from armeval.evaluate.measuring.along_path import ErrorAlongPath, error_along_path
from armeval.evaluate.sticking.regions import Region
from armeval.kernels.chain import skeletons
from armeval.plots.along_path import along_path_plot, band_plot
from armeval.plots.path import mark_stretch, path_plot
from armeval.plots.pose import pose_plot
from armeval.plots.sticking import region_lanes
from armeval.plots.style import figure, label_text, strip_figure
from armeval.plots.summary import SummaryRow, summary_plot
from armeval.plots.view import broad_view, side_view
from armeval.report.answers import Answers
from armeval.report.drawing import Plan, box, data_map
from armeval.report.shown import ShownRun

NUMBERED = 6
"""So many regions, the most harmful first, carry a number in figures."""
"""So many regions, the most harmful first, carry a number in figures."""

_SMALL = 2.0  # inches: half a hand-held screen


def path_figure(answers: Answers, runs: Sequence[ShownRun]) -> Plan:
    """Plan the path with target, before and after, and the numbered regions."""
    plan = answers.trajectory
    view = broad_view(plan.path)
    extent = [float(np.ptp(side)) for side in view.of(plan.path)]
    shape = min(0.9, max(0.45, 0.15 + extent[1] / max(extent[0], 1e-9)))
    together = numbers_together(runs[0].sticking.regions[:NUMBERED], 0.03 * plan.length)

    def draw(width: float) -> Figure:
        made = figure(width, shape * width)
        ax = made.subplots()
        for name, regions in together.items():
            for region in regions:
                label = name if region is regions[0] else ""
                mark_stretch(ax, plan, region.start_arc, region.end_arc, label, color=runs[0].stroke.color, view=view)
        path_plot(plan, [run.errors for run in runs], ax, strokes=[run.stroke for run in runs], view=view)
        made.legend(*ax.get_legend_handles_labels(), loc="outside upper left", ncols=3)
        return made

    names = " and ".join(run.name for run in runs)
    numbered = " Numbers mark where sticking does most harm, as in the table of regions." if together else ""
    return Plan(
        "path",
        f"The planned path in grey, and the first lap of each run over it, at true scale.{numbered}",
        draw,
        f"The planned path with the first lap of {names} over it, regions of sticking numbered.",
        data=lambda made: {"map": data_map(made.axes[0]), "view": view.to_document()},
        kind="map",
        wide=6.2,
    )


def summary_figure(runs: Sequence[ShownRun]) -> Plan:
    """Plan the RMS of each shown run, predicted beside measured."""
    rows = []
    for run in runs:
        if run.source == "log":
            found = run.errors.tracking
            label = label_text(f"{run.name}, measured", 24)
            rows.append(SummaryRow(label, found.rms, found.rms_low, found.rms_high, run.stroke, predicted=False))
        rms, (low, high) = run.predicted.errors.tracking.rms, predicted_interval(run)
        rows.append(SummaryRow(label_text(f"{run.name}, predicted", 24), rms, low, high, run.stroke, predicted=True))

    def draw(width: float) -> Figure:
        made = figure(width, 0.75 + 0.3 * len(rows))
        summary_plot(rows, made.subplots())
        return made

    return Plan(
        "summary",
        "RMS tracking error. Filled: measured, with the 95 % interval. Open: predicted, with the range of 95 % of "
        "arms as they may be.",
        draw,
        "RMS tracking error: " + "; ".join(f"{row.label} {1e3 * row.rms:.2f} mm" for row in rows),
        wide=4.6,
        narrow=None,
    )


def predicted_interval(run: ShownRun) -> tuple[float, float]:
    """Give the RMS tracking error [m] between which 95 % of arms as they may be lie; else the replayed lap's own."""
    if run.predicted.ensemble is not None:
        return run.predicted.ensemble.tracking_interval
    return run.predicted.errors.tracking.rms_low, run.predicted.errors.tracking.rms_high


def along_figure(answers: Answers, runs: Sequence[ShownRun]) -> Plan:
    """Plan the error of the runs against path length, measured over predicted, with the regions beneath."""
    length = answers.trajectory.length
    measured = [run for run in runs if run.source == "log"]
    lanes = [(run.name, run.sticking.regions, run.stroke) for run in runs]
    with_lanes = any(regions for _, regions, _ in lanes)
    heights = ([1.9] if measured else []) + [1.3] + ([0.26 * len(runs) + 0.22] if with_lanes else [])

    def draw(width: float) -> Figure:
        made, axes = strip_figure(width, heights, above=0.3)
        errors = axes[: len(heights) - 1] if with_lanes else axes
        for run in measured:
            along_path_plot(along(run, length), errors[0], stroke=run.stroke, label=run.name)
        for run in runs:
            expected = error_along_path(run.predicted.errors.tracks, length)
            along_path_plot(expected, errors[-1], stroke=run.stroke, label=run.name)
            if run.predicted.ensemble is not None:
                band = run.predicted.ensemble.band
                band_plot(run.predicted.ensemble.arc, band[0], band[-1], errors[-1], stroke=run.stroke)
        top = max(ax.get_ylim()[1] for ax in errors)
        for ax, told in zip(errors, ["measured", "predicted"] if measured else ["predicted"], strict=True):
            ax.set_ylim(0.0, top)
            ax.set_ylabel(f"{told}\nerror [mm]")
            ax.set_xlabel("" if ax is not axes[-1] else ax.get_xlabel())
        made.legend(*axes[0].get_legend_handles_labels(), loc="upper right", ncols=2, borderaxespad=0.2)
        if with_lanes:
            together = numbers_together(runs[0].sticking.regions[:NUMBERED], 0.2 / width * length)
            numbers = {name: _middle(regions) for name, regions in together.items()}
            region_lanes(lanes, axes[-1], length=length, numbers=numbers)
        return made

    told = "Measured: a line over all laps, and a band from the best lap to the worst. Beneath: predicted, "
    band = "with a band that holds 90 % of arms as they may be."
    beneath = "At the bottom: where a joint sticks, filled before, outlined after compensation." if with_lanes else ""
    return Plan(
        "along",
        f"{told if measured else 'Predicted, '}{band} {beneath}".strip(),
        draw,
        "Tracking error of each run against path length, with regions of sticking beneath.",
        data=lambda made: strip_data(made, length),
        kind="strip",
    )


def pose_figure(answers: Answers, runs: Sequence[ShownRun]) -> Plan:
    """Plan the arm in its pose at the worst region, from one side or two."""
    plan, chain = answers.trajectory, answers.trial.arm.chain
    worst = runs[0].sticking.regions[0].start_arc if runs[0].sticking.regions else 0.0
    at = min(int(np.searchsorted(plan.arc, worst)), len(plan.arc) - 1)
    skeleton = skeletons(chain.arrays, np.ascontiguousarray(plan.joint[at : at + 1]))[0]
    front = broad_view(plan.path)
    side = side_view(skeleton, front)
    views = [front] if side is None else [front, side]
    place = "in region 1" if runs[0].sticking.regions else "at the start of the path"

    def draw(width: float) -> Figure:
        shown = views if width > _SMALL else views[:1]
        made = figure(width, 0.8 * width * len(shown))
        for k, (view, ax) in enumerate(zip(shown, made.subplots(len(shown), 1, squeeze=False).flat, strict=True)):
            pose_plot(plan.path, skeleton, ax, view=view)
            ax.lines[1].set_gid(f"arm-{k}")
            ax.lines[2].set_gid(f"arm-joints-{k}")
        return made

    return Plan(
        "pose",
        f"The arm in its planned pose, with the path in grey: {place}, or wherever the mark stands.",
        draw,
        "The arm in its pose, drawn through its joints, and the path.",
        data=lambda made: {
            "views": [{**view.to_document(), "map": data_map(ax)} for view, ax in zip(views, made.axes, strict=False)]
        },
        kind="pose",
        wide=2.9,
        narrow=_SMALL,
    )


def numbers_together(regions: Sequence[Region], reach: float) -> dict[str, list[Region]]:
    """Gather regions that lie within reach [m] of each other, by their numbers: ``1``, ``2, 3, 6``, ``4``."""
    groups: list[list[int]] = []
    for k, region in enumerate(regions):
        for group in groups:
            first = regions[group[0]]
            if region.start_arc - reach <= first.end_arc and first.start_arc - reach <= region.end_arc:
                group.append(k)
                break
        else:
            groups.append([k])
    return {", ".join(f"{k + 1}" for k in group): [regions[k] for k in group] for group in groups}


def along(run: ShownRun, length: float) -> ErrorAlongPath:
    """Error of a shown run along the path."""
    return error_along_path(run.errors.tracks, length)


def _middle(regions: Sequence[Region]) -> float:
    return 0.5 * (min(region.start_arc for region in regions) + max(region.end_arc for region in regions))


def strip_data(made: Figure, length: float) -> Mapping[str, object]:
    """Give a strip figure's data attributes: where its axes stand, and what length of path [m] they span."""
    return {"boxes": [box(ax) for ax in made.axes], "span": round(1e3 * length, 3)}
