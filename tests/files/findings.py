"""Catching what a reader has against a file."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import pytest

from armeval.errors import Finding, InputError


def faults(read: Callable[[], Any]) -> list[Finding]:
    """Run a reader that must refuse its input, and give its errors."""
    with pytest.raises(InputError) as caught:
        read()
    return [finding for finding in caught.value.findings if finding.level == "error"]


def only_fault(read: Callable[[], Any]) -> Finding:
    """Run a reader that must find exactly one error, and give it."""
    found = faults(read)
    assert len(found) == 1, found
    return found[0]
