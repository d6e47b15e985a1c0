"""Ripple by direction at one pose, on polar axes."""

from __future__ import annotations

import numpy as np
from matplotlib.projections.polar import PolarAxes
from matplotlib.ticker import MaxNLocator

from armeval.evaluate.feeling.feel_state import FeelState
from armeval.plots.feel_force import stroke_of
from armeval.plots.view import broad_view


def feel_polar_plot(state: FeelState, ax: PolarAxes) -> PolarAxes:
    """Draw the RMS ripple at the state's worst pose against the direction of the force; call again with another state.

    The motors' angles may be anything: along the unit vector u it is sqrt(u^T C u). Directions lie in the plane that
    the path is drawn in, turned as it is there.
    """
    motion, covariance = state.force.motion, state.ripple.worst_covariance
    view = broad_view(motion.tip)
    turn = np.linspace(0.0, 2.0 * np.pi, 361)
    rightward = -1.0 if view.leftward else 1.0
    ways = np.zeros((len(turn), 3))
    ways[:, view.across], ways[:, view.up] = rightward * np.cos(turn), np.sin(turn)
    rms = np.sqrt(np.maximum(np.einsum("ki,ij,kj->k", ways, covariance, ways), 0.0))
    stroke = stroke_of(state)
    ax.plot(turn, rms, color=stroke.color, linestyle=stroke.linestyle, label=state.name)
    ax.set_rlim(0.0)
    right, left = ("-", "+") if view.leftward else ("+", "-")
    across, up = "xyz"[view.across], "xyz"[view.up]
    ax.set_thetagrids((0, 90, 180, 270), [f"{right}{across}", f"+{up}", f"{left}{across}", f"-{up}"])
    ax.yaxis.set_major_locator(MaxNLocator(3))
    ax.set_rlabel_position(45.0)
    ax.tick_params(labelsize=8)
    ax.set_title("rms ripple [N] by direction", fontsize=9)
    return ax
