"""The look: colours that can be read, and told apart without colour."""

from __future__ import annotations

import re
from pathlib import Path

import numpy as np
import pytest
from matplotlib.colors import to_rgb

from armeval.plots.style import AFTER, BEFORE, INK, QUIET, TARGET, WARN, figure, quiet_style, strip_figure

CSS = (Path(__file__).parents[2] / "armeval" / "report" / "page" / "report.css").read_text(encoding="utf-8")
ROOT = dict(re.findall(r"--(\w+): (#[0-9a-f]{6})", CSS))


def luminance(color: str) -> float:
    """Relative luminance of the Web Content Accessibility Guidelines 2.2."""
    parts = np.array(to_rgb(color))
    linear = np.where(parts <= 0.04045, parts / 12.92, ((parts + 0.055) / 1.055) ** 2.4)
    return float(linear @ [0.2126, 0.7152, 0.0722])


def contrast(one: str, other: str) -> float:
    """Contrast ratio of the same guidelines."""
    bright, dark = sorted((luminance(one), luminance(other)), reverse=True)
    return (bright + 0.05) / (dark + 0.05)


def test_black_on_white_has_contrast_21() -> None:
    assert contrast("#000000", "#ffffff") == pytest.approx(21.0)


@pytest.mark.parametrize("color", [INK, QUIET, WARN, BEFORE.color, AFTER.color, *(ROOT[k] for k in ("ink", "quiet"))])
@pytest.mark.parametrize("ground", [ROOT["paper"], ROOT["wash"]])
def test_text_stands_out_from_its_ground(color: str, ground: str) -> None:
    """4.5 to 1 for text of body size: success criterion 1.4.3, level AA."""
    assert contrast(color, ground) >= 4.5


def test_page_and_figures_share_their_colours() -> None:
    shared = [ROOT[name] for name in ("ink", "quiet", "before", "after", "target")]
    assert shared == [INK, QUIET, BEFORE.color, AFTER.color, TARGET]


def test_before_and_after_differ_without_colour() -> None:
    assert BEFORE.linestyle != AFTER.linestyle
    assert BEFORE.marker != AFTER.marker


@pytest.mark.parametrize(
    "sees",
    [
        ((0.152286, 1.052583, -0.204868), (0.114503, 0.786281, 0.099216), (-0.003882, -0.048116, 1.051998)),
        ((0.367322, 0.860646, -0.227968), (0.280085, 0.672501, 0.047413), (-0.011820, 0.042940, 0.968881)),
        ((1.255528, -0.076749, -0.178779), (-0.078411, 0.930809, 0.147602), (0.004733, 0.691367, 0.303900)),
    ],
    ids=["protanopia", "deuteranopia", "tritanopia"],
)
def test_before_and_after_stay_apart_in_colour_blind_sight(sees: tuple[tuple[float, ...], ...]) -> None:
    """Full dichromacy after G. M. Machado, M. M. Oliveira and L. A. F. Fernandes, "A physiologically-based model for
    simulation of color vision deficiency", IEEE Trans. Visualization and Computer Graphics 15(6), 2009 (matrices from
    memory). Colours of which one channel differs by a quarter of its range are told apart at a glance.
    """

    def linear(color: str) -> np.ndarray:
        parts = np.array(to_rgb(color))
        return np.where(parts <= 0.04045, parts / 12.92, ((parts + 0.055) / 1.055) ** 2.4)

    def shown(color: str) -> np.ndarray:
        seen = np.clip(np.array(sees) @ linear(color), 0.0, 1.0)
        return np.where(seen <= 0.0031308, 12.92 * seen, 1.055 * seen ** (1 / 2.4) - 0.055)

    assert np.abs(shown(BEFORE.color) - shown(AFTER.color)).max() > 0.25


def test_the_style_ends_with_its_context() -> None:
    import matplotlib as mpl

    before = mpl.rcParams["font.size"], mpl.rcParams["svg.fonttype"]
    with quiet_style():
        assert mpl.rcParams["svg.fonttype"] == "none"
    assert (mpl.rcParams["font.size"], mpl.rcParams["svg.fonttype"]) == before


def test_figures_belong_to_no_window() -> None:
    import matplotlib.pyplot as plt

    figure(3.0, 2.0)
    strip_figure(3.0, [1.0, 1.0])
    assert plt.get_fignums() == []


def test_strips_stand_over_each_other_whatever_they_show() -> None:
    _, one = strip_figure(8.0, [1.0, 2.0])
    _, other = strip_figure(8.0, [0.5, 0.5, 0.5])
    assert {ax.get_position().x0 for ax in (*one, *other)} == {one[0].get_position().x0}
    assert {ax.get_position().x1 for ax in (*one, *other)} == {one[0].get_position().x1}
