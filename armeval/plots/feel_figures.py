"""All figures of one answer to what a hand meets, ready to be saved."""

from __future__ import annotations

from typing import cast

import numpy as np
from matplotlib.figure import Figure
from matplotlib.projections.polar import PolarAxes

from armeval.evaluate.feel import Feel
from armeval.plots.feel_force import feel_band_plot, feel_force_plot, stroke_of
from armeval.plots.feel_polar import feel_polar_plot
from armeval.plots.feel_spectrum import feel_spectrum_plot
from armeval.plots.feel_workspace import feel_workspace_plot
from armeval.plots.style import figure, quiet_style

_NARROW = 6.0
_MAPS = ("ripple", "continuous_force", "dynamic_range", "mass_most")


def feel_figures(met: Feel, *, width: float = 9.0) -> dict[str, Figure]:
    """Draw the force along the path, the ripple by direction, its spectra, and maps at the height of the path if any.

    Parameters
    ----------
    met
        What a hand meets.
    width
        Of the figures [inches]; on a narrow one the two spectra stand one above the other.

    Returns
    -------
    Figures by name; a spectrum that cannot be had is left out.
    """
    with quiet_style():
        figures = {"force": _force(met, width), "direction": _direction(met, width)}
        spectra = _spectra(met, width)
        if spectra is not None:
            figures["spectrum"] = spectra
        if met.workspace is not None:
            figures["workspace"] = made = figure(width, 0.78 * width)
            flattest = int(np.argmin(np.ptp(met.motion.tip, axis=0)))
            height = float(met.motion.tip[:, flattest].mean())
            for number, name in enumerate(_MAPS):
                ax = made.add_subplot(2, 2, number + 1)
                feel_workspace_plot(met.workspace, ax, figure=name, normal=flattest, at=height)
    return figures


def _force(met: Feel, width: float) -> Figure:
    made = figure(width, 5.0)
    for number, part in enumerate(("cogging", "total")):
        ax = made.add_subplot(2, 1, number + 1)
        for state in met.states:
            feel_force_plot(state, ax, part=part)
        if part == "total":
            feel_band_plot(met.bare, ax)
        ax.legend(loc="lower right", bbox_to_anchor=(1.0, 1.0), ncols=2)
    return made


def _direction(met: Feel, width: float) -> Figure:
    made = figure(min(width, 4.0), min(width, 4.0))
    ax = cast(PolarAxes, made.add_subplot(projection="polar"))
    for state in met.states:
        feel_polar_plot(state, ax)
    ax.legend(loc="lower left", bbox_to_anchor=(0.9, 0.9))
    return made


def _spectra(met: Feel, width: float) -> Figure | None:
    both = ([state.per_metre for state in met.states], [state.per_second for state in met.states])
    shown = [spectra for spectra in both if all(spectrum is not None for spectrum in spectra)]
    if not shown:
        return None
    rows, columns = (1, len(shown)) if width > _NARROW else (len(shown), 1)
    made = figure(width, 3.6 * rows)
    for number, spectra in enumerate(shown):
        ax = made.add_subplot(rows, columns, number + 1)
        for state, spectrum in zip(met.states, spectra, strict=True):
            if spectrum is not None:
                named = not state.force.compensated
                feel_spectrum_plot(spectrum, ax, stroke=stroke_of(state), label=state.name, named=named)
        ax.legend()
    return made
