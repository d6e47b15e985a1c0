"""``armeval report``: the before/after compensation report."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING, Annotated, cast

import typer

from armeval.cli.answer import AsJson, Force, TrialFile
from armeval.cli.command_line import command_line

if TYPE_CHECKING:
    from armeval.report.write import Format


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
    formats: Annotated[
        str,
        typer.Option("--format", metavar="LIST", help="html, pdf, md; several with commas."),
    ] = "html",
    as_json: AsJson = False,
    force: Force = False,
) -> None:
    """The before/after compensation report: one HTML file with its data beside it."""
    from armeval.cli.progress_bar import ProgressBar
    from armeval.files.trial_file import read_trial
    from armeval.report import write_report

    with ProgressBar() as progress:
        trial = read_trial(file, progress=progress)
        written = write_report(
            trial,
            out,
            before=before,
            after=after,
            force=force,
            formats=[cast("Format", name.strip()) for name in formats.split(",")],
            command=command_line(),
            progress=progress,
        )
    if as_json:
        typer.echo((written.parent / "results.json").read_text(encoding="utf-8"), nl=False)
    else:
        typer.echo(f"wrote {written}")
