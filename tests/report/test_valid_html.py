"""The page is HTML as its standard wants it."""

from __future__ import annotations

import json
import os
import subprocess
from pathlib import Path

import html5lib
import pytest


def test_the_page_parses_without_an_error(report: Path) -> None:
    """Strict parsing stops at the first parse error that the HTML standard names."""
    html5lib.HTMLParser(strict=True).parse((report / "report.html").read_text(encoding="utf-8"))


def test_a_validator_finds_no_fault(report: Path, tmp_path: Path) -> None:
    """The validator html-validate (npm), by the rules of the HTML standard; ARMEVAL_HTML_VALIDATE names its program."""
    validator = os.environ.get("ARMEVAL_HTML_VALIDATE", "")
    if not validator:
        pytest.skip("html-validate is not at hand: ARMEVAL_HTML_VALIDATE names its program")
    rules = tmp_path / "rules.json"
    rules.write_text(json.dumps({"root": True, "extends": ["html-validate:standard"]}), encoding="utf-8")
    page = str(report / "report.html")
    found = subprocess.run(
        [validator, "--config", str(rules), "--formatter", "text", page], capture_output=True, text=True, check=False
    )
    assert found.stdout == ""
    assert found.returncode == 0
