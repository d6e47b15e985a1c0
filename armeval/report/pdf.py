"""The report as a PDF, laid out for paper from the same page."""

from __future__ import annotations

import logging
from pathlib import Path

from armeval.errors import InputError

_MEND = "install it with `pip install 'armeval[pdf]'`, or print report.html from a browser: it is laid out for paper"


def require_pdf() -> None:
    """Make sure that PDF files can be written, before any work is done.

    Raises
    ------
    InputError
        If the library for it is missing, or a system library that it needs.
    """
    try:
        import weasyprint  # noqa: F401
    except ImportError as fault:
        raise InputError("a PDF needs the library weasyprint, which is not installed", _MEND) from fault
    except OSError as fault:
        raise InputError(f"the library weasyprint cannot start: {fault}", _MEND) from fault


def write_pdf(page: str, file: Path) -> None:
    """Lay the HTML page out on A4 and write it; nothing is fetched from anywhere."""
    from weasyprint import HTML

    # It does not know that properties of drawings are none of a page's, and would tell the reader of each.
    logging.getLogger("weasyprint").setLevel(logging.ERROR)
    HTML(string=page, url_fetcher=_refuse).write_pdf(file)


def _refuse(url: str, *_: object, **__: object) -> dict[str, object]:
    raise ValueError(f"the report names something outside itself: {url}")
