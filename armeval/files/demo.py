"""The demo: a complete made-up trial with its logs, written where the user wants it."""

from __future__ import annotations

import os
import shutil
from pathlib import Path

from armeval.files.atomic import write_folder
from armeval.files.new_trial import robot_folder

_ROBOT = "tern"


def demo_folder() -> Path:
    """Give the folder of the demo inside the package: trial, path and logs, without the arm."""
    return Path(__file__).parents[1] / "demo"


def write_demo(directory: str | os.PathLike[str], *, force: bool = False) -> Path:
    """Write the demo's trial, path, logs and notes, and its arm's folder beside them.

    Parameters
    ----------
    directory
        The folder to make.
    force
        Write into a folder that holds files: those of the same name are replaced, all others kept.

    Returns
    -------
    The ``trial.toml``.

    Raises
    ------
    InputError
        If the folder holds files and ``force`` is not set, or may not be written.
    """
    unwanted = shutil.ignore_patterns("starter_path.csv", ".*", "__pycache__")
    with write_folder(directory, force=force) as folder:
        shutil.copytree(demo_folder(), folder, ignore=unwanted, dirs_exist_ok=True)
        shutil.copytree(robot_folder(_ROBOT), folder / _ROBOT, ignore=unwanted)
    return Path(directory) / "trial.toml"
