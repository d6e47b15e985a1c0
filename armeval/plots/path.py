"""The path: where the tip should have been, where it was, and where it stuck."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from matplotlib.axes import Axes

from armeval.evaluate.run_errors import RunErrors
from armeval.model.trajectory import Trajectory
from armeval.plots.style import AFTER, BEFORE, INK, TARGET, Stroke, label_text
from armeval.plots.view import View, broad_view

_MOST_POINTS = 3000  # of one drawn line; more cannot be told apart on paper


def path_plot(
    trajectory: Trajectory,
    runs: Sequence[RunErrors],
    ax: Axes,
    *,
    strokes: Sequence[Stroke] = (BEFORE, AFTER),
    view: View | None = None,
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
    view
        From which side; default: so that the path lies broad.
    """
    view = view or broad_view(trajectory.path)
    ax.plot(*view.of(trajectory.path), color=TARGET, linewidth=3.0, alpha=0.5, label="target", solid_capstyle="round")
    for run, stroke in zip(runs, strokes, strict=False):
        tip = run.tracks[0].tip
        across, up = view.of(tip[:: max(1, len(tip) // _MOST_POINTS)])
        ax.plot(across, up, color=stroke.color, linestyle=stroke.linestyle, linewidth=0.9, label=label_text(run.name))
    return view.set_up(ax)


def mark_stretch(
    ax: Axes,
    trajectory: Trajectory,
    start: float,
    end: float,
    label: str = "",
    *,
    color: str = INK,
    view: View | None = None,
) -> Axes:
    """Mark a stretch of the path, arc lengths in metres, with a band along it and a label beside it.

    The label stands off the path on the side away from the middle of the whole path.
    """
    view = view or broad_view(trajectory.path)
    between = trajectory.path_arc[(trajectory.path_arc > start) & (trajectory.path_arc < end)]
    arcs = np.concatenate([[start], between, [end]])
    points = np.column_stack([np.interp(arcs, trajectory.path_arc, trajectory.path[:, axis]) for axis in range(3)])
    across, up = view.of(points)
    ax.plot(across, up, color=color, linewidth=7.0, alpha=0.35, solid_capstyle="round")
    if label:
        at = np.array([np.mean(across), np.mean(up)])
        away = at - np.array([float(np.ptp(side) / 2 + side.min()) for side in view.of(trajectory.path)])
        away /= float(np.linalg.norm(away)) or 1.0
        ax.annotate(
            label,
            (at[0], at[1]),
            xytext=(13.0 * away[0] * (-1.0 if view.leftward else 1.0), 13.0 * away[1]),
            textcoords="offset points",
            ha="center",
            va="center",
            fontsize=9,
            color=color,
            weight="bold",
        )
    return ax
