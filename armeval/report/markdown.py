"""A short summary in Markdown, for a lab notebook or a pull request."""

from __future__ import annotations

import re
from collections.abc import Sequence
from datetime import datetime

from armeval.report.content import Content
from armeval.report.tables import Table

_MEANT = re.compile(r"([\\`*_{}\[\]<>#+!|~$&])")


def markdown_summary(content: Content, written: datetime) -> str:
    """Write the verdict, the figures of merit, the worst regions and the next steps."""
    lines = [f"# {_text(content.answers.trial.title)}", "", _text(content.verdict), ""]
    lines += [f"- {_text(said)}" for said in (content.sticking, content.worst, content.blame) if said]
    names = [run.name for run in content.runs]
    rows = [
        (f"{merit.name} [{merit.unit}]", *(value for _, value in merit.values), merit.change)
        for merit in content.merits
    ]
    lines += ["", *_table(("", *names, "change (95 % interval)"), rows)]
    if "regions" in content.tables:
        lines += ["", f"## {_text(content.tables['regions'].title)}", "", *_of(content.tables["regions"], 6)]
    if content.steps:
        lines += ["", "## What to do next", ""]
        lines += [f"{k}. {_text(step.about)}: {_text(step.text)}" for k, step in enumerate(content.steps, start=1)]
    said = [*content.missing.values(), *content.warnings]
    if said:
        lines += ["", "## To bear in mind", "", *(f"- {_text(sentence)}" for sentence in said)]
    lines += [
        "",
        "This summary certifies nothing. Limit torque and speed first, and keep hands clear on the first compensated "
        "run.",
    ]
    return "\n".join([*lines, "", f"Written {written:%Y-%m-%d %H:%M} UTC.", ""])


def _of(table: Table, most: int) -> list[str]:
    return _table(table.head, table.rows[:most])


def _table(head: Sequence[str], rows: Sequence[Sequence[str]]) -> list[str]:
    ruled = "|" + " --- |" * len(head)
    return [_row(head), ruled, *(_row(row) for row in rows)]


def _row(cells: Sequence[str]) -> str:
    return "| " + " | ".join(_text(cell) for cell in cells) + " |"


def _text(text: str) -> str:
    """Let text from a file stand for itself, on one line."""
    return _MEANT.sub(r"\\\1", " ".join(text.split()))
