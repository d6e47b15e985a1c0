from __future__ import annotations

import sys
from collections.abc import Sequence
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from armeval.arrays import FloatArray
from armeval.errors import Findings
from armeval.files.joint_logs.log_file import read_joint_log, write_joint_log
from armeval.files.joint_logs.logs import find_logs
from armeval.model.arm import Arm
from armeval.model.joint_log import JointLog
from tests.files.findings import only_fault
from tests.files.log_text import motion

rosbag2 = pytest.importorskip("rosbags.rosbag2")
typesys = pytest.importorskip("rosbags.typesys")

STORE = typesys.get_typestore(typesys.Stores.LATEST)
JOINT_STATE = STORE.types["sensor_msgs/msg/JointState"]
HEADER = STORE.types["std_msgs/msg/Header"]
TIME = STORE.types["builtin_interfaces/msg/Time"]

Message = tuple[int, Sequence[str], Sequence[float], Sequence[float]]


def write_bag(folder: Path, messages: dict[str, list[Message]], *, storage: str = "MCAP", stamped: bool = True) -> Path:
    """Write joint states as (time [ns], names, positions, efforts) by topic; give the file in the bag."""
    with rosbag2.Writer(folder, version=9, storage_plugin=rosbag2.StoragePlugin[storage]) as writer:
        for topic, states in messages.items():
            connection = writer.add_connection(topic, JOINT_STATE.__msgtype__, typestore=STORE)
            for stamp, names, position, effort in states:
                message = JOINT_STATE(
                    header=HEADER(stamp=TIME(*(divmod(stamp, 10**9) if stamped else (0, 0))), frame_id="base"),
                    name=list(names),
                    position=np.array(position, dtype=np.float64),
                    velocity=np.empty(0),
                    effort=np.array(effort, dtype=np.float64),
                )
                writer.write(connection, stamp, STORE.serialize_cdr(message, JOINT_STATE.__msgtype__))
    return next(file for file in folder.iterdir() if file.suffix != ".yaml")


def states_of(names: Sequence[str], angle: FloatArray, effort: FloatArray | None = None) -> list[Message]:
    """Give joint states of angles, shape (k, n), a hundred a second from 5 s on."""
    return [
        (5 * 10**9 + 10**7 * i, names, row.tolist(), [] if effort is None else effort[i].tolist())
        for i, row in enumerate(angle)
    ]


def read(path: Path, arm: Arm, **options: Any) -> tuple[JointLog, list[str]]:
    heard = Findings()
    (log,) = read_joint_log(path, arm, findings=heard, **options)
    return log, [str(finding) for finding in heard.found]


@pytest.mark.parametrize("storage", ["MCAP", "SQLITE3"])
@pytest.mark.parametrize("stamped", [True, False])
def test_joint_states_are_read_by_name(tmp_path: Path, gantry: Arm, storage: str, stamped: bool) -> None:
    _, angle = motion(50)
    effort = np.random.default_rng(3).normal(size=(50, 3)) * 0.1
    order = [2, 0, 1]
    names = [gantry.joints[j] for j in order]
    messages = {"/joint_states": states_of(names, angle[:, order], effort[:, order])}
    file = write_bag(tmp_path / "bag", messages, storage=storage, stamped=stamped)
    for path in (tmp_path / "bag", file):
        log, told = read(path, gantry)
        assert np.array_equal(log.angle, angle)
        assert log.torque is not None
        assert np.array_equal(log.torque, effort)
        np.testing.assert_allclose(log.time, 5.0 + 0.01 * np.arange(50), rtol=1e-15)
        assert told == []


def test_other_names_and_units_are_told_by_columns(tmp_path: Path, gantry: Arm) -> None:
    _, angle = motion(20)
    effort = np.full((20, 3), 0.25)
    file = write_bag(tmp_path / "bag", {"/state": states_of(["q1", "q2", "q3"], angle * [1.0, 1.0, 1e3], effort)})
    names = {"q1": "turn.angle", "q2": "lift.angle [rad]", "q3": "reach.angle [mm]"}
    names |= {"q1.effort": "turn.torque", "q2.effort": "lift.torque [N*m]", "q3.effort": "reach.torque [N]"}
    log, _ = read(file, gantry, columns=names)
    np.testing.assert_allclose(log.angle, angle, rtol=1e-15)
    assert log.torque is not None
    assert (log.torque == 0.25).all()


def test_messages_of_a_gripper_are_left_out(tmp_path: Path, gantry: Arm) -> None:
    _, angle = motion(30)
    arm_states = states_of(gantry.joints, angle)
    gripper = [(stamp + 5 * 10**6, ["finger"], [0.01], [1.0]) for stamp, *_ in arm_states]
    both = sorted(arm_states + gripper, key=lambda state: state[0])
    log, told = read(write_bag(tmp_path / "bag", {"/joint_states": both}), gantry)
    assert np.array_equal(log.angle, angle)
    assert told == []


def test_the_usual_topic_is_read_among_several(tmp_path: Path, gantry: Arm) -> None:
    _, angle = motion(10)
    topics = {"/wanted": states_of(gantry.joints, 0.0 * angle), "/joint_states": states_of(gantry.joints, angle)}
    log, _ = read(write_bag(tmp_path / "bag", topics), gantry)
    assert np.array_equal(log.angle, angle)


def test_several_unusual_topics_are_told(tmp_path: Path, gantry: Arm) -> None:
    _, angle = motion(10)
    file = write_bag(tmp_path / "bag", {topic: states_of(gantry.joints, angle) for topic in ("/left", "/right")})
    fault = only_fault(lambda: read(file, gantry))
    assert "2 topics of joint states: `/left`, `/right`" in fault.what
    assert fault.file == str(file)


def test_a_message_without_one_of_the_joints_is_told(tmp_path: Path, gantry: Arm) -> None:
    _, angle = motion(10)
    states = states_of(gantry.joints, angle)
    states[6] = (states[6][0], ["turn", "reach"], [0.0, 0.0], [])
    fault = only_fault(lambda: read(write_bag(tmp_path / "bag", {"/joint_states": states}), gantry))
    assert fault.place == "message 7, column `lift`"
    assert "no finite number" in fault.what


def test_a_bag_without_joint_states_is_told(tmp_path: Path, gantry: Arm) -> None:
    file = write_bag(tmp_path / "bag", {"/joint_states": []})
    assert "no message" in only_fault(lambda: read(file, gantry)).what
    assert "no joint states" in only_fault(lambda: read(write_bag(tmp_path / "none", {}), gantry)).what


def test_joints_of_another_arm_are_told(tmp_path: Path, gantry: Arm) -> None:
    _, angle = motion(10)
    file = write_bag(tmp_path / "bag", {"/joint_states": states_of(["trun", "lift", "reach"], angle)})
    fault = only_fault(lambda: read(file, gantry))
    assert "no column `turn.angle`" in fault.what
    assert "did you mean `trun.angle`?" in fault.mend


@pytest.mark.parametrize("storage", ["MCAP", "SQLITE3"])
def test_a_damaged_bag_is_refused(tmp_path: Path, gantry: Arm, storage: str) -> None:
    file = write_bag(tmp_path / "bag", {"/joint_states": states_of(gantry.joints, motion(50)[1])}, storage=storage)
    file.write_bytes(file.read_bytes()[:700])
    assert "the bag cannot be read" in only_fault(lambda: read(file, gantry)).what


def test_a_missing_reader_says_what_to_install(tmp_path: Path, gantry: Arm, monkeypatch: pytest.MonkeyPatch) -> None:
    file = write_bag(tmp_path / "bag", {"/joint_states": states_of(gantry.joints, motion(50)[1])})
    monkeypatch.setitem(sys.modules, "rosbags.highlevel", None)
    fault = only_fault(lambda: read(file, gantry))
    assert "needs the package `rosbags`" in fault.what
    assert 'pip install "armeval[ros]"' in fault.mend


def test_text_parquet_and_bag_hold_the_same_numbers(tmp_path: Path, gantry: Arm) -> None:
    _, angle = motion(200)
    torque = np.random.default_rng(5).normal(size=(200, 3)) * 0.1
    written = JointLog(np.arange(200) / 1000.0, angle, None, torque)
    write_joint_log(written, tmp_path / "a.csv", gantry.joints, gantry.chain.prismatic)
    first, _ = read(tmp_path / "a.csv", gantry)
    write_joint_log(first, tmp_path / "b.parquet", gantry.joints, gantry.chain.prismatic)
    second, _ = read(tmp_path / "b.parquet", gantry)
    assert second.torque is not None
    messages = [
        (round(1e9 * time), gantry.joints, position.tolist(), effort.tolist())
        for time, position, effort in zip(second.time, second.angle, second.torque, strict=True)
    ]
    third, _ = read(write_bag(tmp_path / "c", {"/joint_states": messages}), gantry)
    for log in (first, second, third):
        assert np.array_equal(log.time, written.time)
        assert np.array_equal(log.angle, written.angle)
        assert np.array_equal(log.torque, torque)


def test_a_pattern_names_the_folders_of_bags(tmp_path: Path, gantry: Arm) -> None:
    states = {"/joint_states": states_of(gantry.joints, motion(10)[1])}
    for name in ("bare-2", "bare-1"):
        write_bag(tmp_path / name, states)
    (tmp_path / "bare-3").mkdir()
    found = find_logs(tmp_path, ["bare-*"], Findings(), place="")
    assert [file.name for file in found] == ["bare-1", "bare-2"]
