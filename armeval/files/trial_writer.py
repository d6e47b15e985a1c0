"""Trial to trial.toml: the text that reads back as the same trial."""

from __future__ import annotations

import os
from collections.abc import Mapping
from pathlib import Path
from typing import Any

from armeval.errors import InputError
from armeval.files.arm_writer import relative, told
from armeval.files.atomic import write_text
from armeval.files.trial_table import TRIAL_SCHEMA
from armeval.model.hand import Hand
from armeval.model.trial import Run, Trial

_NO_SMOOTHING = 1e9
"""Written for an infinite bandwidth [Hz], which no unit can be given to."""


def write_trial(
    trial: Trial,
    path: str | os.PathLike[str],
    *,
    arm: str | os.PathLike[str],
    columns: Mapping[str, str] | None = None,
) -> Path:
    """Write a trial as ``trial.toml``; its arm, path and logs stay where they are and are named relative to it.

    Parameters
    ----------
    trial
        What to write; its path and logs must come from files or have been written to some.
    path
        Where to.
    arm
        The file of its arm.
    columns
        What foreign headers in the logs mean.

    Raises
    ------
    InputError
        If the path or a log has no file, or the text cannot be written there.
    """
    return write_text(path, trial_text(trial, arm=arm, folder=Path(path).parent, columns=columns))


def trial_text(
    trial: Trial,
    *,
    arm: str | os.PathLike[str],
    folder: str | os.PathLike[str],
    columns: Mapping[str, str] | None = None,
) -> str:
    """Give the text of ``trial.toml``; files are named relative to ``folder``.

    Raises
    ------
    InputError
        If the path or a log has no file.
    """
    import tomli_w

    if not trial.path.source:
        raise InputError("the path is in no file", "write it with `write_path` and put the file's name into `source`")
    content: dict[str, Any] = {
        "schema": TRIAL_SCHEMA,
        "title": trial.title,
        "arm": relative(arm, folder),
        "path": relative(trial.path.source, folder),
    }
    if trial.feed is not None:
        content["feed"] = told(trial.feed, "m/s")
    if trial.acceleration is not None:
        content["acceleration"] = told(trial.acceleration, "m/s^2")
    content["corner_angle"] = told(trial.corner_angle, "rad")
    if columns:
        content["columns"] = dict(columns)
    compensation, sticking, uncertainty = trial.compensation, trial.sticking, trial.uncertainty
    content["compensation"] = {
        "table_bins": compensation.table_bins,
        "interpolation": compensation.interpolation,
        "index_error": told(compensation.index_error, "rad"),
    }
    if compensation.map_noise is not None:
        content["compensation"]["map_noise"] = told(compensation.map_noise, "N*m")
    content["sticking"] = {
        "least_target_speed": told(sticking.least_target_speed, "rad/s"),
        "speed_share": sticking.speed_share,
        "least_dwell": told(sticking.least_dwell, "s"),
    }
    content["uncertainty"] = {
        "friction": uncertainty.friction,
        "torque_constant": uncertainty.torque_constant,
        "start": told(uncertainty.start, "rad"),
    }
    if uncertainty.rotor_index is not None:
        content["uncertainty"]["rotor_index"] = told(uncertainty.rotor_index, "rad")
    if trial.hand is not None:
        content["hand"] = _hand(trial.hand, folder)
    content["run"] = [_run(run, folder) for run in trial.runs]
    return tomli_w.dumps(content)


def _hand(hand: Hand, folder: str | os.PathLike[str]) -> dict[str, Any]:
    table: dict[str, Any] = {}
    if hand.rendered_force is not None:
        table["rendered_force"] = told(hand.rendered_force, "N")
    if hand.gravity_feedforward is not None:
        table["gravity_feedforward"] = hand.gravity_feedforward
    table["bandwidth"] = told(min(hand.bandwidth, _NO_SMOOTHING), "Hz")
    if hand.run is not None:
        table["run"] = hand.run
    if hand.thresholds is not None and hand.thresholds.source:
        table["thresholds"] = relative(hand.thresholds.source, folder)
    return table


def _run(run: Run, folder: str | os.PathLike[str]) -> dict[str, Any]:
    table: dict[str, Any] = {"name": run.name, "compensated": run.compensated}
    if any(not log.source for log in run.laps):
        raise InputError(
            f"a log of the run `{run.name}` is in no file",
            "write it with `write_joint_log` and put the file's name into `source`",
        )
    if run.laps:
        table["logs"] = [relative(file, folder) for file in dict.fromkeys(log.source for log in run.laps)]
    return table
