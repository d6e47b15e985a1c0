from __future__ import annotations

import warnings
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest

from armeval.arrays import FloatArray
from armeval.errors import Findings, InputError, InputWarning
from armeval.files.joint_logs.log_file import read_joint_log, write_joint_log
from armeval.model.arm import Arm
from armeval.model.joint_log import JointLog
from tests.files.findings import faults, only_fault
from tests.files.log_text import HEADER, log_lines, log_text, motion, rows_of

TURN = 2.0 * np.pi


def read(file: Path, arm: Arm, text: str, **options: object) -> tuple[tuple[JointLog, ...], list[str]]:
    """Read a log; give its laps and its warnings."""
    file.write_text(text)
    heard = Findings()
    laps = read_joint_log(file, arm, findings=heard, **options)  # type: ignore[arg-type]
    return laps, [str(finding).removeprefix(f"{file}: ").removeprefix(f"{file}, ") for finding in heard.found]


def test_a_log_is_read_in_si(tmp_path: Path, gantry: Arm) -> None:
    (log,), told = read(tmp_path / "l.csv", gantry, log_text(50))
    time, angle = motion(50)
    np.testing.assert_allclose(log.time, time, rtol=1e-15)
    np.testing.assert_allclose(log.angle, angle, rtol=1e-14)
    assert log.target is None
    assert log.torque is None
    assert log.lap == 1
    assert log.source == str(tmp_path / "l.csv")
    assert told == []


def test_counts_are_of_what_the_encoder_sits_on(tmp_path: Path, gantry: Arm) -> None:
    text = "time [s],turn.angle [count],lift.angle [counts],reach.angle [count]\n0,0,0,0\n1,16384,-4096,2000\n"
    (log,), _ = read(tmp_path / "l.csv", gantry, text)
    # Direct drive; six motor turns a joint turn, reversed; 20000 counts a metre.
    np.testing.assert_allclose(log.angle[1], [TURN, TURN / 6.0, 0.1], rtol=1e-15)
    np.testing.assert_allclose(log.resolution, [TURN / 16384, TURN / 6.0 / 4096, 1.0 / 20000], rtol=1e-15)


def test_currents_are_motor_torques_before_the_gear(tmp_path: Path, gantry: Arm) -> None:
    header = f"{HEADER},turn.current [mA],lift.current [A],reach.torque [N]"
    (log,), _ = read(tmp_path / "l.csv", gantry, f"{header}\n0,0,0,0,100,1,2\n1,1,1,1,200,2,4\n")
    assert log.torque is not None
    np.testing.assert_allclose(log.torque, [[0.003, -0.18, 2.0], [0.006, -0.36, 4.0]], rtol=1e-12)


def test_targets_are_read_in_their_own_units(tmp_path: Path, gantry: Arm) -> None:
    header = f"{HEADER},turn.target [deg],lift.target [count],reach.target [m]"
    (log,), _ = read(tmp_path / "l.csv", gantry, f"{header}\n0,0,0,0,90,0,0.5\n1,1,1,1,180,-4096,0.25\n")
    assert log.target is not None
    np.testing.assert_allclose(log.target, [[TURN / 4, 0.0, 0.5], [TURN / 2, TURN / 6, 0.25]], rtol=1e-15)


def test_foreign_headers_are_renamed(tmp_path: Path, gantry: Arm) -> None:
    lines = log_lines(30)
    time, angle = motion(30)
    lines[0] = "stamp, m1_pos, m2_pos [deg], z"
    names = {"stamp": "time [s]", "m1_pos": "turn.angle [rad]", "m2_pos": "lift.angle", "z": "reach.angle [mm]"}
    (log,), told = read(tmp_path / "l.csv", gantry, "\n".join(lines), columns=names)
    np.testing.assert_allclose(log.angle, angle, rtol=1e-14)
    np.testing.assert_allclose(log.time, time, rtol=1e-15)
    assert told == []


@pytest.mark.parametrize(
    "names",
    [
        ("t", "pos[0]", "pos[1]", "pos[2]"),
        ("t [s]", "arm.q[0] [rad]", "arm.q[1].raw", "arm.q[2"),
        ("t", "q", "q [deg]", "q {z}"),
        ("Zeit", "Größe 1", "Größe 2", "長さ"),
    ],
)
def test_foreign_headers_may_be_written_in_any_way(tmp_path: Path, gantry: Arm, names: tuple[str, ...]) -> None:
    lines = log_lines(30)
    lines[0] = ",".join(names)
    meaning = ("time [s]", "turn.angle [rad]", "lift.angle [deg]", "reach.angle [mm]")
    (log,), _ = read(tmp_path / "l.csv", gantry, "\n".join(lines), columns=dict(zip(names, meaning, strict=True)))
    np.testing.assert_allclose(log.angle, motion(30)[1], rtol=1e-14)


def test_a_foreign_name_that_is_not_there_names_the_near_one(tmp_path: Path, gantry: Arm) -> None:
    fault = faults(lambda: read(tmp_path / "l.csv", gantry, log_text(), columns={"turn.angel": "turn.angle [rad]"}))[0]
    assert fault.what == "there is no column `turn.angel`"
    assert "did you mean `turn.angle [rad]`?" in fault.mend
    assert fault.place == "[columns]"


def test_laps_are_parted_by_number_and_counted_on(tmp_path: Path, gantry: Arm) -> None:
    lines = log_lines(60)
    numbers = [7] * 20 + [8] * 25 + [12] * 15
    text = "\n".join([f"{lines[0]},lap", *(f"{line},{n}" for line, n in zip(lines[1:], numbers, strict=True))])
    laps, _ = read(tmp_path / "l.csv", gantry, text, first_lap=4)
    _, angle = motion(60)
    assert [log.lap for log in laps] == [4, 5, 6]
    assert [len(log.time) for log in laps] == [20, 25, 15]
    np.testing.assert_allclose(np.concatenate([log.angle for log in laps]), angle, rtol=1e-14)


def test_every_lap_may_have_its_own_clock(tmp_path: Path, gantry: Arm) -> None:
    lines = log_lines(20)
    text = "\n".join([f"{lines[0]},lap", *(f"{line},{lap}" for lap in (0, 1) for line in lines[1:])])
    laps, told = read(tmp_path / "l.csv", gantry, text)
    assert np.array_equal(laps[0].time, laps[1].time)
    assert told == []


def test_the_jitter_of_the_clock_is_kept(tmp_path: Path, gantry: Arm) -> None:
    _, angle = motion(200)
    time = np.cumsum(np.random.default_rng(1).uniform(0.002, 0.0066, 200))
    text = "\n".join([HEADER, *rows_of(time, angle[:, 0], np.degrees(angle[:, 1]), 1e3 * angle[:, 2])])
    (log,), told = read(tmp_path / "l.csv", gantry, text)
    assert np.array_equal(log.time, time)
    assert told == []


def test_samples_that_came_twice_are_removed_and_counted(tmp_path: Path, gantry: Arm) -> None:
    lines = log_lines(60)
    text = "\n".join([*lines[:31], lines[30], lines[30], *lines[31:41], lines[40], *lines[41:]])
    (log,), told = read(tmp_path / "l.csv", gantry, text)
    assert np.array_equal(log.time, motion(60)[0])
    assert told == ["from row 32: 3 samples came twice: removed"]


def test_samples_that_came_late_are_put_in_their_place(tmp_path: Path, gantry: Arm) -> None:
    lines = log_lines(60)
    text = "\n".join([*lines[:31], *lines[32:34], lines[31], *lines[34:]])
    (log,), told = read(tmp_path / "l.csv", gantry, text)
    np.testing.assert_allclose(log.angle, motion(60)[1], rtol=1e-14)
    assert told == ["from row 34: 1 sample came late, by up to 20.0 ms: put in their place"]


def test_of_samples_with_the_same_time_the_first_is_kept(tmp_path: Path, gantry: Arm) -> None:
    lines = log_lines(60)
    text = "\n".join([*lines[:31], f"{lines[30].split(',')[0]},9,9,9", *lines[31:]])
    (log,), told = read(tmp_path / "l.csv", gantry, text)
    np.testing.assert_allclose(log.angle, motion(60)[1], rtol=1e-14)
    assert told == ["from row 32: 1 sample had the time of the one before: the first of each is kept"]


def test_a_clock_that_starts_anew_is_no_late_sample(tmp_path: Path, gantry: Arm) -> None:
    lines = log_lines(40)
    fault = only_fault(lambda: read(tmp_path / "l.csv", gantry, "\n".join([*lines, *lines[1:]])))
    assert fault.place == "row 42"
    assert fault.what == "time runs back by 390 ms"
    assert "`lap` column" in fault.mend


def test_one_sample_from_another_age_is_no_late_sample(tmp_path: Path, gantry: Arm) -> None:
    lines = log_lines(60)
    lines[30] = ",".join(["-1000", *lines[30].split(",")[1:]])
    fault = only_fault(lambda: read(tmp_path / "l.csv", gantry, "\n".join(lines)))
    assert fault.place == "row 31"
    assert "time runs back by 1000 s" in fault.what


def test_gaps_are_told_and_part_the_log(tmp_path: Path, gantry: Arm) -> None:
    lines = log_lines(200)
    (log,), told = read(tmp_path / "l.csv", gantry, "\n".join([*lines[:51], *lines[82:121], *lines[141:]]))
    assert told == [
        "2 gaps of 530 ms in all, about 51 samples, the first at 490 ms: left out "
        "(log without losing samples to have the whole lap measured)"
    ]
    assert log.segments == (slice(0, 50), slice(50, 89), slice(89, 149))
    assert all(np.diff(log.time[segment]).max() < 0.011 for segment in log.segments)


@pytest.mark.parametrize("bits", [16, 24, 32])
@pytest.mark.parametrize("signed", [False, True])
def test_counters_that_roll_over_are_carried_on(tmp_path: Path, gantry: Arm, bits: int, signed: bool) -> None:
    counts = np.rint(3000.0 * np.sin(np.linspace(0.0, 7.0, 400))).astype(np.int64)
    edge = 2 ** (bits - 1) if signed else 0
    rolled = (counts + 2 * edge) % 2**bits - edge
    header = "time [s],turn.angle [count],lift.angle [deg],reach.angle [mm]"
    text = "\n".join([header, *rows_of(0.001 * np.arange(400), rolled, 0.0 * rolled, 0.0 * rolled)])
    (log,), told = read(tmp_path / "l.csv", gantry, text)
    moved = np.rint(log.angle[:, 0] / (TURN / 16384))
    assert np.array_equal(np.diff(moved), np.diff(counts))
    assert f"the {bits}-bit counter of the turn angle rolled over" in told[0]
    if signed:  # the motion goes on about half the counter's range: far from where the joint can be
        assert "joint turn reads" in told[1]
    else:  # the joint's range says which of the counter's ranges is meant
        assert np.array_equal(moved, counts)
        assert len(told) == 1


def test_a_clock_that_rolls_over_is_carried_on(tmp_path: Path, gantry: Arm) -> None:
    _, angle = motion(100)
    ticks = (2**32 - 50_000 + 1000 * np.arange(100)) % 2**32
    text = "\n".join([HEADER.replace("[s]", "[us]"), *rows_of(ticks, angle[:, 0], angle[:, 1], angle[:, 2])])
    (log,), told = read(tmp_path / "l.csv", gantry, text)
    np.testing.assert_allclose(np.diff(log.time), 1e-3, rtol=1e-6)
    assert told == ["the clock's 32-bit counter rolled over once: carried on"]


def test_an_angle_that_wraps_at_half_a_turn_is_carried_on_to_its_target(tmp_path: Path, gantry: Arm) -> None:
    time, angle = motion(300)
    turn = np.linspace(-10.0, -8.0, 300)
    wrapped = (turn + np.pi) % TURN - np.pi
    header = f"{HEADER},turn.target [rad],lift.target [deg],reach.target [mm]"
    lift, reach = np.degrees(angle[:, 1]), 1e3 * angle[:, 2]
    (log,), told = read(
        tmp_path / "l.csv", gantry, "\n".join([header, *rows_of(time, wrapped, lift, reach, turn, lift, reach)])
    )
    np.testing.assert_allclose(log.angle[:, 0], turn, rtol=1e-12)
    assert told == ["the one-turn reading of the turn angle rolled over once: carried on"]


def test_counters_are_carried_on_over_the_laps_of_a_file(tmp_path: Path, gantry: Arm) -> None:
    counts = 40 * np.arange(-200, 200)
    header = "time [s],turn.angle [count],lift.angle [deg],reach.angle [mm],lap"
    columns = (0.001 * np.arange(400), counts % 2**16, 0.0 * counts, 0.0 * counts, np.repeat([1.0, 2.0], 200))
    laps, _ = read(tmp_path / "l.csv", gantry, "\n".join([header, *rows_of(*columns)]))
    angle = np.concatenate([log.angle[:, 0] for log in laps])
    np.testing.assert_allclose(angle, counts * TURN / 16384, atol=1e-9)


def test_a_jump_that_is_no_rollover_stays_and_is_doubted(tmp_path: Path, gantry: Arm) -> None:
    counts = np.where(np.arange(100) < 50, 0.0, 40_000.0)
    header = "time [s],turn.angle [count],lift.angle [deg],reach.angle [mm]"
    (log,), told = read(
        tmp_path / "l.csv",
        gantry,
        "\n".join([header, *rows_of(0.001 * np.arange(100), counts, counts * 0, counts * 0)]),
    )
    np.testing.assert_allclose(np.ptp(log.angle[:, 0]), 40_000 * TURN / 16384)
    assert "the turn angle jumps by 879 deg from one sample to the next at 50.0 ms: counter" in told[0]


def test_a_new_start_of_the_next_lap_is_no_jump(tmp_path: Path, gantry: Arm) -> None:
    rows = [f"{0.001 * i!r},{10 * i + 40_000 * lap},0,0,{lap}" for lap in (1, 2) for i in range(100)]
    header = "time [s],turn.angle [count],lift.angle [deg],reach.angle [mm],lap"
    _, told = read(tmp_path / "l.csv", gantry, "\n".join([header, *rows]))
    assert not any("jumps" in each for each in told)


def with_targets(change: FloatArray, shift: FloatArray) -> str:
    """Give a log with targets, whose angles are the targets times ``change`` plus ``shift``, both shape (3,)."""
    time, target = motion(300)
    middle = target.mean(axis=0)
    angle = (target - middle) * change + middle + shift
    header = ",".join(
        ["time [s]", *(f"{joint}.{what}" for what in ("angle", "target") for joint in ("turn", "lift", "reach"))]
    )
    for joint, unit in (("turn", "rad"), ("lift", "rad"), ("reach", "m")):
        header = header.replace(f"{joint}.angle", f"{joint}.angle [{unit}]").replace(
            f"{joint}.target", f"{joint}.target [{unit}]"
        )
    return "\n".join([header, *rows_of(time, *angle.T, *target.T)])


@pytest.mark.parametrize(
    ("change", "shift", "what"),
    [
        ([1, -1, 1], [0, 0, 0], "the lift angle runs opposite to its target: sign?"),
        ([1, 1, -1], [0, 0, 0], "the reach position runs opposite to its target: sign?"),
        ([1, 1, 1], [np.pi / 2, 0, 0], "joint turn is off by a constant 90.0 deg: index?"),
        ([1, 1, 1], [0, 0, -0.02], "joint reach is off by a constant -20.0 mm: index?"),
        ([1, 6, 1], [0, 0, 0], "joint lift moves 6.00 times as far as its target: unit, `encoder_counts`, gear?"),
    ],
)
def test_angles_that_contradict_their_targets_are_doubted(
    tmp_path: Path, gantry: Arm, change: list[float], shift: list[float], what: str
) -> None:
    _, told = read(tmp_path / "l.csv", gantry, with_targets(np.array(change), np.array(shift)))
    assert len(told) == 1
    assert what in told[0]


def test_a_servo_that_only_lags_and_sags_is_not_doubted(tmp_path: Path, gantry: Arm) -> None:
    _, told = read(tmp_path / "l.csv", gantry, with_targets(np.array([0.9, 0.8, 1.1]), np.array([0.03, -0.02, 0.002])))
    assert told == []


def test_angles_beyond_the_range_are_doubted_where_there_is_no_target(tmp_path: Path, gantry: Arm) -> None:
    _, told = read(tmp_path / "l.csv", gantry, log_text().replace("[deg]", "[rad]"))
    assert len(told) == 1
    assert "joint lift reads" in told[0]
    assert "its range is -85.9 deg to 85.9 deg: index, sign or unit?" in told[0]


def with_torque(torque: FloatArray) -> str:
    time, angle = motion(len(torque))
    header = f"{HEADER},turn.torque [N*m],lift.torque [mN*m],reach.torque [N]"
    return "\n".join([header, *rows_of(time, *angle.T, torque, 0.0 * torque, 0.0 * torque)])


def test_saturated_torque_is_flagged_with_its_share(tmp_path: Path, gantry: Arm) -> None:
    _, told = read(tmp_path / "l.csv", gantry, with_torque(np.clip(np.linspace(-0.25, 0.55, 200), -0.5, 0.5)))
    assert told[0].startswith("the turn torque is at its limit in 6.50 % of the samples")


def test_torque_beyond_its_limit_is_doubted(tmp_path: Path, gantry: Arm) -> None:
    _, told = read(tmp_path / "l.csv", gantry, with_torque(np.linspace(-300.0, 400.0, 200)))
    assert told[0].startswith("the turn torque reaches 800 times its limit: unit, or `torque_limit`?")


@pytest.mark.parametrize("quantity", ["target", "torque", "current"])
def test_what_only_some_joints_have_is_told_and_not_read(tmp_path: Path, gantry: Arm, quantity: str) -> None:
    unit = {"target": "rad", "torque": "N*m", "current": "A"}[quantity]
    (log,), told = read(tmp_path / "l.csv", gantry, f"{HEADER},turn.{quantity} [{unit}]\n0,0,0,0,0\n1,1,1,1,1\n")
    assert log.target is None
    assert log.torque is None
    assert "of joint `lift`, `reach` is not logged" in told[0]


def test_a_current_without_torque_constant_is_told_and_not_read(tmp_path: Path, gantry: Arm) -> None:
    header = f"{HEADER},turn.current [A],lift.current [A],reach.current [A]"
    (log,), told = read(tmp_path / "l.csv", gantry, f"{header}\n0,0,0,0,0,0,0\n1,1,1,1,1,1,1\n")
    assert log.torque is None
    assert len(told) == 1
    assert "give `torque_constant` in [joint.reach]" in told[0]


def test_columns_of_joints_that_the_arm_lacks_are_told(tmp_path: Path, gantry: Arm) -> None:
    _, told = read(tmp_path / "l.csv", gantry, f"{HEADER},lfit.torque [N*m],mode\n0,0,0,0,0,run\n1,1,1,1,1,run\n")
    assert len(told) == 1
    assert "the arm has no joint `lfit` (did you mean `lift`?" in told[0]


def test_warnings_are_pythons_own_where_nobody_listens(tmp_path: Path, gantry: Arm) -> None:
    lines = log_lines(60)
    (tmp_path / "l.csv").write_text("\n".join([*lines[:31], lines[30], *lines[31:]]))
    with pytest.warns(InputWarning, match="1 sample came twice") as caught:
        read_joint_log(tmp_path / "l.csv", gantry)
    assert caught[0].filename == __file__


def sample_logs() -> tuple[JointLog, JointLog]:
    random = np.random.default_rng(8)
    time = np.cumsum(random.random((2, 400)) + 1e-4, axis=1)
    angle, target, torque = random.normal(size=(3, 2, 400, 3)) * 10.0 ** random.integers(-9, 0, (3, 2, 400, 3))
    return tuple(  # type: ignore[return-value]
        JointLog(time[i], angle[i], target[i], torque[i], lap=i + 1, source="made up") for i in range(2)
    )


@pytest.mark.parametrize("name", ["l.csv", "l.csv.gz", "l.parquet"])
@pytest.mark.parametrize("count", [1, 2])
def test_what_is_written_reads_the_same_to_the_last_bit(tmp_path: Path, gantry: Arm, name: str, count: int) -> None:
    logs = sample_logs()[:count]
    write_joint_log(logs if count > 1 else logs[0], tmp_path / name, gantry.joints, gantry.chain.prismatic)
    heard = Findings()
    back = read_joint_log(tmp_path / name, gantry, findings=heard)
    assert len(back) == count
    for one, other in zip(logs, back, strict=True):
        for quantity in ("time", "angle", "target", "torque"):
            assert np.array_equal(getattr(one, quantity), getattr(other, quantity)), quantity
        assert one.lap == other.lap


def test_what_is_not_in_every_lap_is_not_written(tmp_path: Path, gantry: Arm) -> None:
    first, second = sample_logs()
    write_joint_log((first, replace(second, torque=None)), tmp_path / "l.csv", gantry.joints, gantry.chain.prismatic)
    with warnings.catch_warnings():
        warnings.simplefilter("ignore", InputWarning)
        assert all(log.torque is None for log in read_joint_log(tmp_path / "l.csv", gantry))


def test_joints_must_match_the_log(tmp_path: Path) -> None:
    with pytest.raises(InputError, match="joints do not match"):
        write_joint_log(sample_logs(), tmp_path / "l.csv", ("turn",))


def test_long_arrays_are_not_copied_on_the_way(tmp_path: Path, gantry: Arm) -> None:
    (log,), _ = read(tmp_path / "l.csv", gantry, log_text())
    again = replace(log, lap=2)
    assert np.shares_memory(log.angle, again.angle)
    with pytest.raises(ValueError, match="read-only"):
        log.angle[0, 0] = 1.0
