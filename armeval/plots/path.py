"""The path from above: where the tip should have been, where it was, and where it stuck."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from matplotlib.axes import Axes

from armeval.arrays import FloatArray
from armeval.evaluate.run_errors import RunErrors
from armeval.model.trajectory import Trajectory
from armeval.plots.style import AFTER, BEFORE, INK, TARGET, Stroke, label_text

_AXIS_NAMES = ("x", "y", "z")
_MOST_POINTS = 3000  # of one drawn line; more cannot be told apart on paper


def widest_plane(points: FloatArray) -> list[int]:
    """Give the two base axes along which points of shape (k, 3) spread most, in their order x, y, z."""
    return sorted(int(axis) for axis in np.argsort(np.ptp(points, axis=0))[-2:])


def path_plot(
    trajectory: Trajectory, runs: Sequence[RunErrors], ax: Axes, *, strokes: Sequence[Stroke] = (BEFORE, AFTER)
) -> Axes:
    """Draw the planned path and the first lap of each run over it, at true scale.

    Parameters
    ----------
    trajectory
        What was planned.
    runs
        At most as many as there are strokes.
    ax
        Where to draw.
    strokes
        How each run is drawn.
    """
    plane = widest_plane(trajectory.path)
    path = 1e3 * trajectory.path[:, plane]
    ax.plot(path[:, 0], path[:, 1], color=TARGET, linewidth=3.0, alpha=0.5, label="target", solid_capstyle="round")
    for run, stroke in zip(runs, strokes, strict=False):
        tip = run.tracks[0].tip
        shown = 1e3 * tip[:: max(1, len(tip) // _MOST_POINTS), plane]
        ax.plot(
            shown[:, 0],
            shown[:, 1],
            color=stroke.color,
            linestyle=stroke.linestyle,
            linewidth=0.9,
            label=label_text(run.name),
        )
    ax.set_xlabel(f"{_AXIS_NAMES[plane[0]]} in the base frame [mm]")
    ax.set_ylabel(f"{_AXIS_NAMES[plane[1]]} in the base frame [mm]")
    ax.set_aspect("equal", adjustable="datalim")
    return ax


def mark_stretch(ax: Axes, trajectory: Trajectory, start: float, end: float, label: str, *, color: str = INK) -> Axes:
    """Mark a stretch of the path, arc lengths in metres, with a band along it and a label beside it."""
    plane = widest_plane(trajectory.path)
    between = trajectory.path_arc[(trajectory.path_arc > start) & (trajectory.path_arc < end)]
    arcs = np.concatenate([[start], between, [end]])
    band = 1e3 * np.column_stack([np.interp(arcs, trajectory.path_arc, trajectory.path[:, axis]) for axis in plane])
    ax.plot(band[:, 0], band[:, 1], color=color, linewidth=6.0, alpha=0.35, solid_capstyle="round")
    ax.annotate(
        label, band[len(band) // 2], xytext=(5, 5), textcoords="offset points", fontsize=8, color=color, weight="bold"
    )
    return ax
