"""One thin module a command."""

from __future__ import annotations


def main() -> None:
    """Run the command line and exit: 0 done, 1 an internal fault, 2 wrong use or bad input."""
    from armeval.cli.app import run

    run()
