"""The prediction at the command line, with members."""

import json

from typer.testing import CliRunner

from armeval.cli.app import app
from armeval.files.new_trial import new_trial


def test_members_are_drawn_and_told_in_text_document_and_table(tmp_path):
    trial = new_trial(tmp_path / "trial", "plover")
    text = CliRunner().invoke(app, ["predict", str(trial), "--members", "8", "--out", str(tmp_path / "answer")])
    assert text.exit_code == 0
    assert "8 arms as they may be" in text.stdout
    assert sorted(file.name for file in (tmp_path / "answer").iterdir()) == [
        "bands.csv",
        "predict.json",
        "predicted.csv",
    ]
    told = CliRunner().invoke(app, ["predict", str(trial), "--members", "8", "--json"])
    assert json.loads(told.stdout) == json.loads((tmp_path / "answer" / "predict.json").read_text(encoding="utf-8"))
    assert [run["ensemble"]["members"] for run in json.loads(told.stdout)["runs"]] == [8, 8]
