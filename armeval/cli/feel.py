"""``armeval feel``: what does a hand meet that leads the arm?"""

from __future__ import annotations

from collections.abc import Mapping
from typing import TYPE_CHECKING, Annotated

import typer

from armeval.cli.answer import AsJson, Drawn, Force, OutFolder, TrialFile

if TYPE_CHECKING:
    import pandas as pd

    from armeval.evaluate.feel import Feel


def feel(
    file: TrialFile,
    workspace: Annotated[
        bool, typer.Option("--workspace", help="Also map what the arm can render over its reachable workspace.")
    ] = False,
    spacing: Annotated[
        float | None,
        typer.Option("--spacing", metavar="MM", min=0.1, help="Of the workspace grid; default: some 20,000 points."),
    ] = None,
    members: Annotated[
        int, typer.Option("--members", metavar="N", min=8, help="Of the ensemble of compensation errors.")
    ] = 200,
    seed: Annotated[int, typer.Option("--seed", metavar="S", help="Of the noise on the compensation table.")] = 0,
    out: OutFolder = None,
    as_json: AsJson = False,
    force: Force = False,
) -> None:
    """What does a hand meet that leads the arm: how much rattle, from where, and what does compensation take off?"""
    from armeval.cli.answer import hand_over
    from armeval.cli.feel_text import feel_text
    from armeval.cli.progress_bar import ProgressBar
    from armeval.evaluate.feel import feel as feel_trial
    from armeval.files.trial_file import read_trial

    with ProgressBar() as progress:
        trial = read_trial(file, progress=progress)
        met = feel_trial(
            trial,
            workspace=workspace,
            spacing=None if spacing is None else 1e-3 * spacing,
            members=members,
            seed=seed,
            progress=progress,
        )
    hand_over(
        met,
        feel_text(met),
        _tables(met) if out is not None else {},
        name="feel",
        findings=trial.findings,
        as_json=as_json,
        out=out,
        force=force,
        figures=lambda: _figures(met),
    )


def _figures(met: Feel) -> Mapping[str, Drawn]:
    from armeval.plots.feel_figures import feel_figures

    return feel_figures(met)


def _tables(met: Feel) -> dict[str, pd.DataFrame]:
    tables = {
        "feel": met.to_frame(),
        "lines": met.lines_frame(),
        "along": met.along_frame(),
        "abilities": met.abilities_frame(),
    }
    return tables if met.workspace is None else {**tables, "workspace": met.workspace.to_frame()}
