"""What to do next: the sentences of action of the regions, most harmful first, and what the evidence still lacks."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from armeval.evaluate.sticking.regions import Region
from armeval.report.answers import Answers
from armeval.report.shown import ShownRun
from armeval.units import significant

_MOST = 6


@dataclass(frozen=True)
class Step:
    """Something to do, and what it is about."""

    about: str
    text: str


def next_steps(answers: Answers, runs: Sequence[ShownRun]) -> tuple[Step, ...]:
    """Give what to do next: what is left after compensation first."""
    last = runs[-1]
    together: dict[tuple[str, str], list[Region]] = {}
    for region in last.sticking.regions:
        together.setdefault((region.joint, region.cause), []).append(region)
    ranked = sorted(together.values(), key=lambda regions: -sum(region.harm for region in regions))
    found = [_step(last.name, regions) for regions in ranked[:_MOST] if regions[0].action]
    if answers.measurement is None:
        found.append(
            Step("logs", "Drive the path and log the encoders, three laps or more a run, bare and compensated.")
        )
    elif min(run.laps for run in runs) < 3:
        found.append(Step("laps", "Log three laps or more of each run: only then does it show what recurs."))
    if len(runs) == 1:
        found.append(Step("runs", "Add the run to compare with, bare beside compensated."))
    without_map = [drive.joint for drive in answers.trial.arm.drives if drive.cog_map is None]
    if without_map:
        found.append(Step("cog maps", f"Measure the cog map of {', '.join(without_map)}."))
    return tuple(found)


def _step(run: str, regions: Sequence[Region]) -> Step:
    """Give the sentence of the most harmful of some regions of one joint and cause, and how much is at stake."""
    worst = regions[0]
    count = f"{len(regions)} region{'s' if len(regions) != 1 else ''}"
    harm = significant(100.0 * sum(region.harm for region in regions), 2)
    where = f"{1e3 * worst.start_arc:.0f} to {1e3 * worst.end_arc:.0f} mm"
    about = f"{worst.joint}, {worst.cause} ({count} in {run}, {harm} % of its squared tip error; worst at {where})"
    return Step(about, worst.action)
