"""A trial to start from: a shipped robot, a short path and a commented trial file."""

from __future__ import annotations

import os
import shutil
from pathlib import Path

from armeval.errors import InputError, near
from armeval.files.atomic import write_folder

_STARTER_PATH = "starter_path.csv"

_TRIAL = """\
# One question: an arm, a path and its runs. Every quantity carries its unit; file names are relative to this file.
schema = "armeval/trial/1"
title = "{title}"
arm = "{robot}/arm.toml"           # drives, servo and cog maps; {robot}/NOTES.md says what is invented
path = "path.csv"                  # tip points in the base frame, or a joint target each: `lift.angle [deg], ...`
feed = "60 mm/s"                   # speed and acceleration along the path; take both out if the path has `time [s]`
acceleration = "1 m/s^2"
# corner_angle = "5 deg"           # the tip stops where the path turns by more than this

# [columns]                        # where your logs have other headers: what they mean, with the unit
# "t" = "time [s]"
# "q1" = "{joint}.angle [rad]"

[compensation]                     # what the firmware's table can do
table_bins = 1024
interpolation = "linear"           # linear | nearest
index_error = "0.1 deg"            # motor angle, one sigma
# map_noise = "0.2 mN*m"           # without it: what each map itself shows

# [sticking]                       # when a joint counts as resting while it is told to move
# least_target_speed = "0.02 rad/s"
# speed_share = 0.02
# least_dwell = "20 ms"

# [uncertainty]                    # how far the arm may be from these files, one sigma: `armeval predict --members 200`
# rotor_index = "0.1 deg"          # motor angle; without it: the index_error above. The map's noise stands there too
# friction = 0.2                   # of the logarithm of a factor: 0.2 is about 20 %
# torque_constant = 0.03           # share of itself
# start = "5 mrad"                 # where the arm rests before the lap, off its first target

# [hand]                           # a hand moves the arm: see `armeval feel`
# rendered_force = "1 N"           # what the arm is meant to let the hand feel
# gravity_feedforward = true       # the drives carry the arm's weight; without it: as [servo] says
# bandwidth = "10 Hz"              # the hand itself moves no faster: the motion is smoothed there
# run = "bare"                     # its logged joint angles are the motion; without it: the planned path
# thresholds = "thresholds.toml"   # what a hand notices, for you to edit; without it: the same as shipped

[[run]]
name = "bare"
compensated = false
# logs = "logs/bare-*.csv"         # `time [s]` and an angle a joint: `{joint}.angle [count|deg|rad]`; a lap a file, in
                                   # file-name order, or a column `lap`. Without logs the run is predicted only.

[[run]]
name = "compensated"
compensated = true
# logs = "logs/compensated-*.csv"
"""


def robots_folder() -> Path:
    """Give the folder of the shipped robots: inside the installed package, beside it in a source checkout."""
    package = Path(__file__).parents[1]
    installed = package / "robots"
    return installed if installed.is_dir() else package.parent / "robots"


def robot_names() -> tuple[str, ...]:
    """List the names of the shipped robots."""
    return tuple(sorted(file.parent.name for file in robots_folder().glob("*/arm.toml")))


def robot_folder(name: str) -> Path:
    """Give the folder of a shipped robot, with its ``arm.toml``, URDF, cog maps and notes.

    Raises
    ------
    InputError
        If there is no robot of that name.
    """
    names = robot_names()
    if name not in names:
        raise InputError(f"there is no robot `{name}`", near(name, names))
    return robots_folder() / name


def new_trial(directory: str | os.PathLike[str], robot: str, *, force: bool = False) -> Path:
    """Write a trial to start from: a commented ``trial.toml``, a short path, thresholds, and the robot's own folder.

    Parameters
    ----------
    directory
        The folder to make.
    robot
        Name of a shipped robot.
    force
        Write into a folder that holds files: those of the same name are replaced, all others kept.

    Returns
    -------
    The ``trial.toml``.

    Raises
    ------
    InputError
        If there is no such robot; if the folder holds files and ``force`` is not set, or may not be written.
    """
    from armeval.files.thresholds_file import shipped_thresholds
    from armeval.files.toml_file import read_toml

    source = robot_folder(robot)
    joints = list(read_toml(source / "arm.toml")["joint"])
    with write_folder(directory, force=force) as folder:
        shutil.copytree(source, folder / robot, ignore=shutil.ignore_patterns(_STARTER_PATH, ".*", "__pycache__"))
        shutil.copyfile(source / _STARTER_PATH, folder / "path.csv")
        shutil.copyfile(shipped_thresholds(), folder / "thresholds.toml")
        text = _TRIAL.format(title=f"First trial of {robot}", robot=robot, joint=joints[0])
        (folder / "trial.toml").write_text(text, encoding="utf-8")
    return Path(directory) / "trial.toml"
