"""``armeval predict``: how far will the tip stray, and where will it stick?"""

from __future__ import annotations

from typing import TYPE_CHECKING, Annotated

import typer

from armeval.cli.answer import AsJson, Force, OutFolder, TrialFile

if TYPE_CHECKING:
    from armeval.evaluate.predict import Prediction


def predict(
    file: TrialFile,
    substeps: Annotated[int, typer.Option("--substeps", metavar="N", min=1, help="Time steps in a servo period.")] = 1,
    members: Annotated[
        int,
        typer.Option("--members", metavar="N", min=0, help="How sure is it? Replay N arms drawn from [uncertainty]."),
    ] = 0,
    seed: Annotated[
        int,
        typer.Option("--seed", metavar="S", min=0, help="Of the noise on the compensation table and of the members."),
    ] = 0,
    out: OutFolder = None,
    as_json: AsJson = False,
    force: Force = False,
) -> None:
    """How far will the tip stray, bare and compensated, and where will it stick?"""
    from armeval.cli.answer import hand_over
    from armeval.cli.progress_bar import ProgressBar
    from armeval.evaluate.predict import predict as predict_trial
    from armeval.files.trial_file import read_trial

    with ProgressBar() as progress:
        trial = read_trial(file, logs=False)
        prediction = predict_trial(trial, substeps=substeps, seed=seed, members=members, progress=progress)
    tables = {"predicted": prediction.to_frame()}
    if members:
        tables["bands"] = prediction.bands_frame()
    hand_over(
        prediction,
        prediction_text(prediction),
        tables,
        name="predict",
        findings=trial.findings,
        as_json=as_json,
        out=out,
        force=force,
    )


def prediction_text(prediction: Prediction) -> str:
    """Write the prediction as tables: tip error of each run, then sticking ratio of each joint."""
    from armeval.cli.error_tables import error_table
    from armeval.cli.text_table import text_table
    from armeval.units import length_text, significant

    parts = [f"{prediction.trial}: predicted tip error", error_table([run.errors for run in prediction.runs])]
    rows = []
    for run in prediction.runs:
        for joint, ratio, at in zip(run.ratio.joints, run.ratio.max, run.ratio.at, strict=True):
            verdict = "sticks when moved slowly" if ratio > 1.0 else "follows"
            rows.append([run.name, joint, significant(float(ratio), 3), length_text(float(at), 4), verdict])
    parts.append(text_table(["run", "joint", "largest sticking ratio", "at s", "so it"], rows))
    rows = [[run.name, length_text(run.slow.tracking_rms), f"{len(run.slow.jumps)}"] for run in prediction.runs]
    parts.append(text_table(["run", "rms if moved very slowly", "jumps then"], rows))
    return "\n\n".join([*parts, *_ensemble_tables(prediction)])


def _ensemble_tables(prediction: Prediction) -> list[str]:
    """Write what the members say: intervals of each RMS, then where each joint is likeliest to stick."""
    import numpy as np

    from armeval.cli.text_table import text_table
    from armeval.units import length_text

    known = [(run.name, run.ensemble) for run in prediction.runs if run.ensemble is not None]
    if not known:
        return []
    errors, sticking = [], []
    for name, found in known:
        for kind, rms, (low, high) in (
            ("tracking", found.tracking, found.tracking_interval),
            ("path deviation", found.deviation, found.deviation_interval),
        ):
            interval = f"{length_text(low)} to {length_text(high)}"
            errors.append([name, kind, length_text(float(np.median(rms))), interval])
        for joint, share in zip(found.joints, found.sticking, strict=True):
            at = length_text(float(found.arc[share.argmax()]), 4) if share.any() else ""
            sticking.append([name, joint, f"{100.0 * share.mean():.0f} %", f"{100.0 * share.max():.0f} %", at])
    first = known[0][1]
    members = f"{first.members} arms as they may be, drawn from the trial's [uncertainty] with seed {first.seed}"
    return [
        members,
        text_table(["run", "error", "median rms", "rms of 95 % of the arms"], errors),
        text_table(["run", "joint", "probability of sticking, mean", "largest", "at s"], sticking),
    ]
