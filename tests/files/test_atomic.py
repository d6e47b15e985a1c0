from __future__ import annotations

import errno
import os
import stat
from pathlib import Path

import pytest

from armeval.errors import InputError
from armeval.files.atomic import write_folder, write_text
from tests.files.findings import only_fault


def fill(target, force=False, text="new"):
    with write_folder(target, force=force) as folder:
        (folder / "a.txt").write_text(text, encoding="utf-8")
        (folder / "deep").mkdir()
        (folder / "deep" / "b.txt").write_text(text, encoding="utf-8")


def tree(folder: Path) -> dict[str, str]:
    """Every file with what it holds, hidden ones too."""
    return {
        str(file.relative_to(folder)): file.read_text(encoding="utf-8") for file in folder.rglob("*") if file.is_file()
    }


NEW = {"out/a.txt": "new", "out/deep/b.txt": "new"}


def test_a_folder_appears_whole_with_the_rights_of_any_other(tmp_path):
    fill(tmp_path / "out")
    assert tree(tmp_path) == NEW
    (tmp_path / "plain").mkdir()
    rights = [stat.S_IMODE((tmp_path / name).stat().st_mode) for name in ("out", "plain")]
    assert rights[0] == rights[1]


def test_nothing_is_there_before_the_end(tmp_path):
    with write_folder(tmp_path / "out") as folder:
        (folder / "a.txt").write_text("new", encoding="utf-8")
        assert not (tmp_path / "out").exists()
    assert tree(tmp_path) == {"out/a.txt": "new"}


def test_missing_folders_above_are_made_and_taken_away_again_after_a_failure(tmp_path):
    fill(tmp_path / "x" / "y" / "out")
    assert (tmp_path / "x" / "y" / "out" / "a.txt").is_file()
    with pytest.raises(KeyError), write_folder(tmp_path / "v" / "w" / "out"):
        raise KeyError
    assert not (tmp_path / "v").exists()


def test_an_empty_folder_is_filled(tmp_path):
    (tmp_path / "out").mkdir()
    fill(tmp_path / "out")
    assert tree(tmp_path) == NEW


def test_the_current_folder_can_be_filled_and_stays_the_current_one(tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    fill(".")
    assert tree(Path.cwd()) == {"a.txt": "new", "deep/b.txt": "new"}


def test_a_folder_with_files_is_left_alone(tmp_path):
    (tmp_path / "out").mkdir()
    (tmp_path / "out" / "mine.txt").write_text("mine", encoding="utf-8")
    fault = only_fault(lambda: fill(tmp_path / "out"))
    assert "not empty" in fault.what
    assert "--force" in fault.mend
    assert "`mine.txt`" in fault.mend
    assert tree(tmp_path) == {"out/mine.txt": "mine"}


def test_force_replaces_files_of_the_same_name_and_keeps_all_others(tmp_path):
    for name in ("a.txt", "mine.txt", "deep/mine.txt"):
        (tmp_path / "out" / name).parent.mkdir(parents=True, exist_ok=True)
        (tmp_path / "out" / name).write_text("mine", encoding="utf-8")
    fill(tmp_path / "out", force=True)
    assert tree(tmp_path) == {**NEW, "out/mine.txt": "mine", "out/deep/mine.txt": "mine"}


def test_force_puts_no_file_in_the_place_of_a_folder(tmp_path):
    (tmp_path / "out" / "a.txt").mkdir(parents=True)
    (tmp_path / "out" / "deep").mkdir()
    fault = only_fault(lambda: fill(tmp_path / "out", force=True))
    assert "same name" in fault.what
    assert tree(tmp_path) == {}


def test_a_file_is_never_replaced_by_a_folder(tmp_path):
    (tmp_path / "out").write_text("mine", encoding="utf-8")
    for force in (False, True):
        assert "a file stands" in only_fault(lambda f=force: fill(tmp_path / "out", force=f)).what
    assert tree(tmp_path) == {"out": "mine"}


def test_what_others_wrote_meanwhile_is_not_written_over(tmp_path):
    def fill_slowly():
        with write_folder(tmp_path / "out") as folder:
            (folder / "a.txt").write_text("new", encoding="utf-8")
            (tmp_path / "out").mkdir()
            (tmp_path / "out" / "theirs.txt").write_text("theirs", encoding="utf-8")

    assert "not empty" in only_fault(fill_slowly).what
    assert tree(tmp_path) == {"out/theirs.txt": "theirs"}


@pytest.mark.parametrize("fault", [KeyboardInterrupt, InputError("bad"), OSError(errno.ENOSPC, "No space left")])
def test_nothing_is_left_after_a_failure(tmp_path, fault):
    def fill_and_fail():
        with write_folder(tmp_path / "out") as folder:
            (folder / "a.txt").write_text("new", encoding="utf-8")
            raise fault

    with pytest.raises((KeyboardInterrupt, InputError)):
        fill_and_fail()
    assert list(tmp_path.iterdir()) == []


def test_a_full_disk_is_told_in_plain_words(tmp_path):
    with pytest.raises(InputError, match=r"no space left.*room on the disk"), write_folder(tmp_path / "out"):
        raise OSError(errno.ENOSPC, os.strerror(errno.ENOSPC))


def test_a_place_that_cannot_be_written_is_told(tmp_path):
    (tmp_path / "file").touch()
    assert "cannot be written" in only_fault(lambda: fill(tmp_path / "file" / "out")).what


@pytest.mark.skipif(not hasattr(os, "geteuid") or os.geteuid() == 0, reason="nothing is forbidden to root")
def test_a_folder_without_permission_is_told(tmp_path):
    tmp_path.chmod(0o500)
    try:
        assert "permission" in only_fault(lambda: fill(tmp_path / "out")).what
        assert "permission" in only_fault(lambda: write_text(tmp_path / "a.txt", "new")).what
    finally:
        tmp_path.chmod(0o700)


def test_a_refused_permission_is_told(tmp_path, monkeypatch):
    def refuse(*_args, **_kwargs):
        raise PermissionError(errno.EACCES, os.strerror(errno.EACCES), str(tmp_path))

    monkeypatch.setattr(Path, "mkdir", refuse)
    fault = only_fault(lambda: fill(tmp_path / "out"))
    assert "permission denied" in fault.what
    assert fault.file == str(tmp_path / "out")


def test_a_text_replaces_another_whole_or_not_at_all(tmp_path, monkeypatch):
    file = write_text(tmp_path / "deep" / "a.txt", "one")
    assert write_text(file, "two").read_text(encoding="utf-8") == "two"

    def fail(*_args, **_kwargs):
        raise OSError(errno.ENOSPC, os.strerror(errno.ENOSPC))

    monkeypatch.setattr(Path, "replace", fail)
    with pytest.raises(InputError, match="no space left"):
        write_text(file, "three")
    assert tree(tmp_path) == {"deep/a.txt": "two"}
