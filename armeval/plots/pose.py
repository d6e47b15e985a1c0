"""The arm in one pose beside its path, seen along one base axis."""

from __future__ import annotations

from matplotlib.axes import Axes

from armeval.arrays import FloatArray
from armeval.plots.style import INK, TARGET
from armeval.plots.view import View


def pose_plot(path: FloatArray, skeleton: FloatArray, ax: Axes, *, view: View) -> Axes:
    """Draw the path and the arm through its joints.

    Parameters
    ----------
    path
        Shape (p, 3) [m]. The planned path.
    skeleton
        Shape (n + 2, 3) [m]. Base, joints, tip.
    ax
        Where to draw.
    view
        From which side.
    """
    ax.plot(*view.of(path), color=TARGET, linewidth=1.2)
    across, up = view.of(skeleton)
    (arm,) = ax.plot(across, up, color=INK, linewidth=2.4, solid_capstyle="round", solid_joinstyle="round")
    (joints,) = ax.plot(across[:-1], up[:-1], "o", color=INK, markerfacecolor="white", markersize=4.5)
    arm.set_gid("arm")
    joints.set_gid("arm-joints")
    ax.margins(0.08)
    view.set_up(ax)
    ax.set_xlabel(ax.get_xlabel().replace(" in the base frame", ""))
    ax.set_ylabel(ax.get_ylabel().replace(" in the base frame", ""))
    return ax
