"""How findings are put into words on the terminal."""

from __future__ import annotations

import textwrap
from collections.abc import Sequence

from armeval.errors import Finding, InputError

_SHOWN = 40


def finding_text(finding: Finding) -> str:
    """Write one finding: its level and place, what is wrong, and on its own line how to mend it."""
    where = ", ".join(part for part in (finding.file, finding.place) if part)
    lines = [f"{finding.level}: {where}" if where else finding.level]
    lines += textwrap.wrap(finding.what, 100, initial_indent="    ", subsequent_indent="    ")
    if finding.mend:
        lines += textwrap.wrap(f"mend: {finding.mend}", 100, initial_indent="    ", subsequent_indent="          ")
    return "\n".join(lines)


def findings_text(findings: Sequence[Finding]) -> str:
    """Write several findings, errors first; a very long list is cut and says so."""
    ordered = sorted(findings, key=lambda finding: finding.level != "error")
    parts = [finding_text(finding) for finding in ordered[:_SHOWN]]
    if len(ordered) > _SHOWN:
        parts.append(f"and {len(ordered) - _SHOWN} more")
    return "\n".join(parts)


def error_text(error: InputError) -> str:
    """Write everything that an error carries, and how many things are to be mended."""
    errors = sum(finding.level == "error" for finding in error.findings)
    count = "1 thing to mend" if errors == 1 else f"{errors} things to mend"
    return f"{findings_text(error.findings)}\n{count}"
