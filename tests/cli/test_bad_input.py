"""Bad input is told in words a person can act on: file, place, what is wrong, how to mend it. Never a traceback."""

import pytest

COMMANDS = ("check", "predict", "measure", "locate", "report", "map")


def told(said, *pieces):
    """The command refused, in plain words that hold all the pieces."""
    text = " ".join((said.out + said.err).split())
    assert said.code == 2, text
    assert "Traceback" not in text
    for piece in pieces:
        assert piece in text, text
    return True


@pytest.mark.parametrize("command", COMMANDS)
def test_a_missing_file_is_told_by_every_command(armeval, starter, command):
    assert told(armeval(command, starter.parent / "trail.toml"), "trail.toml", "did you mean `trial.toml`?")


@pytest.mark.parametrize("command", COMMANDS)
def test_a_folder_is_no_file(armeval, starter, command):
    assert told(armeval(command, starter.parent), "director")


@pytest.mark.parametrize("command", COMMANDS)
def test_what_is_not_utf_8_is_told(armeval, starter, command):
    starter.write_bytes(b'schema = "armeval/trial/1"\ntitle = "Gr\xfcn"\n')
    assert told(armeval(command, starter), "UTF-8", "trial.toml")


@pytest.mark.parametrize("command", COMMANDS)
def test_an_empty_file_is_told(armeval, starter, command):
    starter.write_text("")
    assert told(armeval(command, starter), "trial.toml", "empty")


def test_wrong_and_missing_units_unknown_keys_and_wrong_joints_are_told_all_at_once(armeval, starter, edit):
    arm = starter.parent / "tern" / "arm.toml"
    edit(arm, 'rate = "1 kHz"', 'rate = "1 kHz"\nspeed_fliter = "40 Hz"')
    edit(arm, "[joint.lift]", "[joint.lit]")
    edit(starter, 'feed = "60 mm/s"', "feed = 60")
    edit(starter, 'acceleration = "1 m/s^2"', 'acceleration = "1 m"')
    assert told(
        armeval("check", starter),
        "feed",
        "has no unit",
        "acceleration",
        "does not measure",
        "speed_filter",
        "`lit`",
        "lift",
    )


@pytest.mark.parametrize(
    ("old", "new", "said"),
    [
        (
            'gear_ratio = 1\nstiffness = "1.5 N*m/rad"\ndamping',
            'gear_ratio = 0\nstiffness = "1.5 N*m/rad"\ndamping',
            "gear",
        ),
        ('torque_limit = "0.25 N*m"', 'torque_limit = "-0.25 N*m"', "torque_limit"),
        ('static_friction = "6.5 mN*m"', 'static_friction = "1 mN*m"', "static"),
        ("encoder_counts = 16384", 'encoder_counts = "many"', "encoder_counts"),
        ('tip = "stylus_tip"', 'tip = "stylus_top"', "stylus_tip"),
        ('urdf = "tern.urdf"', 'urdf = "turn.urdf"', "tern.urdf"),
    ],
)
def test_a_faulty_arm_is_told(armeval, starter, edit, old, new, said):
    arm = starter.parent / "tern" / "arm.toml"
    edit(arm, old, new)
    assert told(armeval("predict", starter), "tern", said)


def test_a_urdf_with_undefined_links_is_told(armeval, starter, edit):
    urdf = next((starter.parent / "tern").glob("*.urdf"))
    edit(urdf, '<child link="stylus_tip"', '<child link="stylus_tap"')
    assert told(armeval("check", starter), urdf.name, "stylus_tap")


@pytest.mark.parametrize(
    ("text", "pieces"),
    [
        ("", ("empty",)),
        ("x [mm], y [mm], z [mm]\n", ("row",)),
        ("x [mm], y [mm], z [mm]\n200, 0, 20\n", ("point",)),
        ("x [mm], y [mm]\n200, 0\n210, 0\n", ("`z`",)),
        ("x, y, z\n200, 0, 20\n210, 0, 20\n", ("unit",)),
        ("x [mm], y [mm], z [mm]\n200, 0, 20\nnan, 0, 20\n210, zero, 20\n", ("row 3", "row 4", "`x", "`y")),
        ("x [mm], y [mm], z [mm]\n200, 0\n210, 0, 20\n", ("row 2",)),
        ("time [s], x [mm], y [mm], z [mm]\n0, 200, 0, 20\n1, 210, 0, 20\n1, 220, 0, 20\n", ("row 4", "time")),
        ("time [s], x [mm], y [mm], z [mm]\n0, 200, 0, 20\n2, 210, 0, 20\n1, 220, 0, 20\n", ("row 4", "time")),
        ("turn.angle [deg], lfit.angle [deg], reach.angle [deg]\n0, 30, -90\n5, 30, -90\n", ("lift",)),
    ],
)
def test_a_faulty_path_is_told(armeval, starter, text, pieces):
    path = starter.parent / "path.csv"
    path.write_text(text)
    assert told(armeval("check", starter), "path.csv", *pieces)


def test_a_path_out_of_reach_is_told_with_where_and_by_how_much(armeval, starter):
    (starter.parent / "path.csv").write_text("x [mm], y [mm], z [mm]\n200, 0, 40\n900, 0, 40\n")
    assert told(armeval("predict", starter), "path.csv", "reach", "mm")


def test_a_map_of_half_a_turn_is_told(armeval, starter):
    rows = "\n".join(f"{k * 0.25}, 0.01, 1" for k in range(720))
    (starter.parent / "tern" / "maps" / "turn.csv").write_text(f"angle [deg], cog_torque [N*m], direction\n{rows}\n")
    assert told(armeval("check", starter), "turn.csv", "half a turn")


LOG_HEAD = "time [s], turn.angle [deg], lift.angle [deg], reach.angle [deg]"


@pytest.mark.parametrize(
    ("text", "pieces"),
    [
        ("", ("empty",)),
        (f"{LOG_HEAD}\n0, 0, 30, -90\n", ("row",)),
        (f"{LOG_HEAD}\n0, 0, 30, -90\n0.002, 0, x, -90\n0.004, inf, 30, -90\n", ("row 3", "lift", "row 4", "turn")),
        (f"{LOG_HEAD}\n" + "".join(f"0, 0, {30 + k}, -90\n" for k in range(50)), ("time",)),
        (f"{LOG_HEAD}\n" + "".join(f"{0.002 * k}, 0, 30, -90\n" for k in range(50)), ("28.65 s", "missing")),
        ("time [s], turn.angle [deg], lift.angle [deg]\n0, 0, 30\n1, 0, 30\n", ("reach",)),
        ("time [s], turn.angle [deg], lift.angle [deg], raech.angle [deg]\n0, 0, 30, 1\n1, 0, 30, 1\n", ("reach",)),
        ("time, turn.angle [deg], lift.angle [deg], reach.angle [deg]\n0, 0, 30, 1\n1, 0, 30, 1\n", ("unit",)),
    ],
)
def test_a_faulty_log_is_told(armeval, harbour, edit, text, pieces):
    log = harbour.parent / "logs" / "mine.csv"
    log.write_text(text)
    edit(harbour, 'logs = "logs/bare-*.parquet"', 'logs = "logs/mine.csv"')
    assert told(armeval("measure", harbour), "mine.csv", *pieces)


def test_logs_that_are_not_there_are_told_with_what_is(armeval, harbour, edit):
    edit(harbour, "logs/bare-*.parquet", "logs/bear-*.parquet")
    assert told(armeval("measure", harbour), "bear-", "bare-1.parquet")


def test_nothing_is_left_behind_by_a_report_that_fails(armeval, harbour, edit, tmp_path):
    edit(harbour, 'feed = "60 mm/s"', 'feed = "0 mm/s"')
    before = {file.name for file in tmp_path.iterdir()}
    assert told(armeval("report", harbour, "--out", tmp_path / "out"), "feed")
    assert {file.name for file in tmp_path.iterdir()} == before


def test_runs_that_are_not_there_are_told(armeval, harbour, tmp_path):
    said = armeval("report", harbour, "--out", tmp_path / "out", "--before", "bear")
    assert told(said, "bear", "bare")
    assert not (tmp_path / "out").exists()


def test_an_unknown_robot_is_told(armeval, tmp_path):
    assert told(armeval("new", tmp_path / "mine", "--robot", "turn"), "tern")
    assert not (tmp_path / "mine").exists()
