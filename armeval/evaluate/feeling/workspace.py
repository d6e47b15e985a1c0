"""Maps of what an arm can render over the workspace that it reaches within its joint ranges."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from armeval.arrays import BoolArray, FloatArray, IntArray
from armeval.errors import InputError
from armeval.evaluate.document import JsonValue
from armeval.evaluate.feeling.tip_abilities import TipAbilities, tip_abilities
from armeval.evaluate.feeling.tip_directions import TipDirections
from armeval.evaluate.planning.reach import REACH_TOLERANCE
from armeval.kernels.chain import tip_positions
from armeval.kernels.inverse import first_pose, poses_along
from armeval.model.arm import Arm
from armeval.model.trial import Compensation

if TYPE_CHECKING:
    import pandas as pd

_SAMPLES = 20_000
"""Poses, spread evenly over the joint ranges, that tell where the tip gets to at all."""
_POINTS = 20_000
"""Grid points aimed at where no spacing is given."""
_MOST_POINTS = 2_000_000
_FLAT = 1e-6
"""A span of the workspace below this [m] is none: the arm is planar."""


@dataclass(frozen=True, eq=False)
class WorkspaceMap:
    """What the arm can render at the points of a grid.

    Attributes
    ----------
    spacing
        Of the grid [m].
    tip
        Shape (k, 3) [m] in the base frame. The grid points that the arm reaches.
    joint
        Shape (k, n). The pose in each: of all that reach it, near the one at the neighbouring point and to the rest
        angles.
    abilities
        What the arm can render there.
    compensated
        Whether the ripple is that with compensation.
    """

    spacing: float
    tip: FloatArray
    joint: FloatArray
    abilities: TipAbilities
    compensated: bool

    def to_frame(self) -> pd.DataFrame:
        """One row a point: place [m] and figures, SI."""
        import pandas as pd

        place = {f"{axis}_m": self.tip[:, i] for i, axis in enumerate("xyz")}
        return pd.DataFrame({**place, **{key: getattr(self.abilities, name) for name, key in FIGURES.items()}})

    def to_document(self) -> dict[str, JsonValue]:
        """Give the entry of the JSON document: how each figure is spread over the workspace."""
        return {
            "spacing_m": self.spacing,
            "points": len(self.tip),
            "compensated": self.compensated,
            "near_singular_share": float(np.isnan(self.abilities.ripple).mean()),
            "figures": [{"figure": key, **spread_over(getattr(self.abilities, name))} for name, key in FIGURES.items()],
        }


FIGURES = {
    "continuous_force": "continuous_force_N",
    "friction_least": "friction_least_N",
    "friction_most": "friction_most_N",
    "ripple": "ripple_rms_N",
    "dynamic_range": "dynamic_range",
    "mass_least": "mass_least_kg",
    "mass_most": "mass_most_kg",
    "step": "tip_step_m",
    "wall_by_damping": "wall_by_damping_N_m",
    "wall_by_friction": "wall_by_friction_N_m",
    "lever": "lever",
    "isotropy": "isotropy",
}
"""Figures of :class:`TipAbilities` and their names in tables and documents."""


def spread_over(values: FloatArray) -> dict[str, float]:
    """Least, median and largest of the values that are known; NaN where none is."""
    known = values[np.isfinite(values)]
    if len(known) == 0:
        return {"least": math.nan, "median": math.nan, "most": math.nan}
    return {"least": float(known.min()), "median": float(np.median(known)), "most": float(known.max())}


def has_grid(directions: TipDirections) -> bool:
    """Whether a grid along the base axes can fill what the tip reaches: all of space, or a plane across a base axis."""
    blind = directions.blind
    return directions.count == 3 or (blind is not None and bool(np.abs(blind).max() > 1.0 - 1e-9))


def workspace_map(
    arm: Arm,
    *,
    spacing: float | None = None,
    compensated: bool = False,
    compensation: Compensation | None = None,
    carries_weight: bool | None = None,
) -> WorkspaceMap:
    """Map what an arm can render over the workspace that it reaches.

    Parameters
    ----------
    arm
        The arm, n joints; its tip moves in space, or in a plane across a base axis (see :func:`has_grid`).
    spacing
        Of the grid [m]; None: some 20,000 points.
    compensated, compensation, carries_weight
        As :func:`armeval.evaluate.feeling.tip_abilities.tip_abilities` takes them.

    Raises
    ------
    InputError
        If no point of the grid is reached, or the grid would have millions of points.
    """
    samples, tips = _samples(arm)
    low, high = tips.min(axis=0), tips.max(axis=0)
    span = np.where(high - low > _FLAT, high - low, 0.0)
    if spacing is None:
        wide = span[span > 0.0]
        spacing = float((np.prod(wide) / _POINTS) ** (1.0 / len(wide)))
    counts = np.where(span > 0.0, np.floor(span / spacing) + 1.0, 1.0).astype(np.int64)
    if not 1 <= np.prod(counts.astype(np.float64)) <= _MOST_POINTS:
        raise InputError(f"a grid of {spacing:g} m has too many points", "give a wider spacing", place="--spacing")
    grid = 0.5 * (low + high) + spacing * (_snake(counts) - 0.5 * (counts - 1))
    joint, reached = _poses(arm, grid, spacing, samples, tips)
    if not reached.any():
        raise InputError(
            f"the arm reaches no point of a grid of {spacing:g} m",
            "give a closer spacing",
            place="--spacing",
        )
    joint = np.ascontiguousarray(joint[reached])
    return WorkspaceMap(
        spacing=spacing,
        tip=grid[reached],
        joint=joint,
        abilities=tip_abilities(
            arm, joint, compensated=compensated, compensation=compensation, carries_weight=carries_weight
        ),
        compensated=compensated,
    )


def _samples(arm: Arm) -> tuple[FloatArray, FloatArray]:
    """Poses (k, n) spread evenly over the joint ranges, and their tips (k, 3)."""
    chain = arm.chain
    n = chain.count
    low = np.where(np.isfinite(chain.lower), chain.lower, -np.pi)
    high = np.where(np.isfinite(chain.upper), chain.upper, np.pi)
    share = (np.arange(1, _SAMPLES + 1)[:, None] * np.sqrt(np.arange(2, n + 2) + (np.arange(n) >= 2))) % 1.0
    share[:: max(2, n)] = np.rint(share[:: max(2, n)])  # corners of the ranges: the tip is often farthest there
    joint = np.ascontiguousarray(low + share * (high - low))
    return joint, tip_positions(chain.arrays, joint)


def _snake(counts: IntArray) -> FloatArray:
    """Give the indices (k, 3) of all grid points in an order in which each is a neighbour of the one before."""
    x, y, z = (np.arange(count) for count in counts)
    order = np.empty((*counts, 3))
    for i in x:
        ys = y if i % 2 == 0 else y[::-1]
        for number, j in enumerate(ys):
            zs = z if (i * len(y) + number) % 2 == 0 else z[::-1]
            order[i, number] = np.column_stack([np.full(len(z), i), np.full(len(z), j), zs])
    return order.reshape(-1, 3)


def _poses(
    arm: Arm, grid: FloatArray, spacing: float, samples: FloatArray, tips: FloatArray
) -> tuple[FloatArray, BoolArray]:
    """Poses (k, n) and whether they reach the grid's points; missed points near a sample's tip are tried from there."""
    from scipy.spatial import cKDTree

    chain, rest = arm.chain.arrays, arm.rest
    joint, left = poses_along(chain, grid, rest, first_pose(chain, grid[0], rest, REACH_TOLERANCE))
    missed = np.flatnonzero(left > REACH_TOLERANCE)
    distance, nearest = (np.asarray(found) for found in cKDTree(tips).query(grid[missed]))
    for point, sample in zip(missed[distance < spacing], nearest[distance < spacing], strict=True):
        again, again_left = poses_along(chain, grid[point : point + 1], rest, samples[sample])
        if again_left[0] <= REACH_TOLERANCE:
            joint[point], left[point] = again[0], again_left[0]
    return joint, left <= REACH_TOLERANCE
