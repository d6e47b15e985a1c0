"""What stands in a report, worked out once for every form it is written in."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

from armeval.evaluate.document import JsonValue, plain
from armeval.evaluate.measure import BLIND_SPOT
from armeval.evaluate.measuring.joint_shares import JointShare, joint_shares
from armeval.progress import Progress, silent
from armeval.report import hand_section, joint_figures, path_figures, tables
from armeval.report.answers import Answers
from armeval.report.drawing import Drawing, render
from armeval.report.evidence import evidence
from armeval.report.linked import linked_data
from armeval.report.merit import Merit, merits
from armeval.report.next_steps import Step, next_steps
from armeval.report.provenance import Provenance, provenance
from armeval.report.shown import ShownRun, shown_runs
from armeval.report.tables import Table
from armeval.report.verdict import blame_text, sticking_text, verdict, why_text, worst_text

if TYPE_CHECKING:
    import pandas as pd


@dataclass(frozen=True, eq=False)
class Content:
    """What stands in a report.

    Attributes
    ----------
    answers, runs
        What it is about, and the runs that figures show.
    verdict, sticking, blame, worst, why
        The sentences of the first screen, and the one that opens the question why.
    hand
        What the hand meets, in a sentence; empty where the trial tells of none.
    merits
        Its figures of merit.
    drawings
        Figures by name.
    tables
        Tables for reading by name.
    evidence
        Sentences on how good the evidence is.
    warnings
        What was doubtful about the input or the method.
    steps
        What to do next, first things first.
    missing
        What the report could not show, and why.
    provenance, linked, frames, document
        Where it comes from, the linked view's data, the tables as data frames, the JSON document.
    """

    answers: Answers
    runs: tuple[ShownRun, ...]
    verdict: str
    sticking: str
    blame: str
    worst: str
    why: str
    hand: str
    merits: tuple[Merit, ...]
    drawings: Mapping[str, Drawing]
    tables: Mapping[str, Table]
    evidence: tuple[str, ...]
    warnings: tuple[str, ...]
    steps: tuple[Step, ...]
    missing: Mapping[str, str]
    provenance: Provenance
    linked: JsonValue
    frames: Mapping[str, pd.DataFrame]
    document: Mapping[str, JsonValue]


def content_of(answers: Answers, *, command: str = "", progress: Progress = silent) -> Content:
    """Work out what stands in the report on some answers."""
    runs = shown_runs(answers)
    arm = answers.trial.arm
    shares = [joint_shares(arm, run.errors.tracks) for run in runs]
    spectra = joint_figures.spectra(answers, runs)
    plans = [
        path_figures.path_figure(answers, runs),
        path_figures.summary_figure(runs),
        path_figures.along_figure(answers, runs),
        joint_figures.joints_figure(answers, runs),
        path_figures.pose_figure(answers, runs),
        joint_figures.cog_maps_figure(answers, runs),
        joint_figures.budget_figure(answers),
        joint_figures.orders_figure(answers, spectra),
        joint_figures.event_figure(answers, runs),
        *(hand_section.hand_plans(answers.feel) if answers.feel is not None else ()),
    ]
    wanted = [plan for plan in plans if plan is not None]
    drawings = {}
    for done, plan in enumerate(wanted):
        progress("drawing figures", done, len(wanted))
        drawings[plan.name] = render(plan)
    progress("drawing figures", len(wanted), len(wanted))
    origin = provenance(answers.trial, command)
    return Content(
        answers=answers,
        runs=runs,
        verdict=verdict(answers, runs),
        sticking=sticking_text(answers, runs),
        blame=blame_text(runs, shares),
        worst=worst_text(runs[0]),
        why=why_text(answers, runs),
        hand=hand_section.hand_text(answers.feel) if answers.feel is not None else "",
        merits=merits(answers, runs),
        drawings=drawings,
        tables=_tables(answers, runs, shares),
        evidence=evidence(answers, runs),
        warnings=tuple(warning for warning in answers.warnings if warning != BLIND_SPOT),
        steps=next_steps(answers, runs),
        missing=_missing(answers, runs, drawings),
        provenance=origin,
        linked=linked_data(answers, runs),
        frames=tables.frames(answers, runs, shares, spectra),
        document={**answers.to_document(), "provenance": plain(origin.to_document())},
    )


def _tables(
    answers: Answers, runs: Sequence[ShownRun], shares: Sequence[tuple[JointShare, ...]]
) -> Mapping[str, Table]:
    measured = answers.measurement.runs if answers.measurement is not None else ()
    found = {
        "runs": tables.runs_table(answers),
        "laps": tables.laps_table(answers),
        "joints": tables.joints_table(runs, shares, answers.trial.arm.joints),
        "regions": tables.regions_table(answers, runs),
        "regions_after": tables.regions_after_table(runs),
        "causes": tables.causes_table(runs),
        "routes": tables.routes_table(joint_figures.worst_event(runs)),
        "stretches": tables.stretches_table(runs),
        "criteria": tables.criteria_table(measured),
    }
    if answers.feel is not None:
        found |= hand_section.hand_tables(answers.feel)
    return {name: table for name, table in found.items() if table is not None}


def _missing(answers: Answers, runs: Sequence[ShownRun], drawings: Mapping[str, Drawing]) -> Mapping[str, str]:
    """Say what stands where a figure or table cannot be made."""
    said = {}
    if answers.measurement is None:
        said["logs"] = "No run has logs: everything here is predicted, nothing was measured."
    if "cog-maps" not in drawings:
        said["cog-maps"] = "No joint has a cog map, so no cogging is predicted and no rest can be held against one."
    if "orders" not in drawings:
        said["orders"] = "The motors turned too little to tell orders of their error apart."
    if "joints" not in drawings:
        said["joints"] = "No joint rested, and without a cog map no sticking is predicted: there is nothing to draw."
    if not any(run.sticking.events for run in runs):
        said["sticking"] = "No joint rested while it was told to move."
    return said
