"""The demos: complete made-up trials with their logs, written where the user wants them."""

from __future__ import annotations

import os
import shutil
from pathlib import Path
from typing import Literal, get_args

from armeval.errors import InputError, near
from armeval.files.atomic import write_folder
from armeval.files.new_trial import robot_folder

DemoTrial = Literal["harbour", "feel"]

_ROBOT = "tern"
_PATH = "harbour.csv"


def demo_folder(trial: DemoTrial = "harbour") -> Path:
    """Give the folder of a demo inside the package: trial, path and logs, without the arm."""
    return Path(__file__).parents[1] / {"harbour": "demo", "feel": "demo_feel"}[trial]


def write_demo(directory: str | os.PathLike[str], *, trial: DemoTrial = "harbour", force: bool = False) -> Path:
    """Write a demo's trial, path, logs and notes, and its arm's folder beside them.

    Parameters
    ----------
    directory
        The folder to make.
    trial
        ``harbour``: the arm follows the harbour's outline, bare and compensated. ``feel``: a visitor's hand leads the
        arm along it.
    force
        Write into a folder that holds files: those of the same name are replaced, all others kept.

    Returns
    -------
    The ``trial.toml``.

    Raises
    ------
    InputError
        If there is no such trial; if the folder holds files and ``force`` is not set, or may not be written.
    """
    if trial not in get_args(DemoTrial):
        raise InputError(f"there is no demo trial `{trial}`", near(trial, get_args(DemoTrial)), place="--trial")
    unwanted = shutil.ignore_patterns("starter_path.csv", ".*", "__pycache__")
    with write_folder(directory, force=force) as folder:
        shutil.copytree(demo_folder(trial), folder, ignore=unwanted, dirs_exist_ok=True)
        shutil.copyfile(demo_folder() / _PATH, folder / _PATH)
        shutil.copytree(robot_folder(_ROBOT), folder / _ROBOT, ignore=unwanted)
    return Path(directory) / "trial.toml"
