"""What to do next: the sentences of action of the regions, most harmful first, and what the evidence still lacks."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from armeval.report.answers import Answers
from armeval.report.shown import ShownRun

_MOST = 6


@dataclass(frozen=True)
class Step:
    """Something to do, and what it is about."""

    about: str
    text: str


def next_steps(answers: Answers, runs: Sequence[ShownRun]) -> tuple[Step, ...]:
    """Give what to do next: what is left after compensation first."""
    last = runs[-1]
    steps: dict[str, Step] = {}
    for region in last.sticking.regions:
        if region.action and region.action not in steps and len(steps) < _MOST:
            place = f"{1e3 * region.start_arc:.0f} to {1e3 * region.end_arc:.0f} mm"
            steps[region.action] = Step(f"{last.name}, {region.joint} at {place}", region.action)
    found = list(steps.values())
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
