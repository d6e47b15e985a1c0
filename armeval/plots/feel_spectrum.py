"""The ripple's spectrum, its peaks named by joint and order."""

from __future__ import annotations

import numpy as np
from matplotlib.axes import Axes

from armeval.evaluate.feeling.ripple_spectrum import RippleSpectrum
from armeval.plots.style import INK, Stroke

_NAMED = 5


def feel_spectrum_plot(spectrum: RippleSpectrum, ax: Axes, *, stroke: Stroke, label: str, named: bool = True) -> Axes:
    """Draw the ripple's amplitude density against frequency; call again with another state.

    Parameters
    ----------
    spectrum
        Per metre or per second.
    ax
        Where to draw; both axes become logarithmic.
    stroke, label
        How it is drawn and called.
    named
        Whether the largest peaks are named.
    """
    shown = spectrum.frequency > 0.0
    level = np.sqrt(spectrum.density[shown])
    ax.loglog(
        spectrum.frequency[shown], level, color=stroke.color, linestyle=stroke.linestyle, linewidth=0.9, label=label
    )
    for peak in spectrum.peaks[:_NAMED] if named else ():
        at = float(np.interp(peak.at, spectrum.frequency, np.sqrt(spectrum.density)))
        ax.annotate(
            f"{peak.joint} {peak.order}",
            (peak.at, at),
            xytext=(0, 6),
            textcoords="offset points",
            ha="center",
            fontsize=7,
            color=INK,
        )
    ax.set_ylim(bottom=1e-4 * float(level.max()))
    if spectrum.axis == "per_metre":
        ax.set_xlabel("cycles a metre of way [1/m]")
        ax.set_ylabel("ripple [N / sqrt(1/m)]")
    else:
        ax.set_xlabel("frequency at the hand's speed [Hz]")
        ax.set_ylabel("ripple [N / sqrt(Hz)]")
    return ax
