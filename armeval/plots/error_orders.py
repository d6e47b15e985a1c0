"""Spectrum of a joint's error by order of motor angle."""

from __future__ import annotations

import math
from collections.abc import Sequence

from matplotlib.axes import Axes

from armeval.evaluate.measuring.error_orders import ErrorOrders
from armeval.plots.style import QUIET, Stroke, label_text


def error_orders_plot(
    runs: Sequence[tuple[str, ErrorOrders, Stroke]], ax: Axes, *, expected: Sequence[int] = (), slides: bool = False
) -> Axes:
    """Draw the amplitude of one joint's error by order; expected orders are marked.

    Parameters
    ----------
    runs
        Name, spectrum and stroke of each run.
    ax
        Where to draw.
    expected
        Orders that the motor's make or its cog map lets expect.
    slides
        Whether the joint slides, so that its error is a length.
    """
    scale, unit = (1e3, "mm") if slides else (math.degrees(1.0), "deg")
    for order in expected:
        ax.axvline(order, color=QUIET, linewidth=0.8, linestyle=(0, (1, 2)))
        ax.annotate(
            f"{order}", (order, 1.0), xycoords=("data", "axes fraction"), xytext=(0, 2),
            textcoords="offset points", ha="center", fontsize=8, color=QUIET,
        )  # fmt: skip
    for name, spectrum, stroke in runs:
        ax.plot(
            spectrum.order,
            scale * spectrum.amplitude,
            color=stroke.color,
            linestyle=stroke.linestyle,
            linewidth=0.9,
            label=label_text(name),
        )
    ax.set_xlabel("order [cycles a motor turn]")
    ax.set_ylabel(f"joint error [{unit}]")
    ax.set_ylim(bottom=0.0)
    if runs:
        ax.set_xlim(0.0, float(runs[0][1].order[-1]))
    return ax
