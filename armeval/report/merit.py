"""The few figures of merit on the first screen."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from armeval.report.answers import Answers
from armeval.report.shown import ShownRun
from armeval.report.verdict import interval, millimetres, percent


@dataclass(frozen=True)
class Merit:
    """One figure of merit: its name and unit, its value in each shown run, and a line on how sure it is."""

    name: str
    unit: str
    values: tuple[tuple[str, str], ...]
    change: str
    detail: str


def merits(answers: Answers, runs: Sequence[ShownRun]) -> tuple[Merit, ...]:
    """Give the figures of merit of the shown runs."""
    compared = answers.comparison
    changes = {"tracking": "", "deviation": ""}
    if compared is not None:
        changes = {
            "tracking": _change(
                compared.tracking_reduction, compared.tracking_reduction_low, compared.tracking_reduction_high
            ),
            "deviation": _change(
                compared.deviation_reduction, compared.deviation_reduction_low, compared.deviation_reduction_high
            ),
        }
    tracking = [run.errors.tracking for run in runs]
    deviation = [run.errors.deviation for run in runs]
    names = [run.name for run in runs]
    at_rest = [_at_rest(run) for run in runs]
    return (
        Merit(
            "RMS tracking error",
            "mm",
            tuple(zip(names, (millimetres(each.rms) for each in tracking), strict=True)),
            changes["tracking"],
            "95 % intervals: " + "; ".join(interval(each) for each in tracking),
        ),
        Merit(
            "RMS path deviation",
            "mm",
            tuple(zip(names, (millimetres(each.rms) for each in deviation), strict=True)),
            changes["deviation"],
            "95 % intervals: " + "; ".join(interval(each) for each in deviation),
        ),
        Merit(
            "Largest tracking error",
            "mm",
            tuple(zip(names, (millimetres(each.max) for each in tracking), strict=True)),
            "",
            "95 % of all samples stay below " + "; ".join(f"{millimetres(each.p95)} mm" for each in tracking),
        ),
        Merit(
            "Time at rest while told to move",
            "%",
            tuple(zip(names, (f"{100.0 * share[1]:.1f}" for share in at_rest), strict=True)),
            "",
            "lap by lap: "
            + "; ".join(f"{100.0 * low:.1f} to {100.0 * high:.1f} %" for low, _, high in at_rest)
            + ", any joint",
        ),
    )


def _change(reduction: float, low: float, high: float) -> str:
    """Say how much less it is, with the interval."""
    if low <= 0.0 <= high:
        return f"no change shown ({percent(low)} to {percent(high)})"
    if reduction < 0.0:
        return f"{percent(-reduction)} more ({100 * -high:.0f} to {percent(-low)})"
    return f"{percent(reduction)} less ({100 * low:.0f} to {percent(high)})"


def _at_rest(run: ShownRun) -> tuple[float, float, float]:
    """Give the share of time in which any joint rests: least lap, mean, greatest lap."""
    shares = []
    for track in run.errors.tracks:
        spans = sorted((e.start, e.end) for e in run.sticking.events if e.lap == track.lap and e.kind == "rest")
        covered, reached = 0.0, float("-inf")
        for start, end in spans:
            covered += max(0.0, end - max(start, reached))
            reached = max(reached, end)
        shares.append(covered / track.duration)
    return min(shares), sum(shares) / len(shares), max(shares)
