from __future__ import annotations

from armeval.files.text_file import read_text, what_is_there
from tests.files.findings import only_fault


def test_a_byte_order_mark_is_no_part_of_the_text(tmp_path):
    file = tmp_path / "a.toml"
    file.write_bytes(b"\xef\xbb\xbfname = 1\n")
    assert read_text(file) == "name = 1\n"


def test_a_file_that_is_not_utf8_is_refused_with_its_line(tmp_path):
    file = tmp_path / "a.toml"
    file.write_bytes(b"one\ntwo\nna\xefve\n")
    fault = only_fault(lambda: read_text(file))
    assert fault.place == "line 3"
    assert "UTF-8" in fault.mend
    assert fault.file == str(file)


def test_a_missing_file_comes_with_the_name_that_was_meant(tmp_path):
    (tmp_path / "trial.toml").touch()
    fault = only_fault(lambda: read_text(tmp_path / "trail.toml"))
    assert "no such file" in fault.what
    assert "`trial.toml`" in fault.mend


def test_a_directory_and_an_empty_file_are_refused(tmp_path):
    empty = tmp_path / "empty.toml"
    empty.write_text("  \n\n", encoding="utf-8")
    assert "directory" in only_fault(lambda: read_text(tmp_path)).what
    assert "empty" in only_fault(lambda: read_text(empty)).what


def test_what_is_there_names_the_nearest_folder_that_exists(tmp_path):
    (tmp_path / "logs").mkdir()
    (tmp_path / "logs" / "bare-1.csv").touch()
    assert "`bare-1.csv`" in what_is_there(tmp_path / "logs")
    told = what_is_there(tmp_path / "log" / "deep")
    assert "no directory" in told
    assert "`logs`" in told
