"""RMS tip error of runs, with its interval, predicted beside measured."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from matplotlib.axes import Axes

from armeval.plots.style import INK, Stroke, label_text


@dataclass(frozen=True)
class SummaryRow:
    """One line of the figure: its name, RMS and interval [m], and how it is drawn; an open marker is a prediction."""

    label: str
    rms: float
    low: float
    high: float
    stroke: Stroke
    predicted: bool


def summary_plot(rows: Sequence[SummaryRow], ax: Axes) -> Axes:
    """Draw the RMS of each row as a marker with its 95 % interval, the first row on top.

    Parameters
    ----------
    rows
        At least one.
    ax
        Where to draw.
    """
    for place, row in enumerate(rows):
        rms, low, high = (1e3 * value for value in (row.rms, row.low, row.high))
        ax.plot([low, high], [place, place], color=row.stroke.color, linewidth=1.6, solid_capstyle="butt")
        ax.plot(
            [rms],
            [place],
            row.stroke.marker,
            color=row.stroke.color,
            markerfacecolor="white" if row.predicted else row.stroke.color,
            markersize=6.0,
            markeredgewidth=1.4,
        )
        ax.annotate(
            f"{rms:.2f}", (max(rms, high), place), xytext=(7, 0), textcoords="offset points", va="center", color=INK
        )
    ax.set_yticks(range(len(rows)), [label_text(row.label) for row in rows])
    ax.set_ylim(len(rows) - 0.5, -0.5)
    ax.set_xlim(0.0, 1.25e3 * max(max(row.rms, row.high) for row in rows))
    ax.set_xlabel("RMS tracking error [mm]")
    ax.grid(visible=False, axis="y")
    return ax
