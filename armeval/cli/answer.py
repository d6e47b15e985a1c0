"""How a command hands over its answer: as JSON, or as text to read, and as files where wanted."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from pathlib import Path
from typing import Annotated, Protocol

import typer

from armeval.cli.words import findings_text
from armeval.errors import Finding

TrialFile = Annotated[Path, typer.Argument(metavar="TRIAL", help="The trial.toml.", show_default=False)]
OutFolder = Annotated[
    Path | None, typer.Option("--out", metavar="DIR", help="Also write the answer there: JSON and one CSV a table.")
]
AsJson = Annotated[bool, typer.Option("--json", help="Print one JSON document and nothing else on stdout.")]
Force = Annotated[bool, typer.Option("--force", help="Replace files that are there already.")]


class Answer(Protocol):
    """What every question gives back."""

    @property
    def warnings(self) -> tuple[str, ...]:
        """What to bear in mind."""
        ...

    def to_json(self) -> str:
        """Give the JSON document as text."""
        ...


class Drawn(Protocol):
    """What can be written as a picture."""

    @property
    def savefig(self) -> Callable[[Path], object]:
        """Write the picture."""
        ...


class Tabular(Protocol):
    """What can be written as a CSV table."""

    def to_csv(self, path: Path, *, index: bool) -> object:
        """Write the table."""
        ...


def hand_over(
    answer: Answer,
    text: str,
    tables: Mapping[str, Tabular],
    *,
    name: str,
    findings: Sequence[Finding] = (),
    as_json: bool,
    out: Path | None,
    force: bool,
    figures: Callable[[], Mapping[str, Drawn]] | None = None,
) -> None:
    """Print the answer and, with a folder given, write it there, all files or none.

    Parameters
    ----------
    answer, text
        The result, and the same in words for a reader.
    tables
        Data frames by the name of the CSV file they become.
    name
        Name of the JSON file.
    findings
        What was doubtful about the input; like all warnings it goes to stderr.
    as_json, out, force
        The options of the command line.
    figures
        Draws pictures, by the name of the PNG file they become; called only where there is a folder to write to.
    """
    if findings:
        typer.echo(findings_text(findings), err=True)
    known = {str(finding) for finding in findings}
    for note in answer.warnings:
        if note not in known:
            typer.echo(f"note: {note}", err=True)
    if out is not None:
        from armeval.files.atomic import write_folder

        with write_folder(out, force=force) as folder:
            (folder / f"{name}.json").write_text(answer.to_json(), encoding="utf-8")
            for table_name, table in tables.items():
                table.to_csv(folder / f"{table_name}.csv", index=False)
            for figure_name, figure in (figures() if figures is not None else {}).items():
                figure.savefig(folder / f"{figure_name}.png")
        typer.echo(f"written to {out}", err=True)
    typer.echo(answer.to_json() if as_json else text, nl=not as_json)
