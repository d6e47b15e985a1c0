"""Every command answers its question: in words, as JSON of the promised shape, and as files."""

import os
import subprocess
import sys

import pytest

ENVELOPE = {"schema", "armeval", "trial", "warnings"}
SUMMARY = {"rms_m", "rms_low_m", "rms_high_m", "mean_m", "median_m", "p95_m", "max_m", "samples"}


def test_help_names_every_command_and_the_caution(armeval):
    said = armeval("--help")
    assert said.code == 0
    for command in ("demo", "new", "check", "map", "predict", "measure", "locate", "report"):
        assert f"\n  {command} " in said.out
    assert "certifies nothing" in " ".join(said.out.split())


def test_the_version_can_be_asked_for(armeval):
    assert armeval("--version").out.startswith("armeval 0.")


@pytest.mark.parametrize(
    "words", [(), ("frobnicate",), ("predict",), ("predict", "a", "b"), ("predict", "a", "--nope")]
)
def test_wrong_use_exits_with_2(armeval, words):
    assert armeval(*words).code == 2


def test_the_package_runs_as_a_module():
    done = subprocess.run([sys.executable, "-m", "armeval", "--version"], capture_output=True, text=True, check=True)
    assert done.stdout.startswith("armeval")


def test_a_new_trial_is_sound(armeval, tmp_path):
    said = armeval("new", tmp_path / "mine", "--robot", "tern")
    assert said.code == 0
    checked = armeval("check", tmp_path / "mine" / "trial.toml", "--json")
    assert checked.code == 0
    assert checked.document.keys() == ENVELOPE | {"findings"}
    assert checked.document["schema"] == "armeval/check/1"
    assert not [finding for finding in checked.document["findings"] if finding["level"] == "error"]


def test_map_tells_orders_largest_first(armeval, starter):
    document = armeval("map", starter, "--json").document
    assert document["schema"] == "armeval/map/1"
    assert document.keys() >= ENVELOPE | {"maps"}
    assert [entry["joint"] for entry in document["maps"]] == ["turn", "lift", "reach"]
    for entry in document["maps"]:
        keys = {"joint", "peak_to_peak_Nm", "rms_Nm", "friction_Nm", "noise_Nm", "orders", "detents_rad"}
        assert entry.keys() >= keys
        amplitudes = [order["amplitude_Nm"] for order in entry["orders"]]
        assert amplitudes == sorted(amplitudes, reverse=True)
        assert entry["orders"][0].keys() >= {"order", "amplitude_Nm", "phase_rad"}
        assert entry["orders"][0]["order"] == 84


def test_map_reads_an_arm_alone_and_holds_it_against_a_second(armeval, starter):
    arm = starter.parent / "tern" / "arm.toml"
    said = armeval("map", arm, "--second", starter)
    assert said.code == 0
    assert "correlation" in said.out


def test_predict_tells_error_and_sticking_ratio_of_every_run(armeval, starter):
    document = armeval("predict", starter, "--json").document
    assert document["schema"] == "armeval/predict/1"
    assert {run["compensated"] for run in document["runs"]} == {True, False}
    for run in document["runs"]:
        assert run.keys() >= {"name", "compensated", "tracking", "deviation", "laps", "sticking_ratio"}
        assert run["tracking"].keys() >= SUMMARY
        assert [entry["joint"] for entry in run["sticking_ratio"]] == ["turn", "lift", "reach"]
        assert run["sticking_ratio"][0].keys() >= {"joint", "max", "at_m"}
        assert run["laps"][0].keys() >= {"tracking", "deviation", "file", "duration_s", "time_offset_s"}
        assert run["laps"][0]["file"] is None


def test_measure_tells_error_of_every_run_and_lap(armeval, harbour):
    document = armeval("measure", harbour, "--json").document
    assert document["schema"] == "armeval/measure/1"
    assert [run["name"] for run in document["runs"]] == ["bare", "smoothed"]
    for run in document["runs"]:
        assert run["tracking"].keys() >= SUMMARY
        assert run["deviation"].keys() >= SUMMARY
        assert run["tracking"]["rms_low_m"] < run["tracking"]["rms_m"] < run["tracking"]["rms_high_m"]
        assert run["laps"][0]["file"].endswith("-1.parquet")
    assert "link flex" in document["warnings"][0]


def test_measure_without_any_log_says_what_to_do(armeval, starter):
    said = armeval("measure", starter)
    assert said.code == 2
    assert "logs" in said.err
    assert "mend:" in said.err


def test_locate_tells_events_and_regions(armeval, harbour):
    document = armeval("locate", harbour, "--json").document
    assert document["schema"] == "armeval/locate/1"
    assert [run["source"] for run in document["runs"]] == ["log", "log"]
    event_keys = {
        "lap", "joint", "start_s", "end_s", "start_m", "end_m", "joint_angle_rad", "motor_angle_rad", "lag_m",
        "dwell_s", "release_rad", "release_m", "cause",
    }  # fmt: skip
    region_keys = {"joint", "start_m", "end_m", "laps", "of_laps", "dwell_s", "cause"}
    assert document["runs"][0]["events"][0].keys() >= event_keys
    assert document["runs"][0]["regions"][0].keys() >= region_keys


def test_locate_without_logs_tells_where_it_will_stick(armeval, starter):
    document = armeval("locate", starter, "--json").document
    assert {run["source"] for run in document["runs"]} == {"prediction"}


def test_json_leaves_stdout_to_the_document_and_stderr_to_warnings(armeval, starter, edit):
    edit(starter.parent / "tern" / "arm.toml", 'cog_map = "maps/turn.csv"\n', "")
    said = armeval("predict", starter, "--json")
    assert said.code == 0
    assert said.document["schema"] == "armeval/predict/1"
    assert "joint turn has no cog map" in said.err


def test_out_writes_the_document_and_its_tables(armeval, starter, tmp_path):
    said = armeval("predict", starter, "--out", tmp_path / "answer")
    assert said.code == 0
    names = {file.name for file in (tmp_path / "answer").iterdir()}
    assert {"predict.json", "predicted.csv"} <= names


def test_nothing_is_written_over_somebodys_files_unasked(armeval, starter, tmp_path):
    (tmp_path / "answer").mkdir()
    (tmp_path / "answer" / "mine.txt").write_text("keep me")
    assert armeval("map", starter, "--out", tmp_path / "answer").code == 2
    assert [file.name for file in (tmp_path / "answer").iterdir()] == ["mine.txt"]
    assert armeval("map", starter, "--out", tmp_path / "answer", "--force").code == 0
    assert (tmp_path / "answer" / "mine.txt").read_text() == "keep me"


@pytest.mark.skipif(os.geteuid() == 0, reason="nothing is forbidden to the superuser")
def test_a_folder_that_may_not_be_written_is_a_plain_error(armeval, starter, tmp_path):
    (tmp_path / "locked").mkdir(mode=0o500)
    said = armeval("map", starter, "--out", tmp_path / "locked" / "answer")
    assert said.code == 2
    assert "locked" in said.err


def test_no_progress_is_drawn_where_nobody_watches(starter):
    done = subprocess.run(
        [sys.executable, "-m", "armeval", "predict", str(starter)], capture_output=True, text=True, check=True
    )
    assert done.stderr == ""


def test_a_closed_pipe_is_no_fault(starter):
    command = f'"{sys.executable}" -m armeval map "{starter}" --json | head -n 1'
    done = subprocess.run(["bash", "-o", "pipefail", "-c", command], capture_output=True, text=True, check=False)
    assert done.stdout.strip() == "{"
    assert "Traceback" not in done.stderr
