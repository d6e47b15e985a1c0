"""``[uncertainty]``: how far the arm may be from what the files say."""

from __future__ import annotations

import math

import pytest

from armeval.errors import InputError
from armeval.files.trial_file import read_trial
from armeval.files.trial_writer import write_trial
from armeval.model.spreads import Spreads
from tests.files.samples import TRIAL, write_sample

TABLE = """
[uncertainty]
rotor_index = "0.2 deg"
friction = 0.3
torque_constant = 0.05
start = "1 deg"
"""


def test_without_the_table_the_defaults_hold(tmp_path):
    assert read_trial(write_sample(tmp_path)).uncertainty == Spreads()


def test_the_table_is_read_in_si_units(tmp_path):
    found = read_trial(write_sample(tmp_path, trial=TRIAL + TABLE)).uncertainty
    assert found.rotor_index == pytest.approx(math.radians(0.2))
    assert (found.friction, found.torque_constant) == (0.3, 0.05)
    assert found.start == pytest.approx(math.radians(1.0))


def test_it_comes_back_as_it_was_written(tmp_path):
    trial = read_trial(write_sample(tmp_path, trial=TRIAL + TABLE))
    written = write_trial(trial, tmp_path / "again.toml", arm=tmp_path / "arm.toml")
    again = read_trial(written).uncertainty
    assert again.rotor_index == pytest.approx(trial.uncertainty.rotor_index, rel=1e-14)
    assert (again.friction, again.torque_constant) == (0.3, 0.05)


@pytest.mark.parametrize(
    ("line", "complaint"),
    [
        ("rotor_index = 0.2", "unit"),
        ('friction = "30 %"', "not a number"),
        ("torque_constant = -0.1", "too small"),
        ('start = "3 N"', "N"),
    ],
)
def test_values_that_cannot_be_spreads_are_refused_with_their_place(tmp_path, line, complaint):
    with pytest.raises(InputError) as error:
        read_trial(write_sample(tmp_path, trial=f"{TRIAL}\n[uncertainty]\n{line}\n"))
    (finding,) = error.value.findings
    assert complaint in f"{finding.what} {finding.mend}"
    assert finding.place == f"[uncertainty] {line.split(' ')[0]}"
