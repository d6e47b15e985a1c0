from __future__ import annotations

import re

import pytest

from armeval.errors import InputError
from armeval.files.check import check
from armeval.files.new_trial import new_trial, robot_folder, robot_names
from armeval.files.trial_file import read_trial
from armeval.files.trial_table import (
    CompensationTable,
    HandTable,
    RunTable,
    StickingTable,
    TrialTable,
    UncertaintyTable,
)
from tests.files.findings import only_fault


def test_three_robots_are_shipped_each_with_all_that_a_trial_needs():
    assert robot_names() == ("heron", "plover", "tern")
    for name in robot_names():
        for file in ("arm.toml", f"{name}.urdf", "starter_path.csv"):
            assert (robot_folder(name) / file).is_file(), (name, file)


@pytest.mark.parametrize("robot", ["heron", "plover", "tern"])
@pytest.mark.filterwarnings("ignore::armeval.errors.InputWarning")
def test_a_new_trial_reads_and_has_nothing_to_mend(tmp_path, robot):
    file = new_trial(tmp_path / "mine", robot)
    assert file == tmp_path / "mine" / "trial.toml"
    trial = read_trial(file)
    assert [(run.name, run.compensated) for run in trial.runs] == [("bare", False), ("compensated", True)]
    assert trial.arm.name == robot
    assert all(drive.cog_map is not None for drive in trial.arm.drives)
    assert not check(file).has_errors


def test_a_new_trial_stands_on_its_own(tmp_path):
    new_trial(tmp_path / "mine", "tern")
    moved = (tmp_path / "mine").rename(tmp_path / "elsewhere")
    trial = read_trial(moved / "trial.toml", findings=None)
    assert all(str(moved) in file for file in trial.files)
    assert not (moved / "tern" / "starter_path.csv").exists()


def test_every_line_that_is_commented_out_may_be_used_as_it_stands(tmp_path):
    file = new_trial(tmp_path / "mine", "tern")
    text = file.read_text(encoding="utf-8")
    used = re.sub(r'(?m)^# (?=\[?"?\w+"? ?[=\]])', "", text)
    used = re.sub(r"(?m)^logs = .*$", "", used)
    assert len(re.findall(r"(?m)^\w+ = |^\[", used)) > len(re.findall(r"(?m)^\w+ = |^\[", text)) + 5
    file.write_text(used, encoding="utf-8")
    trial = read_trial(file)
    assert trial.compensation.map_noise == pytest.approx(2e-4)
    assert trial.sticking.least_dwell == pytest.approx(0.02)


def test_the_starter_shows_every_key_that_a_trial_may_have(tmp_path):
    text = new_trial(tmp_path / "mine", "tern").read_text(encoding="utf-8")
    for table in (TrialTable, CompensationTable, HandTable, StickingTable, UncertaintyTable, RunTable):
        for name, field in table.model_fields.items():
            assert re.search(rf"(?m)^#? ?\[*{field.alias or name}\b", text), name


def test_a_robot_that_is_not_shipped_comes_with_the_near_one():
    assert "`tern`" in only_fault(lambda: robot_folder("turn")).mend
    assert "`plover`" in only_fault(lambda: robot_folder("dodo")).mend


def test_a_trial_is_never_written_over_files_unasked(tmp_path):
    (tmp_path / "trial.toml").write_text("mine", encoding="utf-8")
    (tmp_path / "notes.txt").write_text("mine", encoding="utf-8")
    with pytest.raises(InputError, match="--force"):
        new_trial(tmp_path, "tern")
    assert (tmp_path / "trial.toml").read_text(encoding="utf-8") == "mine"
    new_trial(tmp_path, "tern", force=True)
    assert (tmp_path / "trial.toml").read_text(encoding="utf-8") != "mine"
    assert (tmp_path / "notes.txt").read_text(encoding="utf-8") == "mine"
