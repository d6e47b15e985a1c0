"""Thresholds of a hand, from the shipped file and from edited ones."""

from __future__ import annotations

import pytest

from armeval.errors import InputError
from armeval.files.new_trial import new_trial
from armeval.files.thresholds_file import read_thresholds, shipped_thresholds
from armeval.files.trial_file import read_trial
from armeval.files.trial_writer import write_trial


def test_the_shipped_thresholds_say_where_they_come_from_and_what_is_from_memory():
    thresholds = read_thresholds()
    for source in (thresholds.force_source, thresholds.vibration_source):
        assert "memory" in source
    assert "Pang" in thresholds.force_source
    assert "Brisben" in thresholds.vibration_source


def _edited(tmp_path, old, new):
    text = shipped_thresholds().read_text(encoding="utf-8")
    assert old in text
    file = tmp_path / "mine.toml"
    file.write_text(text.replace(old, new), encoding="utf-8")
    return file


def test_they_can_be_edited(tmp_path):
    assert read_thresholds(_edited(tmp_path, "share = 0.07", "share = 0.09")).force_share == 0.09


@pytest.mark.parametrize(
    ("old", "new", "said"),
    [
        ('"40 Hz"', '"10 Hz"', "rising frequencies"),
        ("share_low = 0.05", "share_low = 0.5", "low to high"),
        ("spread = 3.2", "spread = 0.5", "too small"),
        ('"0.1 kg"', '"0.1"', "no unit"),
        ('"3.9 um", "3.9 um"', '"3.9 um"', "displacement"),
    ],
)
def test_wrong_ones_are_refused_with_the_place(tmp_path, old, new, said):
    with pytest.raises(InputError, match=said) as caught:
        read_thresholds(_edited(tmp_path, old, new))
    assert "mine.toml" in str(caught.value)


HAND = """
[hand]
rendered_force = "1.5 N"
gravity_feedforward = false
bandwidth = "6 Hz"
run = "bare"
thresholds = "thresholds.toml"
"""


def _with_hand(tmp_path, hand=HAND):
    file = new_trial(tmp_path / "mine", "tern")
    file.write_text(file.read_text(encoding="utf-8").replace("\n[[run]]", f"{hand}\n[[run]]", 1), encoding="utf-8")
    return file


def test_a_trial_names_the_hand_and_its_thresholds_and_reads_back_the_same(tmp_path):
    file = _with_hand(tmp_path)
    trial = read_trial(file)
    assert str(file.parent / "thresholds.toml") in trial.files
    again = read_trial(write_trial(trial, file.parent / "again.toml", arm=file.parent / "tern" / "arm.toml"))
    for read in (trial, again):
        assert read.hand.rendered_force == 1.5
        assert read.hand.gravity_feedforward is False
        assert read.hand.bandwidth == 6.0
        assert read.hand.run == "bare"
        assert read.hand.thresholds.source.endswith("thresholds.toml")


def test_a_hand_without_thresholds_takes_the_shipped_ones(tmp_path):
    trial = read_trial(_with_hand(tmp_path, "\n[hand]\n"))
    assert trial.hand.thresholds.force_share == 0.07
    assert trial.hand.rendered_force is None


@pytest.mark.parametrize(
    ("old", "new", "said"),
    [
        ('"1.5 N"', '"0 N"', "rendered_force"),
        ('"6 Hz"', '"0 Hz"', "bandwidth"),
        ('run = "bare"', 'run = "bear"', "`bare`, `compensated`"),
        ('"thresholds.toml"', '"treshold.toml"', "treshold.toml"),
        ("bandwidth", "bandwith", "bandwidth"),
    ],
)
def test_what_is_wrong_with_the_hand_is_told(tmp_path, old, new, said):
    with pytest.raises(InputError, match=said):
        read_trial(_with_hand(tmp_path, HAND.replace(old, new)))
