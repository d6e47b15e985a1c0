"""The force that a hand meets along the path, by where it comes from."""

from __future__ import annotations

import numpy as np
from matplotlib.axes import Axes

from armeval.evaluate.feeling.feel_state import FeelState
from armeval.plots.style import AFTER, BEFORE, INK, QUIET, Stroke

_MOST_POINTS = 4000  # of one drawn line; more cannot be told apart on paper


def stroke_of(state: FeelState) -> Stroke:
    """How a state of the arm is drawn in every figure."""
    return AFTER if state.force.compensated else BEFORE


def feel_force_plot(state: FeelState, ax: Axes, *, part: str = "cogging", label: str | None = None) -> Axes:
    """Draw one part of the force along the motion, over the way of the tip; call again with another state.

    Parameters
    ----------
    state
        What the hand meets in one state of the arm.
    ax
        Where to draw.
    part
        ``cogging``, ``friction``, ``inertia``, ``gravity``, ``command`` or ``total``.
    label
        In the legend; None: the state's name and the part.
    """
    force, stroke = state.force, stroke_of(state)
    vector = force.total if part == "total" else force.part(part)  # type: ignore[arg-type]
    some = slice(None, None, max(1, len(force.motion.arc) // _MOST_POINTS))
    ax.plot(
        1e3 * force.motion.arc[some],
        force.along(vector)[some],
        color=stroke.color,
        linestyle=stroke.linestyle,
        linewidth=0.8,
        label=f"{state.name}: {part}" if label is None else label,
    )
    ax.axhline(0.0, color=QUIET, linewidth=0.6)
    ax.set_xlabel("way of the tip [mm]")
    ax.set_ylabel("force along the motion [N]")
    ax.set_xlim(1e3 * float(force.motion.arc[0]), 1e3 * float(force.motion.arc[-1]))
    return ax


def feel_band_plot(state: FeelState, ax: Axes) -> Axes:
    """Shade how far dry friction leaves the force open to either side, where a joint rests or turns round [N]."""
    force = state.force
    along = force.along(force.total)
    low, high = along - force.band, along + force.band
    ax.fill_between(1e3 * force.motion.arc, low, high, where=np.isfinite(low), color=INK, alpha=0.15, linewidth=0.0)
    return ax
