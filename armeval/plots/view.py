"""From which side a path or an arm is drawn: along a base axis, so that it lies broad."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np
from matplotlib.axes import Axes

from armeval.arrays import FloatArray

_NAMES = ("x", "y", "z")


@dataclass(frozen=True)
class View:
    """Two base axes on paper.

    Attributes
    ----------
    across, up
        Base axes, 0 to 2, that run across the paper and up.
    leftward
        Whether values fall from left to right: the picture is turned, not mirrored.
    """

    across: int
    up: int
    leftward: bool = False

    def of(self, points: FloatArray) -> tuple[FloatArray, FloatArray]:
        """Give what is drawn across and up [mm] of points of shape (k, 3) [m]."""
        return 1e3 * points[:, self.across], 1e3 * points[:, self.up]

    def set_up(self, ax: Axes) -> Axes:
        """Label the axes and draw both at one scale."""
        ax.set_xlabel(f"{_NAMES[self.across]} in the base frame [mm]")
        ax.set_ylabel(f"{_NAMES[self.up]} in the base frame [mm]")
        ax.set_aspect("equal", adjustable="datalim")
        if self.leftward:
            ax.xaxis.set_inverted(True)
        return ax

    def to_document(self) -> dict[str, Any]:
        """Give the entry in the linked view's data."""
        return {"across": self.across, "up": self.up}


def broad_view(points: FloatArray) -> View:
    """Look at points of shape (k, 3) along the base axis in which they are flattest, the longer side across."""
    extent = np.ptp(points, axis=0)
    first, second = sorted(int(axis) for axis in np.argsort(extent, kind="stable")[-2:])
    if extent[second] > extent[first] and second == 1:  # x up and y to the left: seen from above, turned by a quarter
        return View(across=1, up=0, leftward=True)
    return View(across=first, up=second)


def side_view(points: FloatArray, front: View) -> View | None:
    """Look across the broader axis of another view; None where points of shape (k, 3) lie flat in that view."""
    extent = np.ptp(points, axis=0)
    third = 3 - front.across - front.up
    if extent[third] < 1e-3:
        return None
    if third == 2:
        return View(across=max(front.across, front.up, key=lambda axis: float(extent[axis])), up=2)
    return View(across=third, up=2)
