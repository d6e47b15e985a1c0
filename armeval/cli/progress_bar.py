"""Progress on the terminal: a bar for what takes over a second, silence where nobody watches."""

from __future__ import annotations

import sys
import time
from types import TracebackType
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from rich.progress import Progress, TaskID

_PATIENCE = 1.0  # seconds before a bar is worth its space


class ProgressBar:
    """A bar on stderr, gone when the work is done; it draws nothing when stderr is not a terminal.

    Use it as a context and hand it to whatever takes a :class:`armeval.progress.Progress`.
    """

    def __init__(self) -> None:
        self._start = time.monotonic()
        self._watched = sys.stderr.isatty()
        self._bar: Progress | None = None
        self._tasks: dict[str, TaskID] = {}

    def __enter__(self) -> ProgressBar:
        return self

    def __call__(self, what: str, done: int, total: int) -> None:
        """Redraw the bar."""
        if not self._watched or time.monotonic() - self._start < _PATIENCE:
            return
        if self._bar is None:
            from rich.console import Console
            from rich.progress import BarColumn, MofNCompleteColumn, Progress, TextColumn, TimeRemainingColumn

            columns = (TextColumn("{task.description}"), BarColumn(), MofNCompleteColumn(), TimeRemainingColumn())
            self._bar = Progress(*columns, console=Console(stderr=True), transient=True)
            self._bar.start()
        if what not in self._tasks:
            self._tasks[what] = self._bar.add_task(what, total=total)
        self._bar.update(self._tasks[what], completed=done, total=total)

    def __exit__(
        self, kind: type[BaseException] | None, value: BaseException | None, trace: TracebackType | None
    ) -> None:
        if self._bar is not None:
            self._bar.stop()
