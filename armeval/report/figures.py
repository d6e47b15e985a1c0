"""The figures of the report, drawn from its answers."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence

import numpy as np
from matplotlib.figure import Figure

from armeval.evaluate.along_path import ErrorAlongPath, error_along_path
from armeval.evaluate.cog_orders import expected_orders
from armeval.evaluate.error_orders import ErrorOrders, error_orders
from armeval.evaluate.regions import Region
from armeval.kernels.chain import skeletons
from armeval.plots.along_path import along_path_plot
from armeval.plots.cog_map import cog_map_plot
from armeval.plots.error_orders import error_orders_plot
from armeval.plots.event import event_angle_plot, event_torque_plot
from armeval.plots.path import mark_stretch, path_plot
from armeval.plots.pose import pose_plot
from armeval.plots.sticking import joint_strip, region_lanes, strip_handles
from armeval.plots.style import figure, label_text, strip_figure
from armeval.plots.summary import SummaryRow, summary_plot
from armeval.plots.view import broad_view, side_view
from armeval.report.answers import Answers
from armeval.report.drawing import NARROW, Plan, box, data_map
from armeval.report.shown import ShownRun

NUMBERED = 6
"""So many regions, the most harmful first, carry a number in figures and tables."""


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


def summary_figure(runs: Sequence[ShownRun]) -> Plan:
    """Plan the RMS of each shown run, predicted beside measured."""
    rows = []
    for run in runs:
        if run.source == "log":
            rows.append(SummaryRow(f"{run.name}, measured", run.errors.tracking, run.stroke, predicted=False))
        rows.append(SummaryRow(f"{run.name}, predicted", run.predicted.errors.tracking, run.stroke, predicted=True))

    def draw(width: float) -> Figure:
        made = figure(width, 0.75 + 0.3 * len(rows))
        summary_plot(rows, made.subplots())
        return made

    return Plan(
        "summary",
        "RMS tracking error with its 95 % interval: filled markers are measured, open ones predicted.",
        draw,
        "RMS tracking error: " + "; ".join(f"{row.label} {1e3 * row.error.rms:.2f} mm" for row in rows),
        wide=4.6,
        narrow=None,
    )


def along_figure(answers: Answers, runs: Sequence[ShownRun]) -> Plan:
    """Plan the error of the runs against path length, measured over predicted, with the regions beneath."""
    length = answers.trajectory.length
    measured = [run for run in runs if run.source == "log"]
    heights = ([1.9] if measured else []) + [1.3, 0.26 * len(runs) + 0.22]
    together = numbers_together(runs[0].sticking.regions[:NUMBERED], 0.02 * length)
    numbers = {name: _middle(regions) for name, regions in together.items()}

    def draw(width: float) -> Figure:
        made, axes = strip_figure(width, heights, above=0.3)
        for run in measured:
            along_path_plot(along(run, length), axes[0], stroke=run.stroke, label=run.name)
        for run in runs:
            expected = error_along_path(run.predicted.errors.tracks, length)
            along_path_plot(expected, axes[-2], stroke=run.stroke, label=run.name)
        top = max(ax.get_ylim()[1] for ax in axes[:-1])
        for ax, told in zip(axes[:-1], ["measured", "predicted"] if measured else ["predicted"], strict=True):
            ax.set_ylim(0.0, top)
            ax.set_ylabel(f"{told}\nerror [mm]")
            ax.set_xlabel("")
        made.legend(*axes[0].get_legend_handles_labels(), loc="upper right", ncols=2, borderaxespad=0.2)
        region_lanes(
            [(run.name, run.sticking.regions, run.stroke) for run in runs], axes[-1], length=length, numbers=numbers
        )
        return made

    told = "Upper: measured, a line over all laps and a band from the best lap to the worst; below: predicted; "
    return Plan(
        "along",
        (told if measured else "Predicted; ")
        + "at the bottom the regions where a joint sticks, filled before, outlined after compensation.",
        draw,
        "Tracking error of each run against path length, with regions of sticking beneath.",
        data=lambda made: _strip_data(made, length),
        kind="strip",
    )


def joints_figure(answers: Answers, runs: Sequence[ShownRun]) -> Plan:
    """Plan each joint's sticking ratio along the path, with its rests."""
    length, joints = answers.trajectory.length, answers.trial.arm.joints

    def draw(width: float) -> Figure:
        made, axes = strip_figure(width, [1.0] * len(joints), above=0.3 if width > NARROW else 0.5)
        for joint, ax in zip(joints, axes, strict=True):
            joint_strip(
                joint,
                [(run.predicted.ratio, run.stroke) for run in runs],
                [(run.name, run.sticking.events, run.stroke) for run in runs],
                ax,
                length=length,
            )
            if ax is not axes[-1]:
                ax.set_xlabel("")
        handles = [handle for run in runs for handle in strip_handles(run.name, run.stroke)]
        columns = 4 if width > NARROW else 2
        made.legend(handles=handles, loc="upper right", ncols=columns, borderaxespad=0.2)
        return made

    return Plan(
        "joints",
        "Lines: sticking ratio of each joint; above the dotted line at 1 it sticks when moved slowly enough. Bars "
        "above the lines: rests of all laps, filled before, outlined after compensation.",
        draw,
        "Sticking ratio and rests of every joint against path length.",
        data=lambda made: _strip_data(made, length),
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

    def draw(width: float) -> Figure:
        made = figure(width, 0.8 * width * len(views))
        for k, (view, ax) in enumerate(zip(views, made.subplots(len(views), 1, squeeze=False).flat, strict=True)):
            pose_plot(plan.path, skeleton, ax, view=view)
            ax.lines[1].set_gid(f"arm-{k}")
            ax.lines[2].set_gid(f"arm-joints-{k}")
        return made

    return Plan(
        "pose",
        "The arm in its planned pose at the marked place, with the path in grey.",
        draw,
        "The arm in its pose, drawn through its joints, and the path.",
        data=lambda made: {
            "views": [{**view.to_document(), "map": data_map(ax)} for view, ax in zip(views, made.axes, strict=True)]
        },
        kind="pose",
        wide=2.9,
        narrow=None,
    )


def cog_maps_figure(answers: Answers, runs: Sequence[ShownRun]) -> Plan | None:
    """Plan every cog map round the circle, with the motor angles of the joint's rests; None where there is no map."""
    drives = [drive for drive in answers.trial.arm.drives if drive.cog_map is not None]
    if not drives:
        return None

    def draw(width: float) -> Figure:
        columns = min(len(drives), 4 if len(drives) > 3 else 3) if width > NARROW else 1
        rows = math.ceil(len(drives) / columns)
        made = figure(width, rows * (width / columns) * 0.98 if width > NARROW else rows * 3.4)
        grid = made.subplots(rows, columns, subplot_kw={"projection": "polar"}, squeeze=False).flat
        for ax in list(grid)[len(drives) :]:
            ax.remove()
        for drive, ax in zip(drives, made.axes, strict=True):
            rests = [
                (
                    np.array([event.motor_angle for event in run.sticking.events if event.joint == drive.joint]),
                    run.stroke,
                    run.name,
                )
                for run in runs
            ]
            if drive.cog_map is not None:
                cog_map_plot(drive.cog_map, ax, rests=rests)  # type: ignore[arg-type]
                reach = f"{1e3 * float(np.abs(drive.cog_map.torque).max()):.3g} mN·m"
                ax.set_title(f"{label_text(drive.joint, 20)}, rings at ±{reach} and 0")
        return made

    return Plan(
        "cog-maps",
        "Cogging torque [mN·m] of each motor over one turn, outward positive; the rings carry the motor angles at "
        "which the joint rested, in every lap.",
        draw,
        "Cog map of every joint's motor with the angles of its rests.",
    )


def spectra(answers: Answers, runs: Sequence[ShownRun]) -> dict[str, list[tuple[ShownRun, ErrorOrders]]]:
    """Give the spectrum of every joint's error, of each run; joints whose motor turned too little are left out."""
    found: dict[str, list[tuple[ShownRun, ErrorOrders]]] = {}
    for index, drive in enumerate(answers.trial.arm.drives):
        of_runs = [(run, error_orders(drive, run.errors.tracks, index)) for run in runs]
        entries = [(run, spectrum) for run, spectrum in of_runs if spectrum is not None]
        if entries:
            found[drive.joint] = entries
    return found


def orders_figure(answers: Answers, found: Mapping[str, list[tuple[ShownRun, ErrorOrders]]]) -> Plan | None:
    """Plan the spectrum of every joint's error; None where no joint turned far enough."""
    if not found:
        return None
    chain = answers.trial.arm.chain
    drives = {drive.joint: drive for drive in answers.trial.arm.drives}

    def draw(width: float) -> Figure:
        made = figure(width, 1.5 * len(found) + 0.5)
        axes = made.subplots(len(found), 1, sharex=True, squeeze=False)[:, 0]
        for (joint, entries), ax in zip(found.items(), axes, strict=True):
            slides = bool(chain.prismatic[chain.index(joint)])
            fundamental = expected_orders(drives[joint].slots, drives[joint].poles).fundamental
            marked = [k * fundamental for k in (1, 2) if k * fundamental <= 250] if fundamental else []
            error_orders_plot(
                [(run.name, spectrum, run.stroke) for run, spectrum in entries], ax, expected=marked, slides=slides
            )
            ax.set_ylabel(f"{joint}\n{ax.get_ylabel()}")
            if ax is not axes[-1]:
                ax.set_xlabel("")
        axes[0].legend(loc="upper right", ncols=2)
        return made

    return Plan(
        "orders",
        "Amplitude of each joint's error by order of motor angle, over all laps. Dotted: the orders that slots and "
        "poles let expect of cogging.",
        draw,
        "Spectrum of the joint error by order of motor angle for every joint.",
    )


def event_figure(answers: Answers, runs: Sequence[ShownRun]) -> Plan | None:
    """Plan the close-up of the longest rest in the most harmful region; None where nothing sticks."""
    run = next((run for run in runs if run.sticking.regions), None)
    if run is None:
        return None
    region = run.sticking.regions[0]
    event = max(region.events, key=lambda event: event.dwell * event.release_distance)
    track = next(track for track in run.errors.tracks if track.lap == event.lap)
    index = answers.trial.arm.chain.index(event.joint)
    slides = bool(answers.trial.arm.chain.prismatic[index])
    with_torque = track.torque is not None

    def draw(width: float) -> Figure:
        shape = ((1, 2) if width > NARROW else (2, 1)) if with_torque else (1, 1)
        made = figure(width, 2.4 if width > NARROW else 2.0 * shape[0] + 0.3)
        axes = list(made.subplots(*shape, squeeze=False).flat)
        event_angle_plot(event, track, index, axes[0], stroke=run.stroke, slides=slides)
        axes[0].legend(loc="best")
        if with_torque:
            event_torque_plot(event, track, index, axes[1], slides=slides)
        return made

    place = f"{1e3 * region.start_arc:.0f} to {1e3 * region.end_arc:.0f} mm"
    missing = "" if with_torque else " Torque was not logged."
    return Plan(
        "event",
        f"One rest close up: {event.joint} in region 1 ({place}), {run.name}, lap {event.lap}. Shaded: the rest."
        f"{missing}",
        draw,
        f"Target, angle and torque of {event.joint} through one rest.",
    )


def along(run: ShownRun, length: float) -> ErrorAlongPath:
    """Error of a shown run along the path."""
    return error_along_path(run.errors.tracks, length)


def _middle(regions: Sequence[Region]) -> float:
    return 0.5 * (min(region.start_arc for region in regions) + max(region.end_arc for region in regions))


def _strip_data(made: Figure, length: float) -> Mapping[str, object]:
    return {"boxes": [box(ax) for ax in made.axes], "span": round(1e3 * length, 3)}
