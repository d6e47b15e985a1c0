from __future__ import annotations

import json
import subprocess
import sys

import pytest

from armeval import __version__
from armeval.files.check import check
from tests.files.samples import ARM, TRIAL, URDF, write_sample


@pytest.fixture
def trial_file(tmp_path):
    return write_sample(tmp_path)


def told(result):
    return {finding.place: finding for finding in result.findings}


def test_sound_files_have_no_findings(trial_file):
    result = check(trial_file)
    assert result.findings == ()
    assert result.title == "Two corners"
    assert not result.has_errors
    assert check(trial_file.parent / "arm.toml").title == "pair"
    assert check(trial_file.parent / "pair.urdf").findings == ()


def test_every_file_of_a_trial_is_looked_at(trial_file):
    folder = trial_file.parent
    trial_file.write_text(TRIAL.replace('"60 mm/s"', '"60 mm"'), encoding="utf-8")
    (folder / "arm.toml").write_text(ARM.replace("slots", "slot"), encoding="utf-8")
    (folder / "logs" / "bare-1.csv").write_text("time [s]\n0\n", encoding="utf-8")
    result = check(trial_file)
    assert result.has_errors
    assert {finding.file for finding in result.findings} == {
        str(trial_file),
        str(folder / "arm.toml"),
        str(folder / "logs" / "bare-1.csv"),
    }


def test_what_a_prediction_would_miss_is_doubted(trial_file):
    arm = trial_file.parent / "arm.toml"
    text = ARM[: ARM.index("[joint.elbow]")].replace("poles = 14\n", "") + "[joint.elbow]\n"
    arm.write_text(text, encoding="utf-8")
    result = check(arm)
    assert not result.has_errors
    assert told(result).keys() == {
        "[joint.shoulder] slots",
        "[joint.elbow] stiffness",
        "[joint.elbow] coulomb_friction",
        "[joint.elbow] torque_limit",
        "[joint.elbow] encoder_counts",
    }
    assert all(finding.mend and finding.file == str(arm) for finding in result.findings)


def test_a_compensated_run_needs_the_maps_and_a_run_to_compare_with(trial_file):
    arm = trial_file.parent / "arm.toml"
    arm.write_text(ARM.replace('cog_map = "maps/elbow.csv"\n', ""), encoding="utf-8")
    trial_file.write_text(TRIAL.replace("compensated = false", "compensated = true"), encoding="utf-8")
    found = told(check(trial_file))
    assert found.keys() == {"joint `elbow`", "[[run]]"}
    assert "no cog map" in found["joint `elbow`"].what
    assert "compare" in found["[[run]]"].what


def test_a_table_too_coarse_for_the_motor_is_doubted(trial_file):
    coarse = TRIAL.replace("[[run]]", "[compensation]\ntable_bins = 168\n\n[[run]]", 1)
    trial_file.write_text(coarse, encoding="utf-8")
    (finding,) = check(trial_file).findings
    assert "order 84" in finding.what  # lcm(12 slots, 14 poles)
    trial_file.write_text(coarse.replace("168", "169"), encoding="utf-8")
    assert check(trial_file).findings == ()


def test_points_that_no_pose_reaches_are_an_error(trial_file):
    path = trial_file.parent / "path.csv"
    path.write_text("x [mm],y [mm],z [mm]\n300,0,0\n379.9,0,0\n380.1,0,0\n400,0,0\n", encoding="utf-8")
    (finding,) = check(trial_file).findings  # links of 200 and 180 mm
    assert finding.level == "error"
    assert (finding.file, finding.place) == (str(path), "point 3")
    assert "2 of 4 points" in finding.what
    assert "380 mm" in finding.mend


def test_joint_targets_beyond_the_range_are_an_error(trial_file):
    path = trial_file.parent / "path.csv"
    path.write_text("shoulder.angle [deg],elbow.angle [deg]\n0,0\n0,143\n0,144\n", encoding="utf-8")
    (finding,) = check(trial_file).findings  # 2.5 rad = 143.24 deg
    assert (finding.level, finding.place) == ("error", "point 3")
    assert "`elbow`" in finding.what


def test_a_file_that_cannot_be_read_is_a_finding_like_any_other(tmp_path):
    for name, text in (("missing.toml", None), ("empty.toml", ""), ("odd.toml", 'schema = "armeval/spoon/1"')):
        if text is not None:
            (tmp_path / name).write_text(text, encoding="utf-8")
        (finding,) = check(tmp_path / name).findings
        assert (finding.level, finding.file) == ("error", str(tmp_path / name))


def test_a_folder_is_refused_with_what_it_holds(trial_file):
    (finding,) = check(trial_file.parent).findings
    assert "directory" in finding.what
    assert "`trial.toml`" in finding.mend


def test_a_urdf_alone_is_checked(tmp_path):
    file = tmp_path / "arm.urdf"
    file.write_text(URDF.replace('child link="fore"', 'child link="for"'), encoding="utf-8")
    result = check(file)
    assert "`fore`" in told(result)["joint `elbow`"].mend


def test_the_document_is_as_designed(trial_file):
    trial_file.write_text(TRIAL.replace("compensated = false", "compensated = true"), encoding="utf-8")
    content = json.loads(check(trial_file).to_json())
    assert list(content) == ["schema", "armeval", "trial", "warnings", "findings"]
    assert content["schema"] == "armeval/check/1"
    assert content["armeval"] == __version__
    assert content["trial"] == "Two corners"
    (finding,) = content["findings"]
    assert list(finding) == ["level", "file", "place", "what", "mend"]
    assert finding["level"] == "warning"
    assert finding["what"] in content["warnings"][0]


def test_the_table_has_the_same_rows(trial_file):
    assert list(check(trial_file).to_frame().columns) == ["level", "file", "place", "what", "mend"]
    trial_file.write_text(TRIAL.replace('"60 mm/s"', "60"), encoding="utf-8")
    frame = check(trial_file).to_frame()
    assert frame["place"].tolist() == ["feed"]


def test_checking_a_trial_loads_neither_figures_nor_compiler(trial_file):
    script = (
        "import sys; from armeval.files.check import check; result = check(sys.argv[1]); assert not result.findings;"
        "print([name for name in ('matplotlib', 'numba', 'llvmlite') if name in sys.modules])"
    )
    run = subprocess.run([sys.executable, "-c", script, trial_file], capture_output=True, text=True, check=True)
    assert (run.stdout.strip(), run.stderr) == ("[]", "")
