"""A trial that tells of a hand gets a section on what it meets; others do not."""

import json

import pytest

from armeval.errors import InputError
from armeval.evaluate.measure import measure
from armeval.files.demo import write_demo
from armeval.files.new_trial import new_trial
from armeval.files.trial_file import read_trial
from armeval.report import write_report


@pytest.fixture(scope="module")
def folder(tmp_path_factory):
    folder = tmp_path_factory.mktemp("hand")
    trial = new_trial(folder / "trial", "plover")
    trial.write_text(trial.read_text() + '\n[hand]\nrendered_force = "3 N"\n')
    write_report(read_trial(trial), folder / "report")
    return folder / "report"


def test_the_page_says_what_the_hand_meets_and_gives_no_limit_of_its_own(folder):
    page = (folder / "report.html").read_text(encoding="utf-8")
    assert 'id="hand"' in page
    assert "The hand meets a ripple of" in page
    assert "gives no limit of its own" in page


def test_the_document_and_the_tables_hold_it(folder):
    document = json.loads((folder / "results.json").read_text(encoding="utf-8"))
    assert document["feel"]["schema"] == "armeval/feel/1"
    assert document["feel"]["hand"]["rendered_force_N"] == 3.0
    assert {"hand_force.csv", "hand_ripple.csv"} <= {file.name for file in (folder / "tables").iterdir()}
    assert (folder / "figures" / "hand-force.svg").exists()


def test_without_a_hand_there_is_no_such_section(tmp_path):
    write_report(read_trial(new_trial(tmp_path / "trial", "plover")), tmp_path / "report")
    assert 'id="hand"' not in (tmp_path / "report" / "report.html").read_text(encoding="utf-8")
    assert json.loads((tmp_path / "report" / "results.json").read_text(encoding="utf-8"))["feel"] is None


def test_a_run_that_a_hand_led_has_no_target_to_stray_from(tmp_path):
    trial = read_trial(write_demo(tmp_path / "demo", trial="feel"))
    assert [run.name for run in trial.driven] == []
    with pytest.raises(InputError, match="a hand led the only run with logs"):
        measure(trial)
