"""``python -m armeval``: the same as the command."""

from armeval.cli import main

main()
