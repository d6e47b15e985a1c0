"""Arm to arm.toml: the text that reads back as the same arm."""

from __future__ import annotations

import math
import os
from pathlib import Path
from typing import Any

import numpy as np

from armeval.errors import InputError
from armeval.files.arm_table import ARM_SCHEMA
from armeval.files.atomic import write_text
from armeval.model.arm import Arm
from armeval.model.drive import Drive
from armeval.model.servo import Servo


def write_arm(arm: Arm, path: str | os.PathLike[str], *, urdf: str | os.PathLike[str]) -> Path:
    """Write an arm as ``arm.toml``; its URDF and cog maps stay where they are and are named relative to it.

    Parameters
    ----------
    arm
        What to write; each of its cog maps must come from a file or have been written to one.
    path
        Where to.
    urdf
        The file of the arm's chain.

    Raises
    ------
    InputError
        If a cog map has no file, or the text cannot be written there.
    """
    return write_text(path, arm_text(arm, urdf=urdf, folder=Path(path).parent))


def arm_text(arm: Arm, *, urdf: str | os.PathLike[str], folder: str | os.PathLike[str]) -> str:
    """Give the text of ``arm.toml``; files are named relative to ``folder``.

    Raises
    ------
    InputError
        If a cog map has no file.
    """
    import tomli_w

    length = float(np.linalg.norm(arm.gravity))
    up = [0.0, 0.0, 1.0] if length == 0.0 else [float(-part / length) + 0.0 for part in arm.gravity]
    content = {
        "schema": ARM_SCHEMA,
        "name": arm.name,
        "urdf": relative(urdf, folder),
        "tip": arm.chain.tip_name,
        "gravity": told(length, "m/s^2"),
        "up": up,
        "servo": _servo(arm.servo),
        "joint": {drive.joint: _drive(drive, folder) for drive in arm.drives},
    }
    return tomli_w.dumps(content)


def told(value: float, unit: str) -> str:
    """Write a quantity with all the digits that it takes to read it back."""
    return f"{float(value)!r} {unit}"


def relative(file: str | os.PathLike[str], folder: str | os.PathLike[str]) -> str:
    """Name a file as seen from a folder; with its whole path where there is no way from one to the other."""
    try:
        return Path(os.path.relpath(file, folder)).as_posix()
    except ValueError:  # on another drive
        return Path(file).absolute().as_posix()


def _servo(servo: Servo) -> dict[str, Any]:
    table: dict[str, Any] = {
        "law": servo.law,
        "rate": told(1.0 / servo.period, "Hz"),
        "delay": told(servo.delay, "s"),
        "gravity_feedforward": servo.gravity_feedforward,
        "inertia_feedforward": servo.inertia_feedforward,
    }
    if math.isfinite(servo.speed_cutoff):
        table["speed_filter"] = told(servo.speed_cutoff, "Hz")
    if servo.law == "tip_impedance":
        table["tip_stiffness"] = [told(value, "N/m") for value in servo.tip_stiffness]
        table["tip_damping"] = [told(value, "N*s/m") for value in servo.tip_damping]
    return table


def _drive(drive: Drive, folder: str | os.PathLike[str]) -> dict[str, Any]:
    torque, angle = ("N", "m") if drive.slides else ("N*m", "rad")
    ratio = told(drive.gear_ratio, "rad/m") if drive.slides else drive.gear_ratio
    along = drive.slides and drive.encoder_on == "joint"
    counts = told(drive.encoder_counts, "count/m") if along else drive.encoder_counts
    quantities = {
        "rest_angle": (drive.rest_angle, angle),
        "stiffness": (drive.stiffness, f"{torque}/{angle}"),
        "damping": (drive.damping, f"{torque}*s/{angle}"),
        "torque_limit": (drive.torque_limit, torque),
        "torque_step": (drive.torque_step, torque),
        "dead_time_torque": (drive.dead_time_torque, torque),
        "torque_constant": (drive.torque_constant, "N*m/A"),
        "winding_resistance": (drive.winding_resistance, "ohm"),
        "rotor_inertia": (drive.rotor_inertia, "kg*m^2"),
        "coulomb_friction": (drive.coulomb_friction, torque),
        "static_friction": (drive.breakaway_friction, torque),
        "stribeck_speed": (drive.stribeck_speed, f"{angle}/s"),
        "viscous_friction": (drive.viscous_friction, f"{torque}*s/{angle}"),
    }
    table: dict[str, Any] = {"gear_ratio": ratio}
    table |= {
        key: told(value, unit)
        for key, (value, unit) in quantities.items()
        if value is not None and math.isfinite(value)
    }
    table["encoder_on"] = drive.encoder_on
    if drive.encoder_counts:
        table["encoder_counts"] = counts
    table |= {key: teeth for key, teeth in (("slots", drive.slots), ("poles", drive.poles)) if teeth is not None}
    if drive.cog_map is not None:
        if not drive.cog_map.source:
            raise InputError(
                "the cog map is in no file",
                "write it with `write_cog_map` and put the file's name into its `source`",
                place=f"joint `{drive.joint}`",
            )
        file = relative(drive.cog_map.source, folder)
        table["cog_map"] = {"file": file, "index_offset": told(drive.index_offset, "rad")}
    return table
