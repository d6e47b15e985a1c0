"""One look for all figures: type, lines and the few colours, each with a second sign for eyes that see no colour.

Before and after are a rust and a blue that stay apart for all common kinds of colour blindness, and also differ in line
style, marker and filling, so that a copy in black and white can be read.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from contextlib import contextmanager
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any, Literal

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

INK = "#22262a"
QUIET = "#596168"
GRID = "#e3e6e8"
TARGET = "#8d959c"


@dataclass(frozen=True)
class Stroke:
    """How one thing is drawn in every figure."""

    color: str
    linestyle: Literal["-", "--", ":"]
    marker: str


BEFORE = Stroke("#b34700", "-", "o")
AFTER = Stroke("#0063a6", "--", "s")
PREDICTED_BEFORE = Stroke("#b34700", ":", "o")
PREDICTED_AFTER = Stroke("#0063a6", ":", "s")
WARN = "#8f5c00"

RC: Mapping[str, Any] = {
    "font.family": "sans-serif",
    "font.sans-serif": ["DejaVu Sans"],
    "font.size": 9.0,
    "axes.titlesize": 9.0,
    "axes.titleweight": "bold",
    "axes.titlelocation": "left",
    "axes.labelsize": 9.0,
    "xtick.labelsize": 8.5,
    "ytick.labelsize": 8.5,
    "legend.fontsize": 8.5,
    "axes.edgecolor": QUIET,
    "axes.labelcolor": INK,
    "text.color": INK,
    "xtick.color": INK,
    "ytick.color": INK,
    "axes.linewidth": 0.6,
    "axes.spines.top": False,
    "axes.spines.right": False,
    "axes.grid": True,
    "axes.axisbelow": True,
    "grid.color": GRID,
    "grid.linewidth": 0.6,
    "lines.linewidth": 1.2,
    "legend.frameon": False,
    "figure.dpi": 100.0,
    "savefig.dpi": 200.0,
    # Text stays text: it can be searched, read aloud and scaled; the fonts come from the reader's machine.
    "svg.fonttype": "none",
    # Equal input must give equal bytes.
    "svg.hashsalt": "armeval",
}


def label_text(text: str, most: int = 60) -> str:
    """Make text from a file safe to draw: a dollar sign would start a formula, and a long text would not fit."""
    cut = text if len(text) <= most else text[: most - 1] + "…"
    return cut.replace("$", r"\$")


@contextmanager
def quiet_style() -> Iterator[None]:
    """Draw with the look of the report while the context lasts."""
    import matplotlib as mpl

    with mpl.rc_context(dict(RC)):  # type: ignore[arg-type]  # the stub wants literal keys
        yield


def figure(width: float, height: float) -> Figure:
    """Give an empty figure [inches] that belongs to no window; its parts find their places themselves."""
    from matplotlib.backends.backend_agg import FigureCanvasAgg
    from matplotlib.figure import Figure

    made = Figure(figsize=(width, height), layout="constrained")
    FigureCanvasAgg(made)
    return made


def strip_figure(
    width: float, heights: Sequence[float], *, above: float = 0.08, between: float = 0.16
) -> tuple[Figure, list[Axes]]:
    """Give a figure of strips over one axis, in the same places whatever is drawn on them.

    Parameters
    ----------
    width
        Of the figure [inches].
    heights
        Of the strips [inches], the uppermost first.
    above, between
        Space above the first strip and between strips [inches].
    """
    from matplotlib.backends.backend_agg import FigureCanvasAgg
    from matplotlib.figure import Figure

    left, right, below = 0.92, 0.12, 0.46
    height = above + sum(heights) + between * (len(heights) - 1) + below
    made = Figure(figsize=(width, height))
    FigureCanvasAgg(made)
    axes: list[Axes] = []
    top = height - above
    for strip in heights:
        box = (left / width, (top - strip) / height, (width - left - right) / width, strip / height)
        axes.append(made.add_axes(box, sharex=axes[0] if axes else None))
        top -= strip + between
    for k, ax in enumerate(axes):
        ax.xaxis.set_gid(f"x-axis-{k}")
        ax.tick_params(labelbottom=ax is axes[-1])
        ax.yaxis.set_label_coords(-0.4 / (width - left - right), 0.5)
    return made, axes
