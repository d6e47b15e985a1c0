"""Tip error against path length."""

from __future__ import annotations

import numpy as np
from matplotlib.axes import Axes

from armeval.arrays import FloatArray
from armeval.evaluate.measuring.along_path import ErrorAlongPath
from armeval.plots.style import BEFORE, Stroke, label_text


def band_plot(arc: FloatArray, low: FloatArray, high: FloatArray, ax: Axes, *, stroke: Stroke, label: str = "") -> Axes:
    """Draw a band of tracking error along the path: arc lengths and its two edges, each of shape (b,) [m]."""
    ax.fill_between(
        1e3 * arc, 1e3 * low, 1e3 * high, color=stroke.color, alpha=0.2, linewidth=0.0, label=label_text(label)
    )
    return ax


def along_path_plot(
    error: ErrorAlongPath, ax: Axes, *, stroke: Stroke = BEFORE, label: str = "", band: bool = True
) -> Axes:
    """Draw the error of one run along the path: a line for all laps, a band from the best lap to the worst.

    Parameters
    ----------
    error
        Error in bins of arc length.
    ax
        Where to draw; call again with another run to lay it over.
    stroke, label
        How it is drawn and called.
    band
        Whether the band over the laps is drawn.
    """
    s = 1e3 * error.arc
    ax.plot(s, 1e3 * error.rms, color=stroke.color, linestyle=stroke.linestyle, linewidth=1.0, label=label_text(label))
    if band and len(error.laps) > 1:
        ax.fill_between(s, 1e3 * error.low, 1e3 * error.high, color=stroke.color, alpha=0.15, linewidth=0.0)
    half = 0.5 * float(s[1] - s[0]) if len(s) > 1 else float(s[0])
    ax.set_xlabel("path length s [mm]")
    ax.set_ylabel("tracking error [mm]")
    ax.set_xlim(0.0, float(s[-1]) + half)
    ax.set_ylim(0.0, max(ax.get_ylim()[1], 1.08e3 * float(np.nanmax(error.rms))))
    return ax
