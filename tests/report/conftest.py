"""One report on one small trial, written once for all tests that only look at it."""

from __future__ import annotations

from collections.abc import Sequence
from datetime import UTC, datetime
from pathlib import Path

import pytest

from armeval.report.answers import Answers, answer
from armeval.report.write import write_answers
from tests.report.small_trial import small_trial

WRITTEN = datetime(2031, 5, 4, 12, 30, tzinfo=UTC)


@pytest.fixture(scope="session")
def answers() -> Answers:
    """What a report tells about a small trial with logs of two runs."""
    return answer(small_trial(runs=(("<script>bare</script>", False), ("smoothed", True))))


@pytest.fixture(scope="session")
def report(answers: Answers, tmp_path_factory: pytest.TempPathFactory) -> Path:
    """The folder of the report on it."""
    folder = tmp_path_factory.mktemp("report")
    write_answers(answers, folder, formats=("html", "md"), command="armeval report zigzag.toml", written=WRITTEN)
    return folder


def text_of(page: str, tags: Sequence[str]) -> list[str]:
    """Give the text of elements of a page, as a reader sees it."""
    import html5lib

    tree = html5lib.parse(page, namespaceHTMLElements=False)
    return ["".join(element.itertext()) for tag in tags for element in tree.iter(tag)]
