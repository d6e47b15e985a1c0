"""``armeval demo``: show me."""

from __future__ import annotations

from pathlib import Path
from typing import Annotated

import typer

from armeval.cli.answer import Force


def demo(
    folder: Annotated[
        Path | None, typer.Argument(metavar="DIR", help="Folder to make; default: harbour-demo or feel-demo.")
    ] = None,
    trial: Annotated[
        str,
        typer.Option("--trial", metavar="NAME", help="harbour: the arm follows a path; feel: a hand leads the arm."),
    ] = "harbour",
    force: Force = False,
) -> None:
    """Show me: writes a complete made-up trial and its report."""
    from armeval.cli.progress_bar import ProgressBar
    from armeval.files.demo import write_demo
    from armeval.files.trial_file import read_trial
    from armeval.report import write_report

    where = Path(f"{trial}-demo") if folder is None else folder
    with ProgressBar() as progress:
        trial_file = write_demo(where, trial=trial, force=force)  # type: ignore[arg-type]
        if trial == "feel":
            from armeval.cli.feel_text import feel_text
            from armeval.evaluate.feel import feel

            met = feel(read_trial(trial_file, progress=progress), progress=progress)
            typer.echo(feel_text(met))
            for note in met.warnings:
                typer.echo(f"note: {note}", err=True)
            typer.echo(f"\nwrote the trial {trial_file}; next: `armeval feel {trial_file} --workspace --out feel`")
            return
        written = write_report(
            read_trial(trial_file, progress=progress), where / "report", force=force, progress=progress
        )
    typer.echo(f"wrote the trial {trial_file}")
    typer.echo(f"wrote its report {written}: open it in a browser")
