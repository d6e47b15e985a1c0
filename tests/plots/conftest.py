"""Figures of the report are drawn from the answers that its own tests use."""

from tests.report.conftest import answers

__all__ = ["answers"]
