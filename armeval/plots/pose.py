"""The arm in one pose beside its path, seen along one base axis."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from matplotlib.axes import Axes

from armeval.arrays import FloatArray
from armeval.plots.style import INK, TARGET

_NAMES = ("x", "y", "z")


def pose_plot(path: FloatArray, skeleton: FloatArray, plane: Sequence[int], ax: Axes) -> Axes:
    """Draw the path and the arm through its joints.

    Parameters
    ----------
    path
        Shape (p, 3) [m]. The planned path.
    skeleton
        Shape (n + 2, 3) [m]. Base, joints, tip.
    plane
        Which two base axes are drawn, horizontal first.
    ax
        Where to draw.
    """
    a, b = plane
    ax.plot(1e3 * path[:, a], 1e3 * path[:, b], color=TARGET, linewidth=1.2)
    (arm,) = ax.plot(1e3 * skeleton[:, a], 1e3 * skeleton[:, b], color=INK, linewidth=2.4, solid_capstyle="round")
    (joints,) = ax.plot(
        1e3 * skeleton[:-1, a], 1e3 * skeleton[:-1, b], "o", color=INK, markerfacecolor="white", markersize=4.5
    )
    arm.set_gid("arm")
    joints.set_gid("arm-joints")
    ax.set_xlabel(f"{_NAMES[a]} [mm]")
    ax.set_ylabel(f"{_NAMES[b]} [mm]")
    ax.set_aspect("equal", adjustable="datalim")
    return ax


def spread_of(points: FloatArray) -> FloatArray:
    """Extent of points of shape (k, 3) along each base axis, shape (3,) [m]."""
    return np.asarray(np.ptp(points, axis=0))
