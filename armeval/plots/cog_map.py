"""A joint's cog map round the circle, with the angles at which the joint rested."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from matplotlib.axes import Axes
from matplotlib.projections.polar import PolarAxes

from armeval.arrays import FloatArray
from armeval.model.cogmap import CogMap
from armeval.plots.style import INK, QUIET, Stroke, label_text


def cog_map_plot(cog_map: CogMap, ax: PolarAxes, *, rests: Sequence[tuple[FloatArray, Stroke, str]] = ()) -> PolarAxes:
    """Draw cogging torque over one motor turn on polar axes; rests are marked on a ring outside it.

    Parameters
    ----------
    cog_map
        The map.
    ax
        Polar axes.
    rests
        For each run: motor angles [rad] of its rests, how they are drawn, and the run's name.
    """
    turn = np.append(cog_map.angle, 2.0 * np.pi)
    torque = 1e3 * np.append(cog_map.torque, cog_map.torque[0])
    reach = float(np.abs(torque).max())
    ax.plot(turn, torque, color=INK, linewidth=0.6)
    ax.plot(turn, np.zeros_like(turn), color=QUIET, linewidth=0.6)
    ring = 1.35 * reach
    for lane, (angles, stroke, name) in enumerate(rests):
        radius = np.full(len(angles), ring + 0.3 * reach * lane)
        ax.plot(angles, radius, stroke.marker, color=stroke.color, markersize=3.0, label=label_text(name), alpha=0.8)
    ax.set_ylim(-2.2 * reach, ring + 0.3 * reach * max(1, len(rests)))
    ax.set_yticks([-reach, 0.0, reach], [])
    ax.set_thetagrids(range(0, 360, 90))
    ax.tick_params(labelsize=7)
    ax.grid(linewidth=0.4)
    return ax


def cog_orders_plot(orders: Sequence[int], amplitudes: FloatArray, ax: Axes) -> Axes:
    """Draw amplitudes [N m] of a map's significant orders as stems."""
    ax.vlines(list(orders), 0.0, 1e3 * amplitudes, color=INK, linewidth=1.4)
    ax.set_xlabel("order [cycles a motor turn]")
    ax.set_ylabel("amplitude [mN·m]")
    ax.set_ylim(bottom=0.0)
    return ax
