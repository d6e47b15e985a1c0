from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest

from armeval.errors import Findings, InputError, InputWarning
from armeval.files.path_file import read_path, write_path
from armeval.model.planned_path import PlannedPath
from tests.files.findings import faults, only_fault

JOINTS = ("turn", "reach")
SLIDES = (False, True)


def read(file: Path, text: str, findings: Findings | None = None) -> PlannedPath:
    file.write_text(text)
    return read_path(file, JOINTS, SLIDES, findings=findings)


def test_tip_points_are_metres(tmp_path: Path) -> None:
    path = read(tmp_path / "p.csv", "z [cm],x [mm],y [m]\n1,250,0.5\n2,300,0.25\n")
    assert path.space == "tip"
    assert path.time is None
    np.testing.assert_allclose(path.points, [[0.25, 0.5, 0.01], [0.3, 0.25, 0.02]], rtol=1e-15)
    assert path.source == str(tmp_path / "p.csv")


def test_joint_targets_are_radians_where_joints_turn_and_metres_where_they_slide(tmp_path: Path) -> None:
    path = read(tmp_path / "p.csv", "reach.angle [mm];turn.angle [turn];time [ms]\n100;0,25;0\n150;0,5;20\n")
    assert path.space == "joint"
    np.testing.assert_allclose(path.points, [[np.pi / 2.0, 0.1], [np.pi, 0.15]], rtol=1e-15)
    assert path.time is not None
    np.testing.assert_allclose(path.time, [0.0, 0.02])


def test_a_planar_arm_needs_z_too(tmp_path: Path) -> None:
    fault = only_fault(lambda: read(tmp_path / "p.csv", "x [mm],y [mm]\n0,1\n1,2\n"))
    assert fault.what == "there is no column `z`"
    assert "add `z [mm]`" in fault.mend
    assert fault.place == "header"


@pytest.mark.parametrize(
    ("text", "what", "mend", "place"),
    [
        ("a [mm],b [mm]\n0,1\n1,2\n", "neither tip points nor joint targets", "`x [mm], y [mm], z [mm]`", "header"),
        ("x [mm],turn.angle [deg]\n0,1\n1,2\n", "both tip points and joint targets", "keep one kind", "header"),
        ("x [mm],y [mm],z [mm],x [m]\n0,1,2,3\n1,2,3,4\n", "2 columns are called `x`", "keep one", "header"),
        ("x [mm],y [mm],z\n0,1,2\n1,2,3\n", "it has no unit", "`z [m]`", "column `z`"),
        ("x [mm],y [mm],z [deg]\n0,1,2\n1,2,3\n", "`deg` does not measure", "`m`", "column `z [deg]`"),
        ("x [mm],y [mm],z [mmm]\n0,1,2\n1,2,3\n", "`mmm` is not a unit", "write a unit", "column `z [mmm]`"),
        (
            "turn.angle [deg],reach.angle [deg]\n0,1\n1,2\n",
            "`deg` does not measure",
            "`m`",
            "column `reach.angle [deg]`",
        ),
        (
            "turn.angle [deg],raech.angle [mm]\n0,1\n1,2\n",
            "no column `reach.angle`",
            "did you mean `raech.angle`?",
            "header",
        ),
        ("x [mm],y [mm],z [mm]\n0,1,left\n1,2,3\n", "`left` is not a number", "", "row 2, column `z [mm]`"),
        ("x [mm],y [mm],z [mm]\n0,1,2\n", "the path has 1 point", "two points", ""),
        ("x [mm],y [mm],z [mm]\n0,1,2\n0,1,2\n", "all points of the path are the same", "moves", ""),
        ("x [mm],y [mm],z [mm]\n", "a header and no row", "add rows", ""),
    ],
)
def test_a_faulty_path_says_what_is_wrong_and_where(
    tmp_path: Path, text: str, what: str, mend: str, place: str
) -> None:
    fault = only_fault(lambda: read(tmp_path / "p.csv", text))
    assert what in fault.what
    assert mend in fault.mend
    assert fault.place == place
    assert fault.file == str(tmp_path / "p.csv")


def test_time_that_stands_still_or_runs_back_is_told_by_row(tmp_path: Path) -> None:
    text = "# timed\ntime [s],x [mm],y [mm],z [mm]\n0,0,0,0\n1,1,0,0\n1,2,0,0\n0.5,3,0,0\n2,4,0,0\n"
    found = faults(lambda: read(tmp_path / "p.csv", text))
    assert [(fault.place, fault.what) for fault in found] == [
        ("row 5", "time stands still"),
        ("row 6", "time runs back by 500 ms"),
    ]


def test_all_faults_of_a_header_are_told_at_once(tmp_path: Path) -> None:
    found = faults(lambda: read(tmp_path / "p.csv", "time,x,y [kg]\n0,1,2\n1,2,3\n"))
    assert {fault.place for fault in found} == {"header", "column `x`", "column `y [kg]`", "column `time`"}


def test_a_column_that_nobody_reads_is_a_warning(tmp_path: Path) -> None:
    text = "tme [s],x [mm],y [mm],z [mm]\n0,0,0,0\n1,1,0,0\n"
    heard = Findings()
    assert read(tmp_path / "p.csv", text, heard).time is None
    assert [(finding.level, finding.place) for finding in heard.found] == [("warning", "column `tme [s]`")]
    assert "did you mean `time`?" in heard.found[0].mend
    with pytest.warns(InputWarning, match="tme") as caught:
        read(tmp_path / "p.csv", text)
    assert caught[0].filename == __file__


@pytest.mark.parametrize("name", ["p.csv", "p.csv.gz", "p.v2.csv"])
@pytest.mark.parametrize("timed", [False, True])
def test_what_is_written_reads_the_same_to_the_last_bit(tmp_path: Path, name: str, timed: bool) -> None:
    random = np.random.default_rng(4)
    points = random.normal(size=(500, 2)) * 10.0 ** random.integers(-12, 6, (500, 2))
    time = np.cumsum(random.random(500) + 1e-3) if timed else None
    written = PlannedPath(points, "joint", time)
    write_path(written, tmp_path / name, JOINTS, SLIDES)
    back = read_path(tmp_path / name, JOINTS, SLIDES)
    assert np.array_equal(back.points, points)
    assert back.time is None if time is None else np.array_equal(back.time, time)
    tip = PlannedPath(random.normal(size=(7, 3)), "tip", None if time is None else time[:7])
    write_path(tip, tmp_path / name)
    assert np.array_equal(read_path(tmp_path / name, JOINTS, SLIDES).points, tip.points)


def test_nothing_half_written_is_left(tmp_path: Path) -> None:
    path = PlannedPath(np.eye(3), "tip")
    with pytest.raises(InputError, match="cannot be written"):
        write_path(path, tmp_path / "nowhere" / "p.csv")
    (tmp_path / "taken.csv").mkdir()
    with pytest.raises(InputError, match="cannot be written"):
        write_path(path, tmp_path / "taken.csv")
    assert [entry.name for entry in tmp_path.iterdir()] == ["taken.csv"]


def test_joints_must_match_the_path(tmp_path: Path) -> None:
    with pytest.raises(InputError, match="1 joints for a path of 2"):
        write_path(PlannedPath(np.eye(2), "joint"), tmp_path / "p.csv", ["turn"])
