"""The figures of the report, drawn from its answers."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence

import numpy as np
from matplotlib.figure import Figure

from armeval.evaluate.along_path import ErrorAlongPath, error_along_path
from armeval.evaluate.cog_orders import expected_orders
from armeval.evaluate.error_orders import ErrorOrders, error_orders
from armeval.kernels.chain import skeletons
from armeval.plots.along_path import along_path_plot
from armeval.plots.cog_map import cog_map_plot
from armeval.plots.error_orders import error_orders_plot
from armeval.plots.event import event_angle_plot, event_torque_plot
from armeval.plots.path import mark_stretch, path_plot, widest_plane
from armeval.plots.pose import pose_plot
from armeval.plots.sticking import joint_strip, region_lanes
from armeval.plots.style import figure
from armeval.plots.summary import SummaryRow, summary_plot
from armeval.report.answers import Answers
from armeval.report.drawing import NARROW, Plan, box, data_map
from armeval.report.shown import ShownRun

NUMBERED = 6
"""So many regions, the most harmful first, carry a number in figures and tables."""


def path_figure(answers: Answers, runs: Sequence[ShownRun]) -> Plan:
    """Plan the path with target, before and after, and the numbered regions."""

    def draw(width: float) -> Figure:
        made = figure(width, 0.74 * width if width > NARROW else 0.95 * width)
        ax = made.subplots()
        for number, region in enumerate(runs[0].sticking.regions[:NUMBERED], start=1):
            mark_stretch(
                ax, answers.trajectory, region.start_arc, region.end_arc, f"{number}", color=runs[0].stroke.color
            )
        path_plot(answers.trajectory, [run.errors for run in runs], ax, strokes=[run.stroke for run in runs])
        made.legend(*ax.get_legend_handles_labels(), loc="outside upper left", ncols=3)
        return made

    names = " and ".join(run.name for run in runs)
    return Plan(
        "path",
        "The planned path in grey, and the first lap of each run over it, at true scale. Numbers mark the stretches "
        "where sticking does most harm; they are the numbers of the table of regions.",
        draw,
        f"The planned path with the first lap of {names} over it, regions of sticking numbered.",
        data=lambda made: {"map": data_map(made.axes[0]), "plane": widest_plane(answers.trajectory.path)},
        kind="map",
        wide=6.2,
    )


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
    )


def along_figure(answers: Answers, runs: Sequence[ShownRun]) -> Plan:
    """Plan the error of the runs against path length, measured over predicted, with the regions beneath."""
    length = answers.trajectory.length
    measured = [run for run in runs if run.source == "log"]
    ratios = ([2.0] if measured else []) + [1.4, 0.34 * len(runs) + 0.3]

    def draw(width: float) -> Figure:
        made = figure(width, 1.15 * sum(ratios) + 0.5)
        axes = list(made.subplots(len(ratios), 1, sharex=True, height_ratios=ratios, squeeze=False)[:, 0])
        predicted = axes[-2]
        for run in measured:
            along_path_plot(along(run, length), axes[0], stroke=run.stroke, label=run.name)
        for run in runs:
            expected = error_along_path(run.predicted.errors.tracks, length)
            along_path_plot(expected, predicted, stroke=run.stroke, label=run.name)
        top = max(ax.get_ylim()[1] for ax in axes[:-1])
        for ax, told in zip(axes[:-1], ["measured", "predicted"] if measured else ["predicted"], strict=True):
            ax.set_ylim(0.0, top)
            ax.set_ylabel(f"{told}\nerror [mm]")
            ax.set_xlabel("")
        axes[0].legend(loc="upper right", ncols=2)
        lanes = [(run.name, run.sticking.regions, run.stroke) for run in runs]
        numbers = {k: k + 1 for k in range(min(NUMBERED, len(runs[0].sticking.regions)))}
        region_lanes(lanes, axes[-1], length=length, numbers=numbers)
        _strip_axes(made)
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
        made = figure(width, 1.25 * len(joints) + 0.5)
        axes = made.subplots(len(joints), 1, sharex=True, squeeze=False)[:, 0]
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
        _strip_axes(made)
        return made

    return Plan(
        "joints",
        "Lines: sticking ratio of each joint; above the dotted line at 1 it sticks when moved slowly enough. Bars above "
        "the lines: rests of all laps, filled before, outlined after compensation.",
        draw,
        "Sticking ratio and rests of every joint against path length.",
        data=lambda made: _strip_data(made, length),
        kind="strip",
    )


def pose_figure(answers: Answers, runs: Sequence[ShownRun]) -> Plan:
    """Plan the arm in its pose at the worst region, from one side or two."""
    plan = answers.trajectory
    worst = runs[0].sticking.regions[0].start_arc if runs[0].sticking.regions else 0.0
    at = int(np.searchsorted(plan.arc, worst))
    skeleton = skeletons(answers.trial.arm.chain.arrays, plan.joint[at : at + 1])[0]
    planes = pose_planes(answers)

    def draw(width: float) -> Figure:
        side_by_side = width > 3.0
        made = figure(width, (0.6 if side_by_side and len(planes) > 1 else 0.9 * len(planes)) * width)
        shape = (1, len(planes)) if side_by_side else (len(planes), 1)
        for k, (plane, ax) in enumerate(zip(planes, made.subplots(*shape, squeeze=False).flat, strict=True)):
            pose_plot(plan.path, skeleton, plane, ax)
            ax.lines[1].set_gid(f"arm-{k}")
            ax.lines[2].set_gid(f"arm-joints-{k}")
        return made

    return Plan(
        "pose",
        "The arm in its planned pose at the marked place, with the path in grey.",
        draw,
        "The arm in its pose, drawn through its joints, and the path.",
        data=lambda made: {
            "views": [{"plane": plane, "map": data_map(ax)} for plane, ax in zip(planes, made.axes, strict=True)]
        },
        kind="pose",
        wide=2.9,
    )


def pose_planes(answers: Answers) -> list[list[int]]:
    """Give the pairs of base axes in which the arm is drawn: the path's plane, and from the side if it is not flat."""
    plan = answers.trajectory
    points = skeletons(answers.trial.arm.chain.arrays, plan.joint[:: max(1, len(plan.joint) // 50)]).reshape(-1, 3)
    first = widest_plane(plan.path)
    third = next(axis for axis in range(3) if axis not in first)
    if np.ptp(points[:, third]) < 1e-3:
        return [first]
    wider = first[int(np.argmax(np.ptp(points[:, first], axis=0)))]
    return [first, sorted([wider, third])]


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
            ax.set_title(drive.joint)
        return made

    return Plan(
        "cog-maps",
        "Cogging torque [mN·m] of each motor over one turn, outward positive; the rings carry the motor angles at which "
        "the joint rested, in every lap.",
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


def orders_figure(
    answers: Answers, found: Mapping[str, list[tuple[ShownRun, ErrorOrders]]]
) -> Plan | None:
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
        "Amplitude of each joint's error by order of motor angle, over all laps. Dotted: the orders that slots and poles "
        "let expect of cogging.",
        draw,
        "Spectrum of the joint error by order of motor angle for every joint.",
    )


def event_figure(answers: Answers, runs: Sequence[ShownRun]) -> Plan | None:
    """Plan the close-up of the longest rest in the most harmful region; None where nothing sticks."""
    run = next((run for run in runs if run.sticking.regions), None)
    if run is None:
        return None
    region = run.sticking.regions[0]
    event = max(region.events, key=lambda event: event.lag)
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
        f"One rest close up: {event.joint} in region 1 ({place}), {run.name}, lap {event.lap}. Shaded: the rest.{missing}",
        draw,
        f"Target, angle and torque of {event.joint} through one rest.",
    )


def along(run: ShownRun, length: float) -> ErrorAlongPath:
    """Error of a shown run along the path."""
    return error_along_path(run.errors.tracks, length)


def _strip_axes(made: Figure) -> None:
    for k, ax in enumerate(made.axes):
        ax.xaxis.set_gid(f"x-axis-{k}")
        ax.label_outer()
    made.align_ylabels()


def _strip_data(made: Figure, length: float) -> Mapping[str, object]:
    return {"boxes": [box(ax) for ax in made.axes], "span": round(1e3 * length, 3)}
