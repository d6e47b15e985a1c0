"""Figures of the report about the joints: rests and sticking ratio, cog maps, spectra, one rest close up."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence

import numpy as np
from matplotlib.figure import Figure

from armeval.evaluate.cogging.cog_orders import expected_orders
from armeval.evaluate.measuring.error_orders import ErrorOrders, error_orders
from armeval.evaluate.sticking.sticking_event import StickingEvent
from armeval.plots.budget import budget_plot
from armeval.plots.cog_map import cog_map_plot
from armeval.plots.error_orders import error_orders_plot
from armeval.plots.event import event_angle_plot, event_torque_plot
from armeval.plots.sticking import joint_strip, strip_handles
from armeval.plots.style import figure, label_text, strip_figure
from armeval.report.answers import Answers
from armeval.report.drawing import NARROW, Plan
from armeval.report.path_figures import strip_data
from armeval.report.shown import ShownRun

_SHAPES = {"o": "circles", "s": "squares"}


def joints_figure(answers: Answers, runs: Sequence[ShownRun]) -> Plan | None:
    """Plan each joint's sticking ratio along the path, with its rests; None where there is neither."""
    length, joints = answers.trajectory.length, answers.trial.arm.joints
    if not any(run.sticking.events or run.predicted.ratio.max.max() > 0.0 for run in runs):
        return None

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
        "Lines: sticking ratio of each joint; above the grey line at 1 it sticks when moved slowly enough. Bars "
        "above: rests of all laps, filled before, outlined after compensation.",
        draw,
        "Sticking ratio and rests of every joint against path length.",
        data=lambda made: strip_data(made, length),
        kind="strip",
    )


def cog_maps_figure(answers: Answers, runs: Sequence[ShownRun]) -> Plan | None:
    """Plan every cog map round the circle, with the motor angles of the joint's rests; None where there is no map."""
    drives = [drive for drive in answers.trial.arm.drives if drive.cog_map is not None]
    if not drives:
        return None

    def draw(width: float) -> Figure:
        columns = (4 if len(drives) > 3 else 3) if width > NARROW else 2
        rows = math.ceil(len(drives) / columns)
        made = figure(width, rows * (width / columns + 0.25))
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
                reach = f"±{1e3 * float(np.abs(drive.cog_map.torque).max()):.3g} mN·m"
                ax.set_title(f"{label_text(drive.joint, 16)}: {reach}", loc="center", fontweight="normal", pad=4.0)
        return made

    shapes = " and ".join(f"{_SHAPES[run.stroke.marker]} in {run.name}" for run in runs)
    return Plan(
        "cog-maps",
        f"Cogging torque of each motor over one turn, outward positive; rings at 0 and at the torque named. "
        f"Marks outside: motor angles at which the joint "
        f"rested, {shapes}, every lap.",
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
        made, axes = strip_figure(width, [1.1] * len(found), above=0.36, between=0.26)
        for (joint, entries), ax in zip(found.items(), axes, strict=True):
            slides = bool(chain.prismatic[chain.index(joint)])
            fundamental = expected_orders(drives[joint].slots, drives[joint].poles).fundamental
            marked = [k * fundamental for k in (1, 2) if k * fundamental <= 250] if fundamental else []
            error_orders_plot(
                [(run.name, spectrum, run.stroke) for run, spectrum in entries], ax, expected=marked, slides=slides
            )
            ax.set_ylabel(f"{label_text(joint, 16)}\n{ax.get_ylabel()}")
            if ax is not axes[-1]:
                ax.set_xlabel("")
        made.legend(*axes[0].get_legend_handles_labels(), loc="upper right", ncols=2, borderaxespad=0.1)
        return made

    return Plan(
        "orders",
        "Amplitude of each joint's error by order of motor angle, over all laps. Dotted: the orders that slots and "
        "poles let expect of cogging.",
        draw,
        "Spectrum of the joint error by order of motor angle for every joint.",
    )


def budget_figure(answers: Answers) -> Plan:
    """Plan the error budget before and after."""

    def draw(width: float) -> Figure:
        rows = max(len(state.rows()) for state in answers.budget.budgets)
        made = figure(width, 0.7 + rows * (0.1 + 0.1 * len(answers.budget.budgets)))
        budget_plot(answers.budget, made.subplots())
        return made

    return Plan(
        "budget",
        "What each cause, and each joint within it, has in the predicted mean squared tracking error; parts add up to "
        "the whole. Below 0 a cause takes error away.",
        draw,
        "Error budget: part of each cause in the mean squared tracking error, bare and compensated.",
    )


def worst_event(runs: Sequence[ShownRun]) -> tuple[ShownRun, StickingEvent] | None:
    """Give the strongest rest in the most harmful region, and its run; None where nothing sticks."""
    run = next((run for run in runs if run.sticking.regions), None)
    if run is None:
        return None
    return run, max(run.sticking.regions[0].events, key=lambda event: event.dwell * event.release_distance)


def event_figure(answers: Answers, runs: Sequence[ShownRun]) -> Plan | None:
    """Plan the close-up of the longest rest in the most harmful region; None where nothing sticks."""
    found = worst_event(runs)
    if found is None:
        return None
    run, event = found
    region = run.sticking.regions[0]
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
