"""The report's sentences are built from its numbers, and claim no more than these show."""

from __future__ import annotations

from dataclasses import replace

import pytest

from armeval.evaluate.compare import Comparison
from armeval.evaluate.measuring.joint_shares import JointShare
from armeval.evaluate.run_errors import RunErrors
from armeval.report.answers import Answers
from armeval.report.merit import merits
from armeval.report.next_steps import next_steps
from armeval.report.shown import ShownRun, shown_runs
from armeval.report.verdict import blame_text, sticking_text, verdict, why_text, worst_text


def _run(run: RunErrors, name: str, rms: float) -> RunErrors:
    return replace(run, name=name, tracking=replace(run.tracking, rms=rms))


def _told(answers: Answers, before: float, after: float, low: float, high: float) -> str:
    """The verdict on two made-up RMS values [m] and the interval of their reduction."""
    assert answers.before is not None
    assert answers.after is not None
    reduction = 1.0 - after / before
    compared = Comparison("bare", "smoothed", reduction, low, high, reduction, low, high)
    first, second = shown_runs(answers)
    runs = (
        replace(first, errors=_run(answers.before, "bare", before)),
        replace(second, errors=_run(answers.after, "smoothed", after)),
    )
    return verdict(replace(answers, comparison=compared), runs)


def test_an_error_that_fell_is_told_with_its_interval_and_laps(answers: Answers) -> None:
    assert _told(answers, 4.1e-3, 1.9e-3, 0.49, 0.57) == (
        "RMS tracking error fell from 4.10 mm (bare) to 1.90 mm (smoothed), 54 % less "
        "(95 % interval 49 to 57 %), over 3 laps each, as the encoders see it."
    )


def test_an_error_that_rose_is_told_as_such(answers: Answers) -> None:
    assert _told(answers, 2e-3, 3e-3, -0.6, -0.4) == (
        "RMS tracking error rose from 2.00 mm (bare) to 3.00 mm (smoothed), 50 % more "
        "(95 % interval 40 to 60 %), over 3 laps each, as the encoders see it."
    )


@pytest.mark.parametrize(("low", "high"), [(-0.1, 0.2), (0.0, 0.2), (-0.2, 0.0), (float("nan"), float("nan"))])
def test_an_interval_with_no_change_in_it_shows_no_difference(answers: Answers, low: float, high: float) -> None:
    told = _told(answers, 2e-3, 1.9e-3, low, high)
    assert "a difference is not shown" in told
    assert "fell" not in told


def test_a_rise_is_no_reduction_in_the_figures_of_merit(answers: Answers) -> None:
    compared = Comparison("a", "b", -0.5, -0.6, -0.4, 0.0, -0.1, 0.1)
    tracking, deviation, *_ = merits(replace(answers, comparison=compared), shown_runs(answers))
    assert tracking.change == "50 % more (40 to 60 %)"
    assert deviation.change == "no change shown (-10 % to 10 %)"


def test_what_became_of_the_regions_adds_up(answers: Answers) -> None:
    runs = shown_runs(answers)
    told = sticking_text(answers, runs)
    before, after = (len(run.sticking.regions) for run in runs)
    pairs = next(m.pairs for m in answers.location.matchings if m.kind == "compensation")
    gone = sum(pair.fate == "gone" for pair in pairs)
    new = sum(pair.fate == "new" for pair in pairs)
    assert before - gone + new == after
    assert f"Of {before} stretches" in told
    assert f"{_are(gone)} gone" in told
    assert f"{_are(new)} new" in told


def _are(count: int) -> str:
    return {0: "none is", 1: "1 is"}.get(count, f"{count} are")


def _shares(*parts: float) -> tuple[JointShare, ...]:
    return tuple(JointShare(joint, 0.0, 0.0, part) for joint, part in zip("abc", parts, strict=False))


def test_the_joint_with_the_largest_share_is_named(answers: Answers) -> None:
    runs = shown_runs(answers)
    assert "b carries most" in blame_text(runs, [_shares(0.2, 0.8), _shares(0.1, 0.9)])
    told = blame_text(runs, [_shares(0.2, 0.8), _shares(0.7, 0.3)])
    assert "b in <script>bare</script> (80 %), a in smoothed (70 %)" in told
    assert blame_text(runs, [_shares(float("nan")), _shares(float("nan"))]) == "No joint strays."


def test_the_worst_place_is_the_region_of_most_harm(answers: Answers) -> None:
    run = shown_runs(answers)[0]
    worst = max(run.sticking.regions, key=lambda region: region.harm)
    told = worst_text(run)
    assert f"{worst.joint} at {1e3 * worst.start_arc:.0f} to {1e3 * worst.end_arc:.0f} mm" in told
    assert f"in {worst.laps} of 3 laps" in told


def _without_rests(run: ShownRun) -> ShownRun:
    return replace(run, sticking=replace(run.sticking, regions=(), events=()))


def test_where_nothing_sticks_nothing_is_blamed(answers: Answers) -> None:
    runs = tuple(_without_rests(run) for run in shown_runs(answers))
    assert sticking_text(answers, runs) == "No joint sticks in either run."
    assert worst_text(runs[0]) == ""


def test_steps_are_ranked_by_what_is_at_stake(answers: Answers) -> None:
    run = shown_runs(answers)[0]
    steps = next_steps(answers, (run,))
    at_stake: dict[tuple[str, str], float] = {}
    for region in run.sticking.regions:
        key = (region.joint, region.cause)
        at_stake[key] = at_stake.get(key, 0.0) + region.harm
    first = max(at_stake, key=lambda key: at_stake[key])
    assert steps[0].about.startswith(f"{first[0]}, {first[1]} (")


def test_the_largest_causes_are_named_with_their_shares(answers: Answers) -> None:
    told = why_text(answers, shown_runs(answers))
    for state in answers.budget.budgets:
        worst = max(state.causes, key=lambda cause: cause.part.tracking)
        assert f"{worst.cause} {100 * worst.part.tracking / state.whole.tracking:.0f} %" in told
        assert f"in {state.label}" in told
