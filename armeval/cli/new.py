"""``armeval new``: start my own trial."""

from __future__ import annotations

from pathlib import Path
from typing import Annotated

import typer

from armeval.cli.answer import Force


def new(
    folder: Annotated[Path, typer.Argument(metavar="DIR", help="Folder to make.", show_default=False)],
    robot: Annotated[str, typer.Option("--robot", metavar="NAME", help="A shipped robot: tern, plover or heron.")],
    force: Force = False,
) -> None:
    """Start my own trial from a shipped robot."""
    from armeval.files.new_trial import new_trial

    trial = new_trial(folder, robot, force=force)
    typer.echo(f"wrote {trial}")
    typer.echo(f"next: edit it, then run `armeval check {trial}` and `armeval predict {trial}`")
