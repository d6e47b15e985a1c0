"""The worked example is what the program writes today; ``python -m tests.report.make_example`` makes it anew.

Numbers are compared with a tolerance, because a replay of joints that stick and let go is not the same to the last
digit on all machines; sentences are compared without their numbers.
"""

from __future__ import annotations

import json
import re
from collections.abc import Iterator
from pathlib import Path
from typing import Any

import pytest

from tests.report.conftest import text_of
from tests.report.make_example import EXAMPLE, KEPT, make_example

pytestmark = pytest.mark.slow

_NUMBER = re.compile(r"-?\d[\d.]*(?:e-?\d+)?")


@pytest.fixture(scope="module")
def fresh(tmp_path_factory: pytest.TempPathFactory) -> Path:
    return make_example(tmp_path_factory.mktemp("example"))


def _document(folder: Path) -> Any:
    return json.loads((folder / "results.json").read_text(encoding="utf-8"))


def _numbers(value: Any, at: str = "") -> Iterator[tuple[str, float]]:
    if isinstance(value, dict):
        for key, entry in value.items():
            yield from _numbers(entry, f"{at}.{key}")
    elif isinstance(value, list):
        for k, entry in enumerate(value):
            yield from _numbers(entry, f"{at}[{k}]")
    elif isinstance(value, float | int) and not isinstance(value, bool):
        yield at, float(value)


def test_the_example_is_there() -> None:
    assert {file.name for file in EXAMPLE.iterdir()} == set(KEPT)


def test_it_names_no_place_on_the_machine_that_made_it() -> None:
    files = [lap["file"] for run in _document(EXAMPLE)["measure"]["runs"] for lap in run["laps"]]
    assert files
    assert not any(Path(file).is_absolute() for file in files)


def test_its_page_is_small() -> None:
    assert (EXAMPLE / "report.html").stat().st_size < 2_000_000


def test_the_document_has_the_same_keys(fresh: Path) -> None:
    def keys(value: Any) -> Any:
        if isinstance(value, dict):
            return {key: keys(entry) for key, entry in value.items() if key != "versions"}
        if isinstance(value, list):
            return keys(value[0]) if value else None
        return None

    assert keys(_document(EXAMPLE)) == keys(_document(fresh))


@pytest.mark.parametrize("part", ["measure", "comparison"])
def test_what_was_measured_is_the_same(fresh: Path, part: str) -> None:
    old, new = (_document(folder)[part] for folder in (EXAMPLE, fresh))
    if part == "comparison":
        old, new = ({key: value for key, value in entry.items() if "regions" not in key} for entry in (old, new))
    kept, made = dict(_numbers(old)), dict(_numbers(new))
    assert kept.keys() == made.keys()
    for key, value in made.items():
        assert kept[key] == pytest.approx(value, rel=1e-6, abs=1e-9), key


def test_the_budget_is_the_same(fresh: Path) -> None:
    for old, new in zip(*(_document(folder)["budget"]["budgets"] for folder in (EXAMPLE, fresh)), strict=True):
        for kept, made in zip(old["causes"], new["causes"], strict=True):
            assert kept["cause"] == made["cause"]
            assert kept["tracking_share"] == pytest.approx(made["tracking_share"], abs=0.02)


def test_predicted_errors_are_the_same(fresh: Path) -> None:
    for old, new in zip(*(_document(folder)["predict"]["runs"] for folder in (EXAMPLE, fresh)), strict=True):
        assert old["tracking"]["rms_m"] == pytest.approx(new["tracking"]["rms_m"], rel=0.02)


def test_the_inputs_are_the_same_files(fresh: Path) -> None:
    assert _document(EXAMPLE)["provenance"]["files"] == _document(fresh)["provenance"]["files"]


def test_the_page_says_the_same_in_the_same_words(fresh: Path) -> None:
    old, new = ((folder / "report.html").read_text(encoding="utf-8") for folder in (EXAMPLE, fresh))
    for tags in (["style"], ["h1", "h2", "h3"], ["figcaption"], ["caption"], ["th"]):
        said = [[_NUMBER.sub("#", text) for text in text_of(page, tags)] for page in (old, new)]
        assert said[0] == said[1]
    assert text_of(old, ["script"])[-1] == text_of(new, ["script"])[-1]
