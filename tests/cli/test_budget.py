"""The budget at the command line."""

import json

import pytest
from typer.testing import CliRunner

from armeval.cli.app import app
from armeval.cli.budget import budget_text
from armeval.evaluate.budget import Budget
from armeval.evaluate.replaying.run_budget import CauseBudget, Part, RunBudget
from armeval.files.new_trial import new_trial

MADE_UP = Budget(
    "made up",
    (
        RunBudget(
            ("bare",),
            compensated=False,
            whole=Part(4e-6, 1e-6),
            causes=(
                CauseBudget("cogging", True, Part(3e-6, 0.9e-6), (("lift", Part(3e-6, 0.9e-6)),), 1.5e-3, 1e-3),
                CauseBudget("friction", True, Part(-0.5e-6, 0.1e-6), (("lift", Part(-0.5e-6, 0.1e-6)),), 0.0, 2.1e-3),
                CauseBudget("encoder", False, Part(0.0, 0.0), (), 0.0, 2e-3),
            ),
            left=Part(1.5e-6, 0.0),
        ),
    ),
)


def test_every_row_tells_its_share():
    lines = {line.split("  ")[0].strip(): line for line in budget_text(MADE_UP).splitlines() if line}
    assert "75.0 %" in lines["cogging"]
    assert "-12.5 %" in lines["friction"]
    assert "nothing to act on" in lines["encoder"]
    assert "37.5 %" in lines["left without causes"]
    assert "tracking error 2.000 mm rms" in budget_text(MADE_UP)


def test_the_reader_is_told_what_a_share_means():
    assert "below 0 the cause takes error away" in budget_text(MADE_UP)


@pytest.mark.parametrize("robot", ["plover"])
def test_the_command_answers_with_one_document_and_its_table(robot, tmp_path):
    trial = new_trial(tmp_path / "trial", robot)
    result = CliRunner().invoke(app, ["budget", str(trial), "--json", "--out", str(tmp_path / "answer")])
    assert result.exit_code == 0
    told = json.loads(result.stdout)
    assert told["schema"] == "armeval/budget/1"
    assert [state["runs"] for state in told["budgets"]] == [["bare"], ["compensated"]]
    assert sorted(file.name for file in (tmp_path / "answer").iterdir()) == ["budget.csv", "budget.json"]
