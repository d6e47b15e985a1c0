"""How long work says how far it has come, without knowing who listens."""

from __future__ import annotations

from typing import Protocol


class Progress(Protocol):
    """Called now and then while something takes its time.

    Parameters
    ----------
    what
        What is being done, in a few words.
    done, total
        How many of how many parts are finished.
    """

    def __call__(self, what: str, done: int, total: int) -> None:  # noqa: D102  (the class docstring says it)
        ...


def silent(what: str, done: int, total: int) -> None:
    """Listen to nothing."""
