"""The command line as a whole: which commands there are, and what becomes of what goes wrong."""

from __future__ import annotations

import os
import sys
import traceback
from typing import Annotated

import typer

from armeval._version import __version__
from armeval.cli import budget, check, demo, feel, locate, maps, measure, new, predict, report
from armeval.errors import InputError

app = typer.Typer(
    name="armeval",
    help="How far cogging makes the tip of a small arm stray, where it sticks, and what compensation changes.",
    epilog="Arms touch people: limit torque and speed first, keep the stop within reach. "
    "This program certifies nothing.",
    no_args_is_help=True,
    add_completion=False,
    rich_markup_mode=None,
    pretty_exceptions_enable=False,
    context_settings={"help_option_names": ["-h", "--help"], "max_content_width": 110},
)


def _version(wanted: bool) -> None:
    if wanted:
        typer.echo(f"armeval {__version__}")
        raise typer.Exit


@app.callback()
def _top(
    version: Annotated[
        bool, typer.Option("--version", callback=_version, is_eager=True, help="Print the version and exit.")
    ] = False,
) -> None:
    pass


# The last word is what the list of commands shows: it must fit one line.
for name, function, question in (
    ("demo", demo.demo, "show me: a complete made-up trial and its report"),
    ("new", new.new, "start my own trial from a shipped robot"),
    ("check", check.check, "are my files sound?"),
    ("map", maps.maps, "what do these cog maps say?"),
    ("predict", predict.predict, "how far will the tip stray, and where will it stick?"),
    ("budget", budget.budget, "which cause accounts for how much of the tip error?"),
    ("measure", measure.measure, "how far did it stray, according to the logs?"),
    ("locate", locate.locate, "where did (or will) it stick, which joint, why?"),
    ("feel", feel.feel, "what does a hand meet that leads the arm?"),
    ("report", report.report, "the before/after compensation report"),
):
    app.command(name, short_help=question)(function)


def run() -> None:
    """Run the command and exit with its code."""
    try:
        app(standalone_mode=True)
    except InputError as error:
        from armeval.cli.words import error_text

        typer.echo(error_text(error), err=True)
        sys.exit(2)
    except BrokenPipeError:
        # Whoever read our output has gone; what is left in the buffer has nowhere to go.
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        sys.exit(0)
    except KeyboardInterrupt:
        typer.echo("stopped; nothing was written", err=True)
        sys.exit(130)
    except Exception:
        typer.echo("armeval failed on its own account, not because of your files. Please report these lines:", err=True)
        typer.echo(traceback.format_exc(), err=True)
        sys.exit(1)
