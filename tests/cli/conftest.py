import json
import shutil
import sys
from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path

import pytest

from armeval.cli.app import run
from armeval.files.demo import write_demo
from armeval.files.new_trial import new_trial


@dataclass(frozen=True)
class Said:
    """What a command printed, and its exit code."""

    code: int
    out: str
    err: str

    @property
    def document(self) -> dict:
        return json.loads(self.out)


@pytest.fixture
def armeval(monkeypatch, capsys) -> Callable[..., Said]:
    """Run a command in this process."""

    def call(*words: object) -> Said:
        monkeypatch.setattr(sys, "argv", ["armeval", *map(str, words)])
        capsys.readouterr()
        with pytest.raises(SystemExit) as stop:
            run()
        printed = capsys.readouterr()
        return Said(int(stop.value.code or 0), printed.out, printed.err)

    return call


@pytest.fixture(scope="session")
def _one_lap_each(tmp_path_factory) -> Path:
    folder = tmp_path_factory.mktemp("harbour") / "demo"
    write_demo(folder)
    for log in (folder / "logs").glob("*-[23].parquet"):
        log.unlink()
    return folder


@pytest.fixture
def harbour(_one_lap_each, tmp_path) -> Path:
    """The demo's trial with one lap a run, to be spoiled at will."""
    shutil.copytree(_one_lap_each, tmp_path / "harbour")
    return tmp_path / "harbour" / "trial.toml"


@pytest.fixture
def starter(tmp_path) -> Path:
    """A new trial of the arm `tern`, without logs."""
    return new_trial(tmp_path / "starter", "tern")


@pytest.fixture
def edit() -> Callable[[Path, str, str], None]:
    """Replace a piece of text in a file; it must be there."""

    def replace(file: Path, old: str, new: str) -> None:
        text = file.read_text(encoding="utf-8")
        assert old in text, f"`{old}` is not in {file.name}"
        file.write_text(text.replace(old, new), encoding="utf-8")

    return replace
