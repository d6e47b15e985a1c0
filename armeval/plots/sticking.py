"""Where joints rest along the path: regions in lanes, rests of one joint over its sticking ratio."""

from __future__ import annotations

from collections.abc import Mapping, Sequence

import numpy as np
from matplotlib.artist import Artist
from matplotlib.axes import Axes
from matplotlib.lines import Line2D
from matplotlib.patches import Patch

from armeval.arrays import FloatArray
from armeval.evaluate.replaying.sticking_ratio import StickingRatio
from armeval.evaluate.sticking.regions import Region
from armeval.evaluate.sticking.sticking_event import StickingEvent
from armeval.plots.style import INK, Stroke, label_text

_LEAST_WIDTH = 1.5  # mm of path: a shorter rest would not be seen


def region_lanes(
    lanes: Sequence[tuple[str, Sequence[Region], Stroke]],
    ax: Axes,
    *,
    length: float,
    numbers: Mapping[str, float] | None = None,
) -> Axes:
    """Draw regions as bars along the path, one lane a run, the first on top.

    Parameters
    ----------
    lanes
        Name, regions and stroke of each run.
    ax
        Where to draw.
    length
        Of the path [m].
    numbers
        What to write over the first lane, and where along the path [m].
    """
    for lane, (_, regions, stroke) in enumerate(lanes):
        spans = [_span(region.start_arc, region.end_arc) for region in regions]
        solid = stroke.linestyle == "-"
        ax.broken_barh(
            spans,
            (lane - 0.3, 0.6),
            gid=f"region-lane-{lane}",
            facecolor=stroke.color if solid else "white",
            edgecolor=stroke.color,
            linewidth=0.0 if solid else 0.7,
        )
    for number, place in (numbers or {}).items():
        text = ax.annotate(
            number, (1e3 * place, -0.3), xytext=(0, 1.5), textcoords="offset points", ha="center", fontsize=8
        )
        text.set_gid(f"region-number-{number}")
    ax.set_yticks(range(len(lanes)), [label_text(name, 12) for name, _, _ in lanes], fontsize=8)
    ax.set_ylim(len(lanes) - 0.5, -0.95 if numbers else -0.5)
    ax.set_xlim(0.0, 1e3 * length)
    ax.set_xlabel("path length s [mm]")
    ax.grid(visible=False, axis="y")
    return ax


def joint_strip(
    joint: str,
    ratios: Sequence[tuple[StickingRatio, Stroke]],
    rests: Sequence[tuple[str, Sequence[StickingEvent], Stroke]],
    ax: Axes,
    *,
    length: float,
    bins: int = 600,
) -> Axes:
    """Draw one joint's sticking ratio against path length, and its rests in lanes above.

    Parameters
    ----------
    joint
        Its name.
    ratios
        Sticking ratio of each run; where several samples fall on one drawn point, the largest counts.
    rests
        Name, events of all joints, and stroke of each run; only this joint's are drawn.
    ax
        Where to draw.
    length
        Of the path [m].
    bins
        Points of a drawn line.
    """
    top = 1.5
    for ratio, stroke in ratios:
        values = largest_in_bins(ratio.arc, ratio.ratio[:, ratio.joints.index(joint)], length, bins)
        s = 1e3 * length * (np.arange(bins) + 0.5) / bins
        ax.plot(s, values, color=stroke.color, linestyle=stroke.linestyle, linewidth=0.9)
        top = max(top, float(np.nanmax(values[np.isfinite(values)], initial=0.0)))
    ax.axhline(1.0, color=INK, linewidth=0.7, linestyle=(0, (1, 2)))
    lane = 0.16 * top
    for place, (_, events, stroke) in enumerate(rests):
        spans = [_span(event.start_arc, event.end_arc) for event in events if event.joint == joint]
        solid = stroke.linestyle == "-"
        ax.broken_barh(
            spans,
            (top * 1.1 + lane * (len(rests) - 1 - place), 0.7 * lane),
            facecolor=stroke.color if solid else "white",
            edgecolor=stroke.color,
            linewidth=0.0 if solid else 0.7,
        )
    ax.set_ylim(0.0, top * 1.1 + lane * max(1, len(rests)) + 0.05 * top)
    ax.set_yticks([tick for tick in ax.get_yticks() if 0.0 <= tick <= top])
    ax.set_xlim(0.0, 1e3 * length)
    ax.set_xlabel("path length s [mm]")
    ax.set_ylabel(f"{label_text(joint, 16)}\nratio [–]")
    return ax


def strip_handles(name: str, stroke: Stroke) -> list[Artist]:
    """Give legend entries for one run's line and bars in :func:`joint_strip`."""
    solid = stroke.linestyle == "-"
    return [
        Line2D([], [], color=stroke.color, linestyle=stroke.linestyle, label=f"ratio, {label_text(name, 20)}"),
        Patch(
            facecolor=stroke.color if solid else "white",
            edgecolor=stroke.color,
            linewidth=0.7,
            label=f"rests, {label_text(name, 20)}",
        ),
    ]


def largest_in_bins(arc: FloatArray, values: FloatArray, length: float, bins: int) -> FloatArray:
    """Give the largest value in each bin of arc length, shape (bins,); NaN where a bin has no sample."""
    at = np.clip((arc / length * bins).astype(np.int64), 0, bins - 1)
    largest = np.full(bins, -np.inf)
    np.maximum.at(largest, at, values)
    return np.where(np.isfinite(largest), largest, np.nan)


def _span(start: float, end: float) -> tuple[float, float]:
    """Give start and width in millimetres, wide enough to be seen."""
    width = max(1e3 * (end - start), _LEAST_WIDTH)
    return 5e2 * (start + end) - 0.5 * width, width
