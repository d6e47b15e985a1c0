"""What the hand meets, for the report: figures, a sentence, and tables, where the trial tells of a hand."""

from __future__ import annotations

import math
from collections.abc import Callable

from matplotlib.figure import Figure

from armeval.evaluate.feel import Feel
from armeval.evaluate.feeling.feel_state import FeelState
from armeval.plots.feel_figures import feel_figures
from armeval.report.drawing import Plan
from armeval.report.tables import Table
from armeval.units import significant

_LINES = 6
_CAPTIONS = {
    "force": (
        "Force on the hand along the path: above, what cogging leaves in each state; beneath, all together. A band "
        "tells how far dry friction leaves it open while a joint rests.",
        "Force on the hand against path length, bare and compensated.",
    ),
    "direction": (
        "Ripple by direction, where it is largest.",
        "Polar figure of the ripple by direction at its worst place.",
    ),
    "spectrum": (
        "Amplitude of the ripple by how often it comes, a metre of path and a second; peaks named by joint and order.",
        "Spectrum of the ripple, bare and compensated.",
    ),
}


def hand_plans(met: Feel) -> list[Plan]:
    """Plan the figures of what the hand meets; a spectrum that cannot be had is left out."""
    drawn: dict[float, dict[str, Figure]] = {}

    def drawer(name: str) -> Callable[[float], Figure]:
        def draw(width: float) -> Figure:
            if width not in drawn:
                drawn[width] = feel_figures(met, width=width)
            return drawn[width][name]

        return draw

    can = ["force", "direction"] + ["spectrum"] * (met.bare.per_metre is not None or met.bare.per_second is not None)
    return [Plan(f"hand-{name}", _CAPTIONS[name][0], drawer(name), _CAPTIONS[name][1]) for name in can]


def hand_text(met: Feel) -> str:
    """Say in a sentence how much ripple the hand meets and what compensation takes off it."""
    if not math.isfinite(met.reduction):
        return "No ripple reaches the hand in the poses where it can be told."
    found = met.bare.ripple
    joint, share = max(zip(found.joints, found.share, strict=True), key=lambda pair: pair[1])
    change = f"{significant(100.0 * abs(met.reduction), 2)} % {'less' if met.reduction > 0.0 else 'more'}"
    return (
        f"The hand meets a ripple of {_millinewton(found.rms)} RMS bare and "
        f"{_millinewton(met.compensated.ripple.rms)} compensated ({change}, predicted), most of it bare from {joint} "
        f"({100.0 * share:.0f} %)."
    )


def hand_tables(met: Feel) -> dict[str, Table]:
    """Tables of the ripple's lines, of the force by kind, and of what the arm can render."""
    lines = [_line(state, number) for state in met.states for number in range(min(_LINES, len(state.ripple.lines)))]
    parts = [
        (
            state.name,
            part.part,
            _number(1e3 * part.along_rms),
            _number(1e3 * part.across_rms),
            _number(1e3 * part.max),
        )
        for state in met.states
        for part in state.parts
    ]
    return {
        "hand_lines": Table(
            "What the ripple is made of",
            ("state", "joint", "order", "RMS [mN]", "a second [Hz]", "over what is noticed"),
            tuple(lines),
            words=2,
            note="Over what is noticed: amplitude over the published threshold at that frequency. Guidance: people, "
            "grip and attention differ, and a ripple below the threshold is not imperceptible.",
        ),
        "hand_force": Table(
            "Force on the hand by its kind",
            ("state", "part", "along, RMS [mN]", "across, RMS [mN]", "largest [mN]"),
            tuple(parts),
            words=2,
            note="Forces on people are judged by the machine's own risk assessment and the applicable standards, not "
            "by this program; it gives no limit of its own.",
        ),
    }


def _line(state: FeelState, number: int) -> tuple[str, ...]:
    line = state.ripple.lines[number]
    ratio = state.ratio(number)
    return (
        state.name,
        line.joint,
        f"{line.order}",
        _number(1e3 * line.rms),
        _number(line.hertz),
        _number(ratio),
    )


def _millinewton(newton: float) -> str:
    return f"{significant(1e3 * newton)} mN"


def _number(value: float) -> str:
    return significant(value) if math.isfinite(value) else "-"
