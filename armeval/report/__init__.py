"""Results to a report with its data beside it."""

from __future__ import annotations

from armeval.report.write import write_report

__all__ = ["write_report"]
