from __future__ import annotations

import pytest

from armeval.errors import Findings
from armeval.files.joint_logs.logs import find_logs


@pytest.fixture
def folder(tmp_path):
    for name in ("b-2.csv", "b-1.csv", "a.parquet", "day1/x.csv", "day2/x.csv", "day2/w.csv"):
        (tmp_path / name).parent.mkdir(exist_ok=True)
        (tmp_path / name).touch()
    return tmp_path


def found(folder, *patterns):
    findings = Findings("trial.toml")
    files = find_logs(folder, patterns, findings, place="[[run]] 1, logs")
    return [file.relative_to(folder).as_posix() for file in files], findings.found


def test_files_come_in_name_order_whatever_the_disk_says(folder):
    assert found(folder, "b-*.csv") == (["b-1.csv", "b-2.csv"], [])
    assert found(folder, "b-?.csv") == (["b-1.csv", "b-2.csv"], [])


def test_wildcards_may_stand_in_folder_names(folder):
    assert found(folder, "day*/*.csv")[0] == ["day1/x.csv", "day2/w.csv", "day2/x.csv"]
    assert found(folder, "**/x.csv")[0] == ["day1/x.csv", "day2/x.csv"]


def test_a_whole_path_is_taken_as_it_stands(folder):
    assert found(folder, str(folder / "b-*.csv"))[0] == ["b-1.csv", "b-2.csv"]


def test_a_pattern_that_matches_nothing_is_told_with_what_is_there(folder):
    files, (nothing,) = found(folder, "c-*.csv", "a.parquet")
    assert files == ["a.parquet"]
    assert nothing.level == "error"
    assert nothing.place == "[[run]] 1, logs"
    assert "`c-*.csv`" in nothing.what
    assert "`b-1.csv`" in nothing.mend
    (nowhere,) = found(folder, "day3/*.csv")[1]
    assert "no directory" in nowhere.mend
    assert "`day1`" in nowhere.mend


def test_numbers_out_of_order_are_doubted_and_those_with_zeros_are_not(folder):
    (folder / "b-10.csv").touch()
    files, (doubt,) = found(folder, "b-*.csv")
    assert files == ["b-1.csv", "b-10.csv", "b-2.csv"]
    assert doubt.level == "warning"
    for name in ("z-01.csv", "z-02.csv", "z-10.csv"):
        (folder / name).touch()
    assert found(folder, "z-*.csv")[1] == []
