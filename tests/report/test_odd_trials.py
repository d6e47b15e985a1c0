"""Trials that lack something: the report says what is missing and shows no empty figure."""

from __future__ import annotations

import json
from collections.abc import Sequence
from pathlib import Path

import html5lib
import pytest

from armeval.model.trial import Trial
from armeval.report import write_report
from tests.report.conftest import text_of
from tests.report.small_trial import small_arm, small_trial


class Page:
    """A written report as a reader finds it."""

    def __init__(self, trial: Trial, folder: Path, **options: str) -> None:
        self.html = write_report(trial, folder, **options).read_text(encoding="utf-8")  # type: ignore[arg-type]
        self.document = json.loads((folder / "results.json").read_text(encoding="utf-8"))
        self.figures = {file.stem for file in (folder / "figures").glob("*.svg")}
        html5lib.HTMLParser(strict=True).parse(self.html)

    @property
    def text(self) -> str:
        return " ".join(" ".join(text_of(self.html, ["body"])).split())

    def of(self, *tags: str) -> Sequence[str]:
        return text_of(self.html, tags)


def test_without_logs_everything_is_said_to_be_predicted(tmp_path: Path) -> None:
    page = Page(small_trial(laps=0), tmp_path / "out")
    assert page.document["measure"] is None
    assert "Predicted, not measured" in page.text
    assert "No run has logs" in page.text
    assert "They need measured laps; there are none." in page.text
    assert "Drive the path and log the encoders" in page.text
    assert "measured error" not in page.text


def test_one_lap_is_said_to_show_no_spread(tmp_path: Path) -> None:
    page = Page(small_trial(laps=1), tmp_path / "out")
    assert "over 1 lap each" in page.text
    assert "With one lap it is not known how much laps differ" in page.text
    assert "Log three laps or more" in page.text


def test_logs_without_targets_and_torque_say_how_they_were_aligned(tmp_path: Path) -> None:
    page = Page(small_trial(targets=False), tmp_path / "out")
    assert "shifted in time to where its RMS is least" in page.text
    assert "Torque was not logged." in page.text


def test_an_arm_that_never_sticks_has_no_figures_of_sticking(tmp_path: Path) -> None:
    page = Page(small_trial(small_arm(cogging=0.0, friction=0.0)), tmp_path / "out")
    assert "No joint sticks in either run." in page.text
    assert "a difference is not shown" in page.text
    assert not page.figures & {"joints", "cog-maps", "event"}
    assert "No joint has a cog map" in page.text
    assert "Measure the cog map of shoulder, elbow." in page.text


def test_one_run_is_not_compared_with_anything(tmp_path: Path) -> None:
    page = Page(small_trial(runs=[("bare", False)]), tmp_path / "out")
    assert page.document["comparison"] is None
    assert "There is one run only" in page.text
    assert "smoothed" not in page.text


def test_two_bare_runs_ask_which_to_compare(tmp_path: Path) -> None:
    trial = small_trial(runs=[("soft", False), ("stiff", False)], laps=0)
    assert "choose two with --before and --after" in Page(trial, tmp_path / "out").text


def test_any_two_of_three_runs_are_compared_and_all_are_tabulated(tmp_path: Path) -> None:
    trial = small_trial(runs=[("bare", False), ("first map", True), ("second map", True)], laps=1)
    page = Page(trial, tmp_path / "out", before="first map", after="second map")
    assert page.document["comparison"]["before"] == "first map"
    assert page.document["comparison"]["after"] == "second map"
    table = next(table for table in page.of("table") if "All runs" in table)
    assert all(name in table for name in ("bare", "first map", "second map"))


@pytest.mark.slow
def test_forty_regions_are_ranked_and_the_rest_is_named(tmp_path: Path) -> None:
    zigzag = [(0.24 - 0.04 * (k // 2), 0.08 if k % 4 in (1, 2) else -0.08, 0.0) for k in range(6)]
    trial = small_trial(small_arm(order=120, cogging=0.03), path=zigzag, laps=2)
    page = Page(trial, tmp_path / "out")
    regions = page.document["comparison"]["regions_before"]
    assert len(regions) >= 40
    assert f"{len(regions) - 12} more, each less harmful, are in tables/regions.csv." in page.text
    assert len(page.html.encode()) < 2e6


@pytest.mark.slow
def test_seven_joints_have_a_strip_each(tmp_path: Path) -> None:
    names = [f"joint {k}" for k in range(1, 8)]
    page = Page(small_trial(small_arm(joints=names), laps=1), tmp_path / "out")
    drawn = (tmp_path / "out" / "figures" / "joints.svg").read_text(encoding="utf-8")
    assert all(name in drawn for name in names)
    assert len(page.html.encode()) < 2e6


def test_names_from_files_are_shown_as_they_are_written(tmp_path: Path) -> None:
    joints, runs = ("$x_$", "</style><b>"), ('<script>alert("1")</script>', "a\"b'c&d")
    trial = small_trial(
        small_arm(joints=joints), title="運行 <i>β</i>", runs=[(runs[0], False), (runs[1], True)], laps=1
    )
    page = Page(trial, tmp_path / "out")
    assert page.of("h1") == ["運行 <i>β</i>"]
    assert page.of("title")[0].startswith("運行 <i>β</i>")
    assert all(f"({name})" in page.text for name in runs)
    assert all(any(name in table for table in page.of("table")) for name in joints)
    assert len(page.of("script")) == 2
    assert page.of("i") == []
    drawn = (tmp_path / "out" / "figures" / "joints.svg").read_text(encoding="utf-8")
    assert "$x_$" in drawn
