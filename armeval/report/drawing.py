"""A matplotlib figure as text that can stand inside a page: the same bytes for the same figure."""

from __future__ import annotations

import io
import json
import re
import warnings
from collections.abc import Callable, Mapping
from dataclasses import dataclass
from html import escape

from matplotlib.axes import Axes
from matplotlib.figure import Figure

from armeval.plots.style import quiet_style

WIDE, NARROW = 8.0, 3.75
"""Widths [inches] of a figure on a page and on a hand-held screen."""

_HEAD = re.compile(r"^.*?(?=<svg)", re.DOTALL)
_METADATA = re.compile(r"\s*<metadata>.*?</metadata>", re.DOTALL)
_SIZE = re.compile(r'<svg\b[^>]*?viewBox="(?P<box>[^"]*)"[^>]*>')
_ID = re.compile(r'\b(id|xlink:href)="(#?)')
_URL = re.compile(r"url\(#")
_TAG = re.compile(r"<[^>]*>")
_NUMBER = re.compile(r"-?\d+\.\d{3,}")
_LINES = re.compile(r"\n\s*")


@dataclass(frozen=True)
class Drawing:
    """One figure of the report.

    Attributes
    ----------
    name
        Of its files, and of its ids within the page.
    caption
        What it shows, in a sentence or two.
    wide, narrow
        SVG elements for a page and for a hand-held screen; ``narrow`` is empty where the wide one does for both.
    file
        The wide figure as an SVG file of its own.
    png
        The same at print size.
    """

    name: str
    caption: str
    wide: str
    narrow: str
    file: str
    png: bytes


@dataclass(frozen=True)
class Plan:
    """How a figure is made: drawn once for each width.

    Attributes
    ----------
    name, caption
        As in :class:`Drawing`.
    draw
        Makes the figure for a width [inches].
    alternative
        What is read aloud in its place.
    data
        Given the finished figure, data attributes for its SVG element.
    kind
        Class of the SVG element.
    wide, narrow
        Widths [inches]; without a narrow one the wide one does for both.
    """

    name: str
    caption: str
    draw: Callable[[float], Figure]
    alternative: str
    data: Callable[[Figure], Mapping[str, object]] | None = None
    kind: str = "plain"
    wide: float = WIDE
    narrow: float | None = NARROW


def render(plan: Plan) -> Drawing:
    """Draw a figure for both widths and for print."""
    with quiet_style(), warnings.catch_warnings():
        # A run may be named in letters that the font lacks; they then show as boxes on paper.
        warnings.filterwarnings("ignore", message="Glyph .* missing from font")
        figure = plan.draw(plan.wide)
        raw = _svg(figure)
        wide = _inline(raw, f"{plan.name}-w", plan, figure)
        figure.set_layout_engine("none")  # its places are found; the second drawing keeps them
        png = io.BytesIO()
        figure.savefig(png, format="png", metadata={"Software": None})
        narrow = ""
        if plan.narrow is not None:
            slim = plan.draw(plan.narrow)
            narrow = _inline(_svg(slim), f"{plan.name}-n", plan, slim)
    return Drawing(plan.name, plan.caption, wide, narrow, _rounded(raw), png.getvalue())


def box(ax: Axes) -> tuple[float, float, float, float]:
    """Give left, top, right, bottom of axes in the SVG's own units."""
    figure = ax.figure
    width, height = 72.0 * figure.get_size_inches()  # type: ignore[union-attr]
    place = ax.get_position()
    return (
        round(place.x0 * width, 2),
        round((1.0 - place.y1) * height, 2),
        round(place.x1 * width, 2),
        round((1.0 - place.y0) * height, 2),
    )


def data_map(ax: Axes) -> tuple[float, float, float, float]:
    """Give a, b, c, d so that (x, y) of the data stands at (a + b x, c + d y) in the SVG's own units."""
    left, top, right, bottom = box(ax)
    (x0, x1), (y0, y1) = ax.get_xlim(), ax.get_ylim()
    b, d = (right - left) / (x1 - x0), (top - bottom) / (y1 - y0)
    return round(left - b * x0, 4), round(b, 6), round(bottom - d * y0, 4), round(d, 6)


def _svg(figure: Figure) -> str:
    text = io.StringIO()
    figure.savefig(text, format="svg", metadata={"Date": None, "Creator": None, "Format": None, "Type": None})
    return text.getvalue()


def _inline(svg: str, prefix: str, plan: Plan, figure: Figure) -> str:
    body = _METADATA.sub("", _HEAD.sub("", svg))
    body = _ID.sub(rf'\1="\2{prefix}-', body)
    body = _URL.sub(f"url(#{prefix}-", body)
    attributes = {key: json.dumps(value) for key, value in (plan.data(figure) if plan.data else {}).items()}
    data = "".join(f' data-{key}="{escape(value)}"' for key, value in attributes.items())
    found = _SIZE.search(body)
    if found is None:
        raise RuntimeError("the figure gave no SVG element")
    head = (
        f'<svg class="{plan.kind}" role="img" aria-label="{escape(plan.alternative)}" '
        f'viewBox="{found["box"]}" xmlns:xlink="http://www.w3.org/1999/xlink"{data}>'
    )
    return head + _LINES.sub("\n", _rounded(body[found.end() :])).rstrip()


def _rounded(svg: str) -> str:
    """Cut coordinates to hundredths of a point: finer is not seen, and differs between machines."""
    return _TAG.sub(lambda tag: _NUMBER.sub(_cut, tag[0]), svg)


def _cut(number: re.Match[str]) -> str:
    return f"{float(number[0]):.2f}".rstrip("0").rstrip(".")
