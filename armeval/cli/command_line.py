"""The command line, for the record."""

from __future__ import annotations

import shlex
import sys


def command_line() -> str:
    """Give the command line as it was typed, without the folder that the program stands in."""
    return shlex.join(["armeval", *sys.argv[1:]])
