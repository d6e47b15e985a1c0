"""Figures of what a hand meets show what the answer holds."""

from __future__ import annotations

import numpy as np
import pytest

from armeval.evaluate.feel import feel
from armeval.plots.feel_force import feel_band_plot, feel_force_plot, stroke_of
from armeval.plots.feel_polar import feel_polar_plot
from armeval.plots.feel_spectrum import feel_spectrum_plot
from armeval.plots.feel_workspace import feel_workspace_plot
from armeval.plots.style import figure, quiet_style
from tests.evaluate.test_feel import trial_of


@pytest.fixture(scope="module")
def met():
    return feel(trial_of(), members=8, workspace=True, spacing=0.02)


def test_the_force_is_drawn_in_newtons_over_millimetres_of_way(met):
    ax = figure(6, 2).add_subplot()
    assert feel_force_plot(met.bare, ax, part="total") is ax
    feel_band_plot(met.bare, ax)
    (line,) = (line for line in ax.get_lines() if line.get_label() == "bare: total")
    along = met.bare.force.along(met.bare.force.total)
    assert np.interp(80.0, line.get_xdata(), line.get_ydata()) == pytest.approx(
        np.interp(0.08, met.motion.arc, along), abs=1e-3
    )
    assert "N" in ax.get_ylabel()
    assert "mm" in ax.get_xlabel()


def test_bare_and_compensated_differ_in_colour_and_in_line(met):
    bare, compensated = (stroke_of(state) for state in met.states)
    assert bare.color != compensated.color
    assert bare.linestyle != compensated.linestyle


def test_the_polar_plot_reaches_as_far_as_the_worst_direction(met):
    ax = figure(3, 3).add_subplot(projection="polar")
    feel_polar_plot(met.bare, ax)
    (line,) = ax.get_lines()
    worst = np.sqrt(np.linalg.eigvalsh(met.bare.ripple.worst_covariance)[-1])
    assert line.get_ydata().max() == pytest.approx(worst, rel=1e-3)


@pytest.mark.parametrize("axis", ["per_metre", "per_second"])
def test_the_spectrum_names_its_peaks(met, axis):
    ax = figure(4, 3).add_subplot()
    spectrum = getattr(met.bare, axis)
    feel_spectrum_plot(spectrum, ax, stroke=stroke_of(met.bare), label="bare")
    told = {text.get_text() for text in ax.texts}
    assert told == {f"{peak.joint} {peak.order}" for peak in spectrum.peaks[:5]}
    assert told


@pytest.mark.parametrize("name", ["ripple", "continuous_force", "wall_by_damping", "isotropy"])
def test_the_workspace_map_shows_every_known_point_of_its_slice(met, name):
    ax = figure(4, 3).add_subplot()
    with quiet_style():
        feel_workspace_plot(met.workspace, ax, figure=name)
    (mesh,) = ax.collections
    shown = np.ma.masked_invalid(mesh.get_array())
    values = getattr(met.workspace.abilities, name)
    assert shown.count() == np.isfinite(values).sum()  # a planar arm's map is one slice
    assert shown.max() == pytest.approx(np.nanmax(values))
