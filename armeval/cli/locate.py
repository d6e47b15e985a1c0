"""``armeval locate``: where did it stick, which joint, why?"""

from __future__ import annotations

from typing import Annotated

import typer

from armeval.cli.answer import AsJson, Force, OutFolder, TrialFile


def locate(
    file: TrialFile,
    predicted: Annotated[
        bool, typer.Option("--predicted", help="Set the prediction beside the logs; without logs it is all there is.")
    ] = False,
    out: OutFolder = None,
    as_json: AsJson = False,
    force: Force = False,
) -> None:
    """Where along the path did (or will) it stick, which joint, why?"""
    from armeval.cli.answer import hand_over
    from armeval.cli.progress_bar import ProgressBar
    from armeval.evaluate.locate_trial import has_logs, locate_trial
    from armeval.evaluate.measure import measure
    from armeval.evaluate.plan import plan_trial
    from armeval.evaluate.predict import predict
    from armeval.files.trial_file import read_trial

    with ProgressBar() as progress:
        trial = read_trial(file, progress=progress)
        plan = plan_trial(trial)
        logged = has_logs(trial)
        measured = measure(trial, trajectory=plan, progress=progress) if logged else None
        replayed = predict(trial, trajectory=plan, progress=progress) if predicted or not logged else None
        location = locate_trial(trial, measured, replayed)
    tables = {"events": location.to_frame(), "regions": location.regions_frame()}
    hand_over(
        location,
        location.to_text().rstrip("\n"),
        tables,
        name="locate",
        findings=trial.findings,
        as_json=as_json,
        out=out,
        force=force,
    )
