"""Writes the report: one HTML file, with its data, tables and figures beside it."""

from __future__ import annotations

import os
from collections.abc import Mapping
from datetime import UTC, datetime
from pathlib import Path
from typing import TYPE_CHECKING

from armeval.evaluate.document import as_text
from armeval.files.atomic import write_folder
from armeval.model.trial import Trial
from armeval.progress import Progress, silent
from armeval.report.answers import Answers, answer
from armeval.report.content import Content, content_of

if TYPE_CHECKING:
    import pandas as pd


def write_report(
    trial: Trial,
    out: str | os.PathLike[str],
    *,
    before: str | None = None,
    after: str | None = None,
    force: bool = False,
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
    command
        The command line, for the record.
    written
        When; default: now. It stands on one line of the report, and nothing else changes with it.
    progress
        Told how far the work has come.

    Returns
    -------
    The ``report.html``.

    Raises
    ------
    InputError
        If the trial cannot be answered, there is no run of a given name, or the folder cannot be written.
    """
    with write_folder(out, force=force) as folder:
        answers = answer(trial, before=before, after=after, progress=progress)
        write_answers(answers, folder, command=command, written=written, progress=progress)
    return Path(out) / "report.html"


def write_answers(
    answers: Answers,
    folder: Path,
    *,
    command: str = "",
    written: datetime | None = None,
    progress: Progress = silent,
) -> None:
    """Write the files of a report on answers that are there already into a folder that is."""
    from armeval.report.page import html_page

    content = content_of(answers, command=command, progress=progress)
    when = (written or datetime.now(UTC)).astimezone(UTC)
    (folder / "report.html").write_text(html_page(content, when), encoding="utf-8")
    (folder / "results.json").write_text(as_text(content.document), encoding="utf-8")
    _write_tables(content.frames, folder / "tables")
    _write_figures(content, folder / "figures")


def _write_tables(frames: Mapping[str, pd.DataFrame], folder: Path) -> None:
    folder.mkdir()
    for name, frame in frames.items():
        frame.to_csv(folder / f"{name}.csv", index=False, float_format="%.9g")


def _write_figures(content: Content, folder: Path) -> None:
    folder.mkdir()
    for drawing in content.drawings.values():
        (folder / f"{drawing.name}.svg").write_text(drawing.file, encoding="utf-8")
        (folder / f"{drawing.name}.png").write_bytes(drawing.png)
