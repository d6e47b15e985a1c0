"""``armeval check``: are my files sound?"""

from __future__ import annotations

from pathlib import Path
from typing import Annotated

import typer

from armeval.cli.answer import AsJson


def check(
    file: Annotated[Path, typer.Argument(metavar="TRIAL", help="A trial.toml or an arm.toml.", show_default=False)],
    as_json: AsJson = False,
) -> None:
    """Are my files sound? Every finding at once: file, place, what is wrong, how to mend it."""
    from armeval.cli.progress_bar import ProgressBar
    from armeval.cli.words import findings_text
    from armeval.files.check import check as check_files

    with ProgressBar() as progress:
        result = check_files(file, progress=progress)
    if as_json:
        typer.echo(result.to_json(), nl=False)
    elif result.findings:
        typer.echo(findings_text(result.findings))
    else:
        typer.echo("nothing to mend")
    if result.has_errors:
        raise typer.Exit(2)
