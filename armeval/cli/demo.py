"""``armeval demo``: show me."""

from __future__ import annotations

from pathlib import Path
from typing import Annotated

import typer

from armeval.cli.answer import Force
from armeval.cli.command_line import command_line


def demo(
    folder: Annotated[Path, typer.Argument(metavar="DIR", help="Folder to make.")] = Path("harbour-demo"),
    force: Force = False,
) -> None:
    """Show me: writes a complete made-up trial and its report."""
    from armeval.cli.progress_bar import ProgressBar
    from armeval.files.demo import write_demo
    from armeval.files.trial_file import read_trial
    from armeval.report import write_report

    with ProgressBar() as progress:
        trial_file = write_demo(folder, force=force)
        written = write_report(
            read_trial(trial_file, progress=progress),
            folder / "report",
            force=force,
            command=command_line(),
            progress=progress,
        )
    typer.echo(f"wrote the trial {trial_file}")
    typer.echo(f"wrote its report {written}: open it in a browser")
