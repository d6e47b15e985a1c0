"""Tables of text for the terminal."""

from __future__ import annotations

import io
from collections.abc import Sequence


def text_table(header: Sequence[str], rows: Sequence[Sequence[str]]) -> str:
    """Align cells in columns; a column whose cells all begin with a digit or sign stands right."""
    from rich.console import Console
    from rich.table import Table
    from rich.text import Text

    table = Table(box=None, pad_edge=False, padding=(0, 2, 0, 0), header_style="")
    for column, title in enumerate(header):
        cells = [row[column] for row in rows]
        is_right = bool(cells) and all(cell[:1] in "0123456789+-" or not cell for cell in cells)
        table.add_column(Text(title), justify="right" if is_right else "left", no_wrap=True)
    for row in rows:
        table.add_row(*(Text(cell) for cell in row))
    # The width is no terminal's: a table in a log or a mail must come out the same.
    paper = io.StringIO()
    Console(file=paper, width=400, color_system=None).print(table)
    return "\n".join(line.rstrip() for line in paper.getvalue().splitlines())
