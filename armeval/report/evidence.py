"""How good the evidence is: laps, intervals, alignment, encoders, and what no encoder sees."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from armeval.evaluate.measure import BLIND_SPOT
from armeval.evaluate.measuring.intervals import METHOD
from armeval.report.answers import Answers
from armeval.report.path_figures import predicted_interval
from armeval.report.shown import ShownRun
from armeval.report.verdict import interval, laps_text, millimetres, percent
from armeval.units import significant


def evidence(answers: Answers, runs: Sequence[ShownRun]) -> tuple[str, ...]:
    """Give sentences on how far the numbers can be trusted."""
    said = [_laps(runs), _members(runs)]
    measured = [run for run in runs if run.source == "log"]
    if measured:
        said += [f"Intervals: {METHOD}.", _alignment(measured), _resolution(answers, measured)]
        said.append(_sentence(f"what is not seen: {BLIND_SPOT}"))
        said += _prediction(answers, measured)
    else:
        said.append("Nothing was measured: a prediction knows only what the arm's files say.")
    return tuple(sentence for sentence in said if sentence)


def _laps(runs: Sequence[ShownRun]) -> str:
    if runs[0].source == "prediction":
        return "Each predicted run is one replayed lap."
    text = f"Laps: {laps_text(runs)}."
    if min(run.laps for run in runs) < 2:
        text += " With one lap it is not known how much laps differ: the interval speaks for this lap only."
    elif min(run.laps for run in runs) < 3:
        text += " Three laps or more show better what recurs."
    return text


def _members(runs: Sequence[ShownRun]) -> str:
    found = runs[0].predicted.ensemble
    if found is None:
        return ""
    spread = found.spreads
    return (
        f"Predicted ranges: {found.members} arms as they may be, drawn with seed {found.seed} from what the trial says "
        f"under [uncertainty]: friction {percent(spread.friction)}, torque constant {percent(spread.torque_constant)}, "
        "and the rotor's index and the map's noise, one standard deviation each."
    )


def _alignment(runs: Sequence[ShownRun]) -> str:
    without = [run.name for run in runs if not all(track.targets_logged for track in run.errors.tracks)]
    if not without:
        return "Alignment: targets were logged, so tracking error needs no shift in time."
    offsets = [
        f"{run.name} {', '.join(f'{1e3 * lap.time_offset:.1f}' for lap in run.errors.laps)} ms"
        for run in runs
        if run.name in without
    ]
    return (
        "Alignment: where no targets were logged, each lap is shifted in time to where its RMS is least "
        f"({'; '.join(offsets)}); a constant lag does not show there."
    )


def _resolution(answers: Answers, runs: Sequence[ShownRun]) -> str:
    """Hold the tip distance of one count of each encoder against the smallest error."""
    from armeval.kernels.chain import tip_jacobians

    plan = answers.trajectory
    J = tip_jacobians(
        answers.trial.arm.chain.arrays, np.ascontiguousarray(plan.joint[:: max(1, len(plan.joint) // 200)])
    )
    step = np.asarray(runs[0].errors.tracks[0].resolution)
    if not step.any():
        return "Encoders: their resolution is not known, so its part in the error is not either."
    distance = float(np.sqrt(((J * step) ** 2).sum(axis=(1, 2))).max())
    least = min(run.errors.tracking.rms for run in runs)
    return (
        f"Encoders: one count of every joint moves the tip by {millimetres(distance)} mm at most, "
        f"{significant(100.0 * distance / least, 2)} % of the smaller RMS."
    )


def _prediction(answers: Answers, runs: Sequence[ShownRun]) -> list[str]:
    """Hold prediction against measurement: the RMS, and the regions that both find."""
    said = []
    for run in runs:
        low, high = predicted_interval(run)
        measured = run.errors.tracking
        meet = low <= measured.rms_high and measured.rms_low <= high
        said.append(
            f"Prediction beside measurement, {run.name}: {millimetres(low)} to {millimetres(high)} mm predicted, "
            f"{interval(measured)} measured; the two {'overlap' if meet else 'do not overlap'}. {_found(answers, run)}"
        )
    return said


def _found(answers: Answers, run: ShownRun) -> str:
    places = [answers.location.runs.index(each) for each in (run.sticking, run.predicted_sticking)]
    for matching in answers.location.matchings:
        if matching.kind == "prediction" and [matching.first, matching.second] == places:
            both = sum(pair.first is not None and pair.second is not None for pair in matching.pairs)
            return (
                f"Of {len(run.sticking.regions)} measured regions {both} were predicted; "
                f"{len(run.predicted_sticking.regions) - both} more were predicted and not found in the logs."
            )
    return ""


def _sentence(text: str) -> str:
    return f"{text[0].upper()}{text[1:]}."
