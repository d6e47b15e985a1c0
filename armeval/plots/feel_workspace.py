"""A map of the workspace: one figure of what the arm can render, over a slice through the grid."""

from __future__ import annotations

import numpy as np
from matplotlib.axes import Axes
from matplotlib.collections import QuadMesh
from matplotlib.colors import LogNorm, Normalize

from armeval.arrays import FloatArray
from armeval.evaluate.feeling.workspace import WorkspaceMap
from armeval.plots.style import INK

_AXES = "xyz"
_FEW = 0.02, 0.98  # quantiles that the colours span: near-singular poses would leave no colour to the others


def feel_workspace_plot(
    mapped: WorkspaceMap, ax: Axes, *, figure: str = "ripple", normal: int | None = None, at: float | None = None
) -> Axes:
    """Draw one figure over the slice of the grid that is nearest to a plane.

    Parameters
    ----------
    mapped
        The maps.
    ax
        Where to draw; a bar of colours is put beside it.
    figure
        A field of :class:`armeval.evaluate.feeling.tip_abilities.TipAbilities`.
    normal
        Base axis (0, 1, 2) across the slice; None: the one along which the workspace is least wide.
    at
        Where the slice lies along it [m]; None: where it holds most points.
    """
    tip = mapped.tip
    across = int(np.argmin(np.ptp(tip, axis=0))) if normal is None else normal
    turned = across == 2  # seen from above: x up and y to the left, as a path is drawn
    first, second = (1, 0) if turned else tuple(axis for axis in range(3) if axis != across)
    layer = np.rint((tip[:, across] - tip[:, across].min()) / mapped.spacing).astype(np.int64)
    if at is None:
        chosen = int(np.bincount(layer).argmax())
    else:
        chosen = int(np.clip(np.rint((at - tip[:, across].min()) / mapped.spacing), 0, layer.max()))
    here = layer == chosen
    values = np.asarray(getattr(mapped.abilities, figure))[here]
    mesh = _mesh(tip[here][:, [first, second]], values, mapped.spacing, ax)
    bar = ax.figure.colorbar(mesh, ax=ax, shrink=0.85)
    bar.set_label(f"{figure.replace('_', ' ')} [{_UNITS.get(figure, '')}]".replace(" []", ""))
    ax.set_xlabel(f"{_AXES[first]} in the base frame [mm]")
    ax.set_ylabel(f"{_AXES[second]} in the base frame [mm]")
    ax.set_title(f"{_AXES[across]} = {1e3 * float(tip[here][0, across]):.0f} mm", fontsize=9)
    ax.set_aspect("equal")
    if turned:
        ax.xaxis.set_inverted(True)
    ax.plot([0.0], [0.0], "+", color=INK, markersize=8)
    return ax


_UNITS = {
    "continuous_force": "N",
    "friction_least": "N",
    "friction_most": "N",
    "ripple": "N rms",
    "mass_least": "kg",
    "mass_most": "kg",
    "step": "m",
    "wall_by_damping": "N/m",
    "wall_by_friction": "N/m",
}


def _mesh(places: FloatArray, values: FloatArray, spacing: float, ax: Axes) -> QuadMesh:
    start = places.min(axis=0)
    index = np.rint((places - start) / spacing).astype(np.int64)
    field = np.full(tuple(index.max(axis=0) + 1), np.nan)
    field[index[:, 0], index[:, 1]] = values
    known = values[np.isfinite(values)]
    low, high = np.quantile(known, _FEW) if len(known) else (0.0, 1.0)
    norm = LogNorm(low, high) if low > 0.0 and high > 4.0 * low else Normalize(low, high)
    edges = [1e3 * (start[i] + spacing * (np.arange(field.shape[i] + 1) - 0.5)) for i in range(2)]
    return ax.pcolormesh(*edges, field.T, norm=norm, cmap="cividis", rasterized=True)
