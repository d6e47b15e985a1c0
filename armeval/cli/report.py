"""``armeval report``: the before/after compensation report."""

from __future__ import annotations

from pathlib import Path
from typing import Annotated

import typer

from armeval.cli.answer import AsJson, Force, TrialFile


def report(
    file: TrialFile,
    out: Annotated[Path, typer.Option("--out", metavar="DIR", help="Folder for the report and its data.")] = Path(
        "report"
    ),
    before: Annotated[
        str | None, typer.Option("--before", metavar="RUN", help="Run to compare; default: the first bare one.")
    ] = None,
    after: Annotated[
        str | None,
        typer.Option("--after", metavar="RUN", help="Run to compare with; default: the first compensated one."),
    ] = None,
    as_json: AsJson = False,
    force: Force = False,
) -> None:
    """The before/after compensation report: one HTML file with its data beside it."""
    from armeval.cli.progress_bar import ProgressBar
    from armeval.files.trial_file import read_trial
    from armeval.report import write_report

    with ProgressBar() as progress:
        trial = read_trial(file, progress=progress)
        written = write_report(trial, out, before=before, after=after, force=force, progress=progress)
    if as_json:
        typer.echo((written.parent / "results.json").read_text(encoding="utf-8"), nl=False)
    else:
        typer.echo(f"wrote {written}")
