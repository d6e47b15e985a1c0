"""The report's sentences, built from its numbers and saying their limits."""

from __future__ import annotations

import math
from collections import Counter
from collections.abc import Sequence

from armeval.evaluate.measuring.joint_shares import JointShare
from armeval.evaluate.sticking.regions import Counterpart, counterparts
from armeval.evaluate.summary import ErrorSummary
from armeval.report.answers import Answers
from armeval.report.shown import ShownRun
from armeval.units import significant

_WORTH_NAMING = 0.05
"""A cause with a smaller share is not named beside the largest."""


def millimetres(metres: float) -> str:
    """Write a length in millimetres to three digits, without the unit."""
    return significant(1e3 * metres)


def percent(share: float) -> str:
    """Write a share as whole percent."""
    return f"{100.0 * share:.0f} %"


def interval(summary: ErrorSummary) -> str:
    """Write the interval of an RMS in millimetres."""
    return f"{millimetres(summary.rms_low)} to {millimetres(summary.rms_high)} mm"


def laps_text(runs: Sequence[ShownRun]) -> str:
    """Say how many laps stand behind a comparison."""
    if runs[0].source == "prediction":
        return "one replayed lap each" if len(runs) > 1 else "one replayed lap"
    counts = [run.laps for run in runs]
    if len(set(counts)) == 1:
        each = " each" if len(counts) > 1 else ""
        return f"{counts[0]} lap{'s' if counts[0] != 1 else ''}{each}"
    return " and ".join(f"{count} lap{'s' if count != 1 else ''}" for count in counts)


def verdict(answers: Answers, runs: Sequence[ShownRun]) -> str:
    """Say in a sentence or two what compensation changed, or what there is to say without a comparison."""
    compared = answers.comparison
    if compared is None:
        run = runs[0]
        how = "measured" if run.source == "log" else "predicted"
        return (
            f"RMS tracking error of {run.name} ({run.state}), {how} over {laps_text(runs)}: "
            f"{millimetres(run.errors.tracking.rms)} mm (95 % interval {interval(run.errors.tracking)}). "
            + _no_pair(answers)
        )
    before, after = (run.errors.tracking for run in runs)
    names = [run.name for run in runs]
    change, low, high = (
        compared.tracking_reduction,
        compared.tracking_reduction_low,
        compared.tracking_reduction_high,
    )
    told = "" if runs[0].source == "log" else "Predicted, not measured: "
    seen = ", as the encoders see it" if runs[0].source == "log" else ""
    if not (low > 0.0 or high < 0.0):
        return (
            f"{told}RMS tracking error is {millimetres(before.rms)} mm ({names[0]}) and {millimetres(after.rms)} mm "
            f"({names[1]}), over {laps_text(runs)}{seen}: a difference is not shown "
            f"(95 % interval of the reduction {percent(low)} to {percent(high)})."
        )
    first, last = sorted((abs(low), abs(high)))
    return (
        f"{told}RMS tracking error {'fell' if change > 0.0 else 'rose'} from {millimetres(before.rms)} mm ({names[0]}) "
        f"to {millimetres(after.rms)} mm ({names[1]}), {percent(abs(change))} {'less' if change > 0.0 else 'more'} "
        f"(95 % interval {100.0 * first:.0f} to {percent(last)}), over {laps_text(runs)}{seen}."
    )


def _no_pair(answers: Answers) -> str:
    if len(answers.trial.runs) == 1:
        return "There is one run only, so nothing to compare it with: add a second [[run]] to the trial."
    return "No bare and compensated run stand beside each other: choose two with --before and --after."


def sticking_text(answers: Answers, runs: Sequence[ShownRun]) -> str:
    """Say where the arm stuck, before and after, and what is left."""
    told = [_regions_of(run) for run in runs]
    if len(runs) == 1:
        return told[0]
    before, after = (run.sticking for run in runs)
    if not before.regions and not after.regions:
        return "No joint sticks in either run."
    fates = Counter(pair.fate for pair in fates_of(answers, runs))
    sentence = (
        f"Of {_stretches(len(before.regions))} where a joint rested, {_are(fates['gone'])} gone after compensation and "
        f"{_are(fates['weaker'])} weaker; {_are(fates['new'])} new."
    )
    if not before.regions:
        sentence = (
            f"No joint rested in {runs[0].name}, but {runs[1].name} has {_stretches(len(after.regions))} of rest."
        )
    if not after.regions:
        return sentence
    joint, of_joint = Counter(region.joint for region in after.regions).most_common(1)[0]
    cause, of_cause = Counter(region.cause for region in after.regions).most_common(1)[0]
    sentence += f" Of the {len(after.regions)} left, {_are(of_joint)} in {joint}; "
    if cause == "unexplained":
        return f"{sentence}the cause of {of_cause} is not shown."
    return f"{sentence}{_are(of_cause)} put down to {_CAUSES.get(cause, cause)}."


_CAUSES = {"torque limit": "the torque limit", "joint limit": "a joint limit"}


def _are(count: int) -> str:
    return f"{count or 'none'} {'are' if count > 1 else 'is'}"


def _stretches(count: int) -> str:
    return f"{count} stretch{'es' if count != 1 else ''} of the path"


def _regions_of(run: ShownRun) -> str:
    if not run.sticking.regions:
        return f"No joint sticks in {run.name}."
    joints = Counter(region.joint for region in run.sticking.regions)
    told = ", ".join(f"{count} in {joint}" for joint, count in joints.most_common())
    return f"In {run.name} a joint rests on {_stretches(len(run.sticking.regions))}: {told}."


def fates_of(answers: Answers, runs: Sequence[ShownRun]) -> tuple[Counterpart, ...]:
    """Regions of the first shown run beside those of the second; empty where they were not matched."""
    places = [answers.location.runs.index(run.sticking) for run in runs]
    for matching in answers.location.matchings:
        if matching.kind == "compensation" and [matching.first, matching.second] == places:
            return matching.pairs
    return counterparts(runs[0].sticking.regions, runs[1].sticking.regions)


def blame_text(runs: Sequence[ShownRun], shares: Sequence[tuple[JointShare, ...]]) -> str:
    """Say which joint carries most of the tip error, before and after."""
    worst = [(run.name, _largest(of_joints)) for run, of_joints in zip(runs, shares, strict=True)]
    told = [(name, share) for name, share in worst if share is not None]
    if not told:
        return "No joint strays."
    joints = {share.joint for _, share in told}
    if len(joints) == 1:
        parts = ", ".join(f"{percent(share.share)} in {name}" for name, share in told)
        return f"{told[0][1].joint} carries most of the squared tip error: {parts}."
    parts = ", ".join(f"{share.joint} in {name} ({percent(share.share)})" for name, share in told)
    return f"Most of the squared tip error goes through {parts}."


def _largest(shares: Sequence[JointShare]) -> JointShare | None:
    known = [share for share in shares if math.isfinite(share.share)]
    return max(known, key=lambda share: share.share) if known else None


def worst_text(run: ShownRun) -> str:
    """Say where sticking does most harm."""
    if not run.sticking.regions:
        return ""
    region = run.sticking.regions[0]
    place = f"{1e3 * region.start_arc:.0f} to {1e3 * region.end_arc:.0f} mm along the path"
    rests = f"rests {1e3 * region.dwell:.0f} ms"
    if run.source == "log":
        rests += f" in {region.laps} of {region.of_laps} laps"
    return (
        f"{region.joint} at {place} in {run.name}: {rests}, "
        f"{significant(100.0 * region.harm, 2)} % of the squared tip error."
    )


def why_text(answers: Answers, runs: Sequence[ShownRun]) -> str:
    """Say which causes have the largest parts of the predicted error in each shown run."""
    told = []
    for run in runs:
        state = answers.budget.run(run.name)
        if not state.whole.tracking > 0.0:
            continue
        shares = sorted(
            ((cause.part.tracking / state.whole.tracking, cause.cause) for cause in state.causes), reverse=True
        )
        named = ", ".join(f"{cause} {percent(share)}" for share, cause in shares[:2] if share > _WORTH_NAMING)
        told.append(f"{named} in {run.name}")
    if not told:
        return "The prediction has no error to share out."
    return f"Of the squared tracking error, by the prediction: {'; '.join(told)}."
