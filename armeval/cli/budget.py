"""``armeval budget``: which cause accounts for how much of the tip error?"""

from __future__ import annotations

from typing import TYPE_CHECKING, Annotated

import typer

from armeval.cli.answer import AsJson, Force, OutFolder, TrialFile

if TYPE_CHECKING:
    from armeval.evaluate.budget import Budget
    from armeval.evaluate.replaying.run_budget import RunBudget


def budget(
    file: TrialFile,
    substeps: Annotated[int, typer.Option("--substeps", metavar="N", min=1, help="Time steps in a servo period.")] = 1,
    seed: Annotated[int, typer.Option("--seed", metavar="S", help="Of the noise on the compensation table.")] = 0,
    out: OutFolder = None,
    as_json: AsJson = False,
    force: Force = False,
) -> None:
    """Which cause accounts for how much of the tip error, bare and compensated? Cogging and friction by joint."""
    from armeval.cli.answer import hand_over
    from armeval.cli.progress_bar import ProgressBar
    from armeval.evaluate.budget import budget as budget_of_trial
    from armeval.files.trial_file import read_trial

    with ProgressBar() as progress:
        trial = read_trial(file, logs=False)
        found = budget_of_trial(trial, substeps=substeps, seed=seed, progress=progress)
    hand_over(
        found,
        budget_text(found),
        {"budget": found.to_frame()},
        name="budget",
        findings=trial.findings,
        as_json=as_json,
        out=out,
        force=force,
    )


def budget_text(budget: Budget) -> str:
    """Write the budget as tables, one a state of the arm, and what a share means."""
    from armeval.evaluate.budget import MEANING
    from armeval.units import length_text

    parts = [f"{budget.trial}: which cause accounts for how much of the predicted tip error"]
    for state in budget.budgets:
        rms = f"tracking error {length_text(state.tracking_rms, 4)} rms, path deviation "
        parts.append(f"{state.label}: {rms}{length_text(state.deviation_rms, 4)} rms")
        parts.append(_table(state))
    return "\n\n".join([*parts, f"{MEANING[0].upper()}{MEANING[1:]}."])


def _table(state: RunBudget) -> str:
    from armeval.cli.text_table import text_table
    from armeval.units import length_text

    rms = {cause.cause: (length_text(cause.alone, 3), length_text(cause.without, 3)) for cause in state.causes}
    idle = {cause.cause for cause in state.causes if not cause.acts}
    rows = []
    for cause, joint, part in state.rows():
        shares = part.to_document(state.whole)
        alone, without = ("", "") if joint or cause not in rms else rms[cause]
        rows.append(
            [
                "" if joint else cause,
                joint,
                "nothing to act on" if cause in idle else _percent(shares["tracking_share"]),
                "" if cause in idle else _percent(shares["deviation_share"]),
                alone,
                without,
            ]
        )
    head = ["cause", "joint", "of tracking error^2", "of path deviation^2", "rms with it alone", "rms without it"]
    return text_table(head, rows)


def _percent(share: float) -> str:
    return f"{100.0 * share:.1f} %".replace("-0.0 %", "0.0 %")
