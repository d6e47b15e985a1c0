"""What a hand meets, in tables to read."""

from __future__ import annotations

import math
from collections.abc import Iterable
from typing import TYPE_CHECKING

from armeval.cli.text_table import text_table
from armeval.units import length_text, significant

if TYPE_CHECKING:
    from armeval.evaluate.feel import Feel
    from armeval.evaluate.feeling.feel_state import FeelState

_LINES = 6
_NONE = "-"


def feel_text(met: Feel) -> str:
    """Write the answer as tables: ripple and its lines, what is left and why, the whole force, what can be rendered."""
    motion = met.motion
    mean_speed = motion.length / motion.duration
    carries = "carry" if met.bare.force.carries_weight else "do not carry"
    title = (
        f"{met.trial}: what the hand meets ({motion.source}, {length_text(motion.length, 4)} at "
        f"{length_text(mean_speed)}/s, drives {carries} the weight)"
    )
    parts = [title, _ripple(met), _lines(met)]
    if math.isfinite(met.reduction):
        parts.append(f"compensation takes {significant(100.0 * met.reduction)} % off the ripple; {_spread(met)}")
    parts += [_left(met), _forces(met), _abilities(met)]
    if met.workspace is not None:
        parts.append(_workspace(met))
    return "\n\n".join(part for part in parts if part)


def _millinewton(value: float, digits: int = 3) -> str:
    return f"{significant(1e3 * value, digits)} mN" if math.isfinite(value) else _NONE


def _number(value: float, unit: str = "", digits: int = 2) -> str:
    return f"{significant(value, digits)}{' ' if unit else ''}{unit}" if math.isfinite(value) else _NONE


def _shares(shares: Iterable[tuple[str, float]]) -> str:
    told = list(shares)
    if not any(share for _, share in told):
        return _NONE
    return ", ".join(f"{joint} {100.0 * share:.0f} %" for joint, share in told)


def _ripple(met: Feel) -> str:
    rows = []
    for state in met.states:
        found = state.ripple
        direction = "(" + ", ".join(f"{value:+.2f}" for value in found.worst_direction) + ")"
        rows.append(
            [
                state.name,
                _millinewton(found.rms),
                _millinewton(found.along_rms),
                _millinewton(found.across_rms),
                _millinewton(found.peak_to_peak),
                _millinewton(found.worst),
                length_text(found.worst_at, 4),
                direction,
                _shares(zip(found.joints, found.share, strict=True)),
            ]
        )
    head = ["ripple", "rms", "along", "across", "peak to peak", "largest", "at s", "direction x, y, z", "from"]
    return text_table(head, rows)


def _lines(met: Feel) -> str:
    rows = [_line(state, number) for state in met.states for number in range(min(_LINES, len(state.ripple.lines)))]
    head = ["state", "joint", "order", "rms", "along", "a metre", "a second", "over what is noticed", "as a change of"]
    return text_table(head, rows) if rows else ""


def _line(state: FeelState, number: int) -> list[str]:
    line, seen = state.ripple.lines[number], state.noticed[number]
    ratio = _NONE
    if math.isfinite(seen.force):
        amplitude = math.sqrt(2.0) * line.rms
        spread = f"{significant(amplitude / seen.high, 2)} to {significant(amplitude / seen.low, 2)}"
        ratio = f"{significant(amplitude / seen.force, 2)} ({spread})"
    return [
        state.name,
        line.joint,
        f"{line.order}",
        _millinewton(line.rms),
        _millinewton(line.along_rms),
        _number(line.per_metre, "/m", 3),
        _number(line.hertz, "Hz", 3),
        ratio,
        seen.by if seen.by != "none" else _NONE,
    ]


def _spread(met: Feel) -> str:
    spread = met.compensated.spread
    if spread is None:
        return ""
    low, high = (_millinewton(value) for value in spread.interval)
    return (
        "from one start to the next, with rotor index, map noise and torque constant anew, it leaves "
        f"{_millinewton(spread.median)}, {low} to {high} in 95 % of {len(spread.rms)} members"
    )


_ADVICE = {
    "index error": "find the encoders' index more exactly",
    "size of the table": "give the table more entries",
    "noise of the map": "map more turns and average them",
    "delay and encoder counts": "shorten the delay, or count finer",
    "torque limit, step and dead time": "raise the limit, or step the torque finer",
}


def _left(met: Feel) -> str:
    rows = [[part.cause, _millinewton(part.rms), _ADVICE[part.cause]] for part in met.compensated.left]
    return text_table(["what is left, if only this were wrong", "rms", "so"], rows)


def _forces(met: Feel) -> str:
    rows = [
        [
            state.name,
            part.part,
            _millinewton(part.along_rms),
            _millinewton(part.across_rms),
            _millinewton(part.max),
            length_text(part.max_at, 4) if math.isfinite(part.max_at) else _NONE,
            _shares(part.shares.items()),
        ]
        for state in met.states
        for part in state.parts
    ]
    return text_table(["force", "part", "along rms", "across rms", "largest", "at s", "from"], rows)


_ABILITIES = (
    ("continuous_force", "continuous force, worst direction", "N", 1.0),
    ("friction_most", "back-drive friction, hardest direction", "N", 1.0),
    ("ripple", "ripple rms, worst direction", "N", 1.0),
    ("dynamic_range", "largest over smallest force", "", 1.0),
    ("mass_least", "apparent mass, lightest direction", "g", 1e3),
    ("mass_most", "apparent mass, heaviest direction", "g", 1e3),
    ("step", "tip within one encoder count a joint", "um", 1e6),
    ("wall_by_damping", "stiffest wall by damping (Colgate & Schenkel)", "N/m", 1.0),
    ("wall_by_friction", "stiffest wall by friction (Abbott & Okamura)", "N/m", 1.0),
)


def _abilities(met: Feel) -> str:
    from armeval.evaluate.feeling.workspace import spread_over

    rows = []
    for name, what, unit, scale in _ABILITIES:
        figures = spread_over(scale * getattr(met.abilities, name))
        rows.append([what, *(_number(figures[key], unit, 3) for key in ("least", "median", "most"))])
    return text_table(["what the arm can render along the path", "least", "median", "most"], rows)


def _workspace(met: Feel) -> str:
    from armeval.evaluate.feeling.workspace import spread_over

    mapped = met.workspace
    if mapped is None:
        return ""
    rows = []
    for name, what, unit, scale in _ABILITIES:
        figures = spread_over(scale * getattr(mapped.abilities, name))
        rows.append([what, *(_number(figures[key], unit, 3) for key in ("least", "median", "most"))])
    head = f"over the workspace, {len(mapped.tip)} points {length_text(mapped.spacing)} apart"
    return text_table([head, "least", "median", "most"], rows)
