"""The demo as it lands in the user's folder."""

import tomllib

import pytest

from armeval.errors import InputError
from armeval.files.demo import write_demo


def test_the_demo_brings_all_that_its_trial_names(tmp_path):
    trial = write_demo(tmp_path / "harbour")
    assert trial == tmp_path / "harbour" / "trial.toml"
    named = tomllib.loads(trial.read_text(encoding="utf-8"))
    assert (trial.parent / named["arm"]).is_file()
    assert (trial.parent / named["path"]).is_file()
    for run in named["run"]:
        assert len(list(trial.parent.glob(run["logs"]))) == 3


def test_the_demo_says_that_it_is_made_up(tmp_path):
    folder = write_demo(tmp_path / "harbour").parent
    assert "made-up" in (folder / "trial.toml").read_text(encoding="utf-8")
    assert "invented" in (folder / "NOTES.md").read_text(encoding="utf-8")
    assert "Invented" in (folder / "tern" / "NOTES.md").read_text(encoding="utf-8")


def test_the_demo_does_not_write_over_somebody_s_files(tmp_path):
    (tmp_path / "mine.txt").write_text("mine", encoding="utf-8")
    with pytest.raises(InputError, match="not empty"):
        write_demo(tmp_path)
    assert [file.name for file in tmp_path.iterdir()] == ["mine.txt"]


def test_the_demo_written_with_force_keeps_other_files(tmp_path):
    (tmp_path / "mine.txt").write_text("mine", encoding="utf-8")
    write_demo(tmp_path, force=True)
    assert (tmp_path / "mine.txt").read_text(encoding="utf-8") == "mine"
    assert (tmp_path / "trial.toml").is_file()
