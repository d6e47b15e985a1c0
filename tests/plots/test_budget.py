"""The budget as bars: what is drawn is what was found."""

import pytest

from armeval.plots.budget import budget_plot
from armeval.plots.style import figure, quiet_style
from tests.cli.test_budget import MADE_UP


def test_each_bar_is_as_long_as_its_part():
    with quiet_style():
        ax = budget_plot(MADE_UP, figure(6.0, 4.0).add_subplot())
        widths = [bar.get_width() for bar in ax.patches]
    assert widths == pytest.approx([3.0, 3.0, -0.5, -0.5, 0.0, 1.5])
    names = [label.get_text().strip() for label in ax.get_yticklabels()]
    assert names == ["cogging", "lift", "friction", "lift", "encoder", "left without causes"]


def test_the_axes_are_given_back_with_the_error_in_the_legend():
    with quiet_style():
        ax = figure(6.0, 4.0).add_subplot()
        assert budget_plot(MADE_UP, ax) is ax
        assert [text.get_text() for text in ax.get_legend().get_texts()] == ["bare: 2 mm rms"]
