from __future__ import annotations

import contextlib
import math

import numpy as np
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from armeval.errors import Findings, InputError
from armeval.files.trial_file import read_trial
from tests.files.findings import faults, only_fault
from tests.files.samples import ARM, TRIAL, write_log, write_sample


@pytest.fixture
def trial_file(tmp_path):
    return write_sample(tmp_path)


def with_trial(trial_file, text):
    trial_file.write_text(text, encoding="utf-8")
    return trial_file


def altered(old: str, new: str) -> str:
    assert old in TRIAL
    return TRIAL.replace(old, new, 1)


def test_the_sample_reads_as_it_stands_in_si_units(trial_file):
    trial = read_trial(trial_file)
    assert trial.title == "Two corners"
    assert trial.arm.name == "pair"
    assert (trial.feed, trial.acceleration) == pytest.approx((0.06, 1.0))
    assert trial.corner_angle == pytest.approx(math.radians(5))
    np.testing.assert_allclose(trial.path.points, [[0.3, 0, 0], [0.3, 0.05, 0], [0.25, 0.05, 0]])
    bare, smoothed = trial.runs
    assert (bare.name, bare.compensated, len(bare.laps)) == ("bare", False, 3)
    assert (smoothed.name, smoothed.compensated, smoothed.laps) == ("smoothed", True, ())
    assert trial.compensation.table_bins == 1024
    assert trial.sticking.least_dwell == 0.020
    assert trial.findings == ()
    assert trial.source == str(trial_file)


def test_every_file_that_was_read_is_named(trial_file):
    folder = trial_file.parent
    names = ["trial.toml", "arm.toml", "pair.urdf", "maps/shoulder.csv", "maps/elbow.csv", "path.csv"]
    names += [f"logs/bare-{number}.csv" for number in (1, 2, 3)]
    assert read_trial(trial_file).files == tuple(str(folder / name) for name in names)


def test_laps_count_on_over_files_in_plain_name_order(trial_file):
    for number in (10, 11):
        write_log(trial_file.parent / "logs" / f"bare-{number}.csv", shift=0.001 * number)
    trial = read_trial(trial_file)
    laps = trial.runs[0].laps
    assert [lap.lap for lap in laps] == [1, 2, 3, 4, 5]
    assert [lap.source.rsplit("-", 1)[1] for lap in laps] == ["1.csv", "10.csv", "11.csv", "2.csv", "3.csv"]
    shifts = [math.degrees(lap.angle[0, 0]) for lap in laps]
    np.testing.assert_allclose(shifts, [0.001, 0.010, 0.011, 0.002, 0.003], atol=1e-6)
    (finding,) = trial.findings
    assert "`bare-11.csv` comes before `bare-2.csv`" in finding.what


def test_several_patterns_make_one_run_in_their_order_and_no_file_counts_twice(trial_file):
    text = altered('"logs/bare-*.csv"', '["logs/bare-3.csv", "logs/bare-*.csv"]')
    laps = read_trial(with_trial(trial_file, text)).runs[0].laps
    assert [(lap.lap, lap.source[-5:]) for lap in laps] == [(1, "3.csv"), (2, "1.csv"), (3, "2.csv")]


def test_packed_logs_are_found_like_any_other(trial_file):
    write_log(trial_file.parent / "logs" / "packed.csv.gz")
    text = altered('"logs/bare-*.csv"', '"logs/*.csv.gz"')
    assert len(read_trial(with_trial(trial_file, text)).runs[0].laps) == 1


def test_a_log_whose_name_has_brackets_is_found_by_it(trial_file):
    write_log(trial_file.parent / "logs" / "bare[1].csv")
    text = altered('"logs/bare-*.csv"', '"logs/bare[1].csv"')
    assert len(read_trial(with_trial(trial_file, text)).runs[0].laps) == 1


def test_hidden_files_are_no_logs(trial_file):
    (trial_file.parent / "logs" / "._bare-1.csv").write_text("junk", encoding="utf-8")
    text = altered('"logs/bare-*.csv"', '"logs/*.csv"')
    assert len(read_trial(with_trial(trial_file, text)).runs[0].laps) == 3


def test_progress_is_told_after_every_log(trial_file):
    told = []
    read_trial(trial_file, progress=lambda what, done, total: told.append((what, done, total)))
    assert told == [("reading logs", 1, 3), ("reading logs", 2, 3), ("reading logs", 3, 3)]


def test_logs_that_are_not_wanted_are_not_looked_at(trial_file):
    (trial_file.parent / "logs" / "bare-2.csv").write_text("no log\n", encoding="utf-8")
    trial = read_trial(trial_file, logs=False)
    assert [run.laps for run in trial.runs] == [(), ()]
    assert not any("bare-" in file for file in trial.files)


def test_foreign_headers_are_renamed(trial_file):
    log = trial_file.parent / "logs" / "foreign.csv"
    log.write_text("t,q1,q2\n0,0.1,1.0\n0.1,0.2,1.0\n0.2,0.3,1.1\n", encoding="utf-8")
    columns = '[columns]\nt = "time [s]"\nq1 = "shoulder.angle [rad]"\nq2 = "elbow.angle [rad]"\n\n[[run]]'
    text = altered('"logs/bare-*.csv"', '"logs/foreign.csv"').replace("[[run]]", columns, 1)
    (lap,) = read_trial(with_trial(trial_file, text)).runs[0].laps
    np.testing.assert_allclose(lap.angle, [[0.1, 1.0], [0.2, 1.0], [0.3, 1.1]])


def test_compensation_sticking_and_corners_are_read(trial_file):
    tables = """
[compensation]
table_bins = 512
interpolation = "nearest"
index_error = "0.1 deg"
map_noise = "0.2 mN*m"

[sticking]
least_target_speed = "1 deg/s"
speed_share = 0.05
least_dwell = "30 ms"
"""
    text = altered('feed = "60 mm/s"', 'feed = "60 mm/s"\ncorner_angle = "10 deg"') + tables
    trial = read_trial(with_trial(trial_file, text))
    assert trial.corner_angle == pytest.approx(math.radians(10))
    compensation, sticking = trial.compensation, trial.sticking
    assert (compensation.table_bins, compensation.interpolation) == (512, "nearest")
    assert (compensation.index_error, compensation.map_noise) == pytest.approx((math.radians(0.1), 2e-4))
    assert sticking.least_target_speed == pytest.approx(math.radians(1))
    assert (sticking.speed_share, sticking.least_dwell) == pytest.approx((0.05, 0.03))


def test_a_trial_without_a_title_is_called_after_its_folder(trial_file):
    assert read_trial(with_trial(trial_file, altered('title = "Two corners"', ""))).title == trial_file.parent.name


@pytest.mark.parametrize(
    ("old", "new", "place", "told"),
    [
        ('feed = "60 mm/s"', "feed = 60", "feed", '"60 m/s"'),
        ('feed = "60 mm/s"', 'feed = "60 mm"', "feed", "`m/s`"),
        ('feed = "60 mm/s"', 'feed = "0 mm/s"', "feed", "more than 0"),
        ('feed = "60 mm/s"', 'fed = "60 mm/s"', "fed", "`feed`"),
        ('path = "path.csv"', "", "path", "add it"),
        ("compensated = false", "compensated = 0", "[[run]] 1, compensated", "`true` or `false`"),
        ("compensated = true", "", "[[run]] 2, compensated", "add it"),
        ("compensated = true", "compensate = true", "[[run]] 2, compensate", "`compensated`"),
        ('"logs/bare-*.csv"', '"logs/base-*.csv"', "[[run]] 1, logs", "`bare-1.csv`"),
        ('"logs/bare-*.csv"', '"log/bare-*.csv"', "[[run]] 1, logs", "`logs`"),
        ('"logs/bare-*.csv"', "3", "[[run]] 1, logs", "square brackets"),
        ('schema = "armeval/trial/1"', 'schema = "armeval/trial/7"', "schema", "armeval/trial/1"),
        ("[[run]]", "[sticking]\nspeed_share = 2\n[[run]]", "[sticking]", "below 1"),
        ("[[run]]", "[compensation]\ntable_bins = 2\n[[run]]", "[compensation] table_bins", "4 or more"),
        ("[[run]]", '[compensation]\ninterpolation = "cubic"\n[[run]]', "[compensation] interpolation", "'linear'"),
    ],
)
def test_one_fault_is_told_with_its_place_and_mend(trial_file, old, new, place, told):
    found = faults(lambda: read_trial(with_trial(trial_file, altered(old, new))))
    (fault,) = [fault for fault in found if fault.place == place]
    assert told in f"{fault.what} {fault.mend}"
    assert fault.file == str(trial_file)


def test_a_path_without_time_needs_feed_and_acceleration(trial_file):
    fault = only_fault(lambda: read_trial(with_trial(trial_file, altered('acceleration = "1 m/s^2"', ""))))
    assert "acceleration" in fault.mend
    assert fault.file == str(trial_file)


def test_a_path_with_time_does_not_use_the_feed_and_says_so(trial_file):
    path = trial_file.parent / "path.csv"
    path.write_text("time [s],x [mm],y [mm],z [mm]\n0,300,0,0\n1,300,50,0\n", encoding="utf-8")
    assert {finding.place for finding in read_trial(trial_file).findings} == {"feed", "acceleration"}


def test_a_trial_without_runs_and_two_runs_of_one_name_are_refused(trial_file):
    fault = only_fault(lambda: read_trial(with_trial(trial_file, TRIAL[: TRIAL.index("[[run]]")])))
    assert (fault.place, fault.what) == ("run", "`run` is missing")
    fault = only_fault(lambda: read_trial(with_trial(trial_file, altered('"smoothed"', '"bare"'))))
    assert "`bare`" in fault.what


def test_a_log_of_two_runs_is_doubted(trial_file):
    text = TRIAL + 'logs = "logs/bare-1.csv"\n'
    (finding,) = read_trial(with_trial(trial_file, text)).findings
    assert "more than one run" in finding.what
    assert "bare-1.csv" in finding.what


def test_faults_in_all_files_are_told_at_once_each_with_its_file(trial_file):
    folder = trial_file.parent
    (folder / "arm.toml").write_text(ARM.replace('"0.8 N*m/rad"', '"0.8 N"'), encoding="utf-8")
    (folder / "path.csv").write_text("x [mm],y [mm],z [mm]\n300,0,0\n300,fifty,0\n", encoding="utf-8")
    (folder / "logs" / "bare-2.csv").write_text("time [s],shoulder.angle [deg]\n0,1\n1,2\n", encoding="utf-8")
    (folder / "logs" / "bare-3.csv").write_text("", encoding="utf-8")
    found = faults(lambda: read_trial(with_trial(trial_file, altered('"Two corners"', "2"))))
    files = {fault.file.removeprefix(f"{folder}/") for fault in found}
    assert files == {"trial.toml", "arm.toml", "path.csv", "logs/bare-2.csv", "logs/bare-3.csv"}


def test_a_faulty_urdf_does_not_hide_a_missing_path_or_log(trial_file):
    folder = trial_file.parent
    (folder / "pair.urdf").write_text("<robot>", encoding="utf-8")
    (folder / "path.csv").unlink()
    text = altered('"logs/bare-*.csv"', '"logs/base-*.csv"')
    found = faults(lambda: read_trial(with_trial(trial_file, text)))
    assert {fault.file.removeprefix(f"{folder}/") for fault in found} == {"trial.toml", "pair.urdf", "path.csv"}


def test_no_fault_is_told_twice(trial_file):
    folder = trial_file.parent
    (folder / "arm.toml").write_text(ARM.replace('"0.8 N*m/rad"', '"0.8 N"'), encoding="utf-8")
    with pytest.raises(InputError) as caught:
        read_trial(trial_file, findings=Findings())
    assert len(caught.value.findings) == len(set(caught.value.findings)) == 1


def test_an_arm_where_a_trial_is_due_and_a_folder_where_a_file_is_due_are_told(trial_file):
    assert "`arm`" in only_fault(lambda: read_trial(trial_file.parent / "arm.toml")).what
    assert "directory" in only_fault(lambda: read_trial(trial_file.parent)).what


@settings(max_examples=60, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(cut=st.integers(0, len(TRIAL)), junk=st.text(max_size=6), gone=st.integers(0, 40))
def test_whatever_is_cut_or_typed_into_the_text_the_answer_is_a_trial_or_an_input_error(trial_file, cut, junk, gone):
    with_trial(trial_file, TRIAL[:cut] + junk + TRIAL[cut + gone :])
    with contextlib.suppress(InputError):
        read_trial(trial_file)
