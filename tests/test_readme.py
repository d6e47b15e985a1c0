"""What the README shows works as it stands there."""

import re
import tomllib
from pathlib import Path

import matplotlib as mpl
import pytest
from typer.main import get_command

import armeval
from armeval import plots
from armeval.cli.app import app
from armeval.files.new_trial import robot_names
from armeval.files.trial_table import TrialTable

README = Path(__file__).parent.parent / "README.md"
pytestmark = pytest.mark.skipif(not README.exists(), reason="the README is not beside the tests")


def blocks(language: str) -> list[str]:
    return re.findall(rf"^```{language}\n(.*?)^```", README.read_text(encoding="utf-8"), re.DOTALL | re.MULTILINE)


def test_the_notebook_lines_run(monkeypatch, tmp_path):
    (lines,) = blocks("python")
    monkeypatch.chdir(tmp_path)
    mpl.use("Agg")
    names: dict = {}
    exec(compile(lines, "README.md", "exec"), names)
    assert names["measured"].to_frame()["rms_m"].gt(0.0).all()
    axes = names["plt"].gcf().axes[0]
    assert "[mm]" in axes.get_xlabel()
    names["plt"].close("all")


def test_the_table_of_commands_is_that_of_the_program():
    told = set(re.findall(r"^\| `armeval (\w+)", README.read_text(encoding="utf-8"), re.MULTILINE))
    assert told == set(get_command(app).commands)


def test_the_robots_named_are_those_shipped():
    text = README.read_text(encoding="utf-8")
    for name in robot_names():
        assert f"`{name}`" in text


def test_every_key_of_a_trial_stands_in_the_example():
    shown = next(tomllib.loads(text) for text in blocks("toml") if "armeval/trial/1" in text)
    known = {field.alias or name for name, field in TrialTable.model_fields.items()}
    assert known <= set(shown) | {"corner_angle", "hand"}


@pytest.mark.parametrize("name", plots.__all__)
def test_every_exported_figure_can_be_had(name):
    assert callable(getattr(plots, name))


def test_the_shipped_demo_is_the_one_that_the_readme_names(tmp_path):
    assert armeval.write_demo(tmp_path / "harbour-demo").name == "trial.toml"
