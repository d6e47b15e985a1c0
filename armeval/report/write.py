"""Writes the report: one HTML file, with its data, tables and figures beside it."""

from __future__ import annotations

import os
from collections.abc import Mapping, Sequence
from datetime import UTC, datetime
from pathlib import Path
from typing import TYPE_CHECKING, Literal, get_args

from armeval.errors import InputError, near
from armeval.evaluate.document import as_text
from armeval.files.atomic import write_folder
from armeval.model.trial import Trial
from armeval.progress import Progress, silent
from armeval.report.answers import Answers, answer
from armeval.report.content import Content, content_of
from armeval.report.markdown import markdown_summary
from armeval.report.pdf import require_pdf, write_pdf

if TYPE_CHECKING:
    import pandas as pd

Format = Literal["html", "pdf", "md"]
"""What a report is written as."""


def write_report(
    trial: Trial,
    out: str | os.PathLike[str],
    *,
    before: str | None = None,
    after: str | None = None,
    force: bool = False,
    formats: Sequence[Format] = ("html",),
    command: str = "",
    written: datetime | None = None,
    progress: Progress = silent,
) -> Path:
    """Ask all questions of a trial and write the report.

    Parameters
    ----------
    trial
        With or without logs.
    out
        The folder to make.
    before, after
        Names of the runs to compare; default: the first bare and the first compensated one.
    force
        Write into a folder that holds files: those of the same name are replaced, all others kept.
    formats
        ``html``, ``pdf`` (needs the optional library weasyprint) and ``md`` (a short summary), in any number.
    command
        The command line, for the record.
    written
        When; default: now. It stands on one line of the report, and nothing else changes with it.
    progress
        Told how far the work has come.

    Returns
    -------
    The report in the first of the formats: ``report.html``, ``report.pdf`` or ``report.md``.

    Raises
    ------
    InputError
        If the trial cannot be answered, there is no run of a given name, the folder cannot be written, or a format is
        not known or not to be had here.
    """
    _check(formats)
    with write_folder(out, force=force) as folder:
        answers = answer(trial, before=before, after=after, progress=progress)
        write_answers(answers, folder, formats=formats, command=command, written=written, progress=progress)
    return Path(out) / f"report.{formats[0]}"


def write_answers(
    answers: Answers,
    folder: Path,
    *,
    formats: Sequence[Format] = ("html",),
    command: str = "",
    written: datetime | None = None,
    progress: Progress = silent,
) -> None:
    """Write the files of a report on answers that are there already into a folder that is."""
    from armeval.report.page import html_page

    content = content_of(answers, command=command, progress=progress)
    when = (written or datetime.now(UTC)).astimezone(UTC)
    page = html_page(content, when)
    if "html" in formats:
        (folder / "report.html").write_text(page, encoding="utf-8")
    if "pdf" in formats:
        progress("laying out pages", 0, 1)
        write_pdf(page, folder / "report.pdf")
        progress("laying out pages", 1, 1)
    if "md" in formats:
        (folder / "report.md").write_text(markdown_summary(content, when), encoding="utf-8")
    (folder / "results.json").write_text(as_text(content.document), encoding="utf-8")
    _write_tables(content.frames, folder / "tables")
    _write_figures(content, folder / "figures")


def _check(formats: Sequence[Format]) -> None:
    if not formats:
        raise InputError("no format is given", "give html, pdf or md")
    for name in formats:
        if name not in get_args(Format):
            raise InputError(f"there is no format `{name}`", near(name, get_args(Format)))
    if "pdf" in formats:
        require_pdf()


def _write_tables(frames: Mapping[str, pd.DataFrame], folder: Path) -> None:
    folder.mkdir()
    for name, frame in frames.items():
        frame.to_csv(folder / f"{name}.csv", index=False, float_format="%.9g")


def _write_figures(content: Content, folder: Path) -> None:
    folder.mkdir()
    for drawing in content.drawings.values():
        (folder / f"{drawing.name}.svg").write_text(drawing.file, encoding="utf-8")
        (folder / f"{drawing.name}.png").write_bytes(drawing.png)
