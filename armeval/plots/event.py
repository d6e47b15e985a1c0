"""One sticking event close up: target, angle and torque through rest and release."""

from __future__ import annotations

import math

from matplotlib.axes import Axes

from armeval.arrays import BoolArray
from armeval.evaluate.lap_track import LapTrack
from armeval.evaluate.sticking.sticking_event import StickingEvent
from armeval.plots.style import GRID, INK, TARGET, Stroke


def _shown(event: StickingEvent, track: LapTrack) -> BoolArray:
    margin = max(0.15, 0.8 * event.dwell)
    return (track.time >= event.start - margin) & (track.time <= event.end + margin)


def event_angle_plot(
    event: StickingEvent, track: LapTrack, index: int, ax: Axes, *, stroke: Stroke, slides: bool = False
) -> Axes:
    """Draw target and angle of the joint through its rest, which is shaded.

    Parameters
    ----------
    event, track
        The event and its lap.
    index
        The joint's place in the chain.
    ax
        Where to draw; time runs from the start of the rest.
    stroke
        How the angle is drawn.
    slides
        Whether the joint slides.
    """
    scale, unit = (1e3, "mm") if slides else (math.degrees(1.0), "deg")
    shown = _shown(event, track)
    time = 1e3 * (track.time[shown] - event.start)
    ax.axvspan(0.0, 1e3 * event.dwell, color=GRID, linewidth=0.0, zorder=0)
    ax.plot(time, scale * track.target[shown, index], color=TARGET, linewidth=2.4, label="target")
    ax.plot(time, scale * track.angle[shown, index], color=stroke.color, linewidth=1.2, label="angle")
    ax.set_ylabel(f"joint angle [{unit}]" if not slides else f"joint position [{unit}]")
    ax.set_xlabel("time from the start of the rest [ms]")
    ax.set_xlim(float(time[0]), float(time[-1]))
    return ax


def event_torque_plot(event: StickingEvent, track: LapTrack, index: int, ax: Axes, *, slides: bool = False) -> Axes:
    """Draw the commanded torque of the joint through its rest; the track must know it."""
    if track.torque is None:
        return ax
    scale, unit = (1.0, "N") if slides else (1e3, "mN·m")
    shown = _shown(event, track)
    time = 1e3 * (track.time[shown] - event.start)
    ax.axvspan(0.0, 1e3 * event.dwell, color=GRID, linewidth=0.0, zorder=0)
    ax.plot(time, scale * track.torque[shown, index], color=INK, linewidth=1.0)
    ax.set_ylabel(f"torque [{unit}]" if not slides else f"force [{unit}]")
    ax.set_xlabel("time from the start of the rest [ms]")
    ax.set_xlim(float(time[0]), float(time[-1]))
    return ax
