"""The error budget as bars: causes, and joints within cogging and friction."""

from __future__ import annotations

import numpy as np
from matplotlib.axes import Axes

from armeval.evaluate.budget import Budget
from armeval.evaluate.replaying.run_budget import RunBudget
from armeval.plots.style import AFTER, BEFORE, INK, QUIET, label_text

_JOINT_ALPHA = 0.45


def budget_plot(budget: Budget, ax: Axes) -> Axes:
    """Draw each part of the mean squared tracking error as a bar, bare above compensated; joints stand indented.

    Parameters
    ----------
    budget
        The error budget.
    ax
        Where to draw.
    """
    keys = list(dict.fromkeys((cause, joint) for state in budget.budgets for cause, joint, _ in state.rows()))
    place = np.arange(len(keys), dtype=np.float64)
    thick = 0.8 / len(budget.budgets)
    for lane, state in enumerate(budget.budgets):
        _bars(state, keys, place + thick * (lane - 0.5 * (len(budget.budgets) - 1)), thick, ax)
    ax.axvline(0.0, color=INK, linewidth=0.6)
    ax.set_yticks(place, [label_text(f"    {joint}" if joint else cause) for cause, joint in keys])
    for label, (_, joint) in zip(ax.get_yticklabels(), keys, strict=True):
        label.set(fontsize=8.5, color=QUIET) if joint else label.set(fontsize=9)
    ax.set_ylim(len(keys) - 0.5, -0.5)
    ends = [1e6 * part.tracking for state in budget.budgets for _, _, part in state.rows()]
    reach = max(*ends, 0.0) - min(*ends, 0.0)
    ax.set_xlim(min(*ends, 0.0) - 0.01 * reach, max(*ends, 0.0) + 0.12 * reach)
    ax.set_xlabel("part of the mean squared tracking error [mm²]")
    ax.grid(visible=False, axis="y")
    ax.tick_params(axis="y", length=0.0)
    ax.legend(loc="lower right")
    return ax


def _bars(state: RunBudget, keys: list[tuple[str, str]], place: np.ndarray, thick: float, ax: Axes) -> None:
    """Draw one state's bars: filled for bare, hatched for compensated, joints paler; each with its percentage."""
    stroke, hatch = (AFTER, "////") if state.compensated else (BEFORE, None)
    parts = {(cause, joint): part for cause, joint, part in state.rows()}
    name = f"{state.label}: {1e3 * state.tracking_rms:.3g} mm rms"
    for (cause, joint), y in zip(keys, place, strict=True):
        if (cause, joint) not in parts:
            continue
        part = parts[cause, joint]
        width = 1e6 * part.tracking
        ax.barh(
            y,
            width,
            height=0.9 * thick,
            color=stroke.color,
            alpha=_JOINT_ALPHA if joint else 1.0,
            hatch=hatch,
            edgecolor="white",
            linewidth=0.0,
            label=label_text(name) if (cause, joint) == keys[0] else None,
        )
        ax.annotate(
            f"{100.0 * part.to_document(state.whole)['tracking_share']:.1f} %".replace("-0.0 %", "0.0 %"),
            (max(width, 0.0), y),
            xytext=(3.0, 0.0),
            textcoords="offset points",
            va="center",
            fontsize=8,
            color=INK,
        )
