"""The report as one HTML page that needs nothing but itself."""

from __future__ import annotations

from datetime import datetime
from functools import cache
from importlib import resources
from typing import TYPE_CHECKING

from markupsafe import Markup

from armeval.report.content import Content

if TYPE_CHECKING:
    from jinja2 import Environment


def html_page(content: Content, written: datetime) -> str:
    """Write the page.

    Parameters
    ----------
    content
        What stands in it.
    written
        When, in UTC; the only thing on the page that differs between two reports on the same files.
    """
    template = _environment().get_template("report.html")
    return template.render(
        content=content,
        trial=content.answers.trial,
        style=Markup(_part("report.css")),
        script=Markup(_part("report.js")),
        written=written.strftime("%Y-%m-%d %H:%M UTC"),
    )


@cache
def _environment() -> Environment:
    from jinja2 import Environment, PackageLoader, StrictUndefined

    return Environment(
        loader=PackageLoader("armeval.report", "page"),
        autoescape=True,
        undefined=StrictUndefined,
        trim_blocks=True,
        lstrip_blocks=True,
    )


def _part(name: str) -> str:
    return resources.files("armeval.report").joinpath("page", name).read_text(encoding="utf-8")
