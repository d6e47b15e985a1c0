"""A shipped arm as a plant: its arm.toml read here by other code than the package's own reader.

Only the units that the shipped arms use are known.
"""

from __future__ import annotations

import math
import tomllib
from pathlib import Path

from tests.plant.motors import HERON, PLOVER, TERN, BenchMotor
from tests.plant.mujoco_plant import Plant, PlantDrive, PlantServo

FOLDER = Path(__file__).parents[2] / "robots"
MOTORS: dict[str, dict[str, BenchMotor]] = {"tern": TERN, "plover": PLOVER, "heron": HERON}

_UNITS = {
    "deg": math.pi / 180.0,
    "kHz": 1e3,
    "Hz": 1.0,
    "ms": 1e-3,
    "N*m": 1.0,
    "mN*m": 1e-3,
    "mN*m*s/rad": 1e-3,
    "N*m/rad": 1.0,
    "N*m*s/rad": 1.0,
    "g*cm^2": 1e-7,
    "rad/s": 1.0,
    "N/m": 1.0,
    "N*s/m": 1.0,
    "mN*m/A": 1e-3,
    "ohm": 1.0,
}


def si(text: str) -> float:
    number, unit = text.split()
    return float(number) * _UNITS[unit]


def table(name: str) -> dict:
    return tomllib.loads((FOLDER / name / "arm.toml").read_text(encoding="utf-8"))


def urdf_text(name: str) -> str:
    return (FOLDER / name / f"{name}.urdf").read_text(encoding="utf-8")


def drives(name: str) -> dict[str, PlantDrive]:
    """The drives as arm.toml has them, with the bench's cogging for truth and nothing stored in the firmware."""
    made = {}
    for joint, keys in table(name)["joint"].items():
        values = {
            key: si(keys[key])
            for key in (
                "stiffness",
                "damping",
                "torque_limit",
                "torque_step",
                "dead_time_torque",
                "rotor_inertia",
                "coulomb_friction",
                "static_friction",
                "stribeck_speed",
                "viscous_friction",
            )
            if key in keys
        }
        offset = keys["cog_map"].get("index_offset", "0 deg") if isinstance(keys["cog_map"], dict) else "0 deg"
        made[joint] = PlantDrive(
            harmonics=MOTORS[name][joint].harmonics,
            gear_ratio=float(keys.get("gear_ratio", 1)),
            index_offset=si(offset),
            encoder_counts=float(keys["encoder_counts"]),
            encoder_on=keys["encoder_on"],
            **values,
        )
    return made


def servo(name: str) -> PlantServo:
    keys = table(name)["servo"]
    return PlantServo(
        law=keys["law"],
        period=1.0 / si(keys["rate"]),
        delay=si(keys.get("delay", "0 ms")),
        speed_cutoff=si(keys["speed_filter"]),
        gravity_feedforward=keys.get("gravity_feedforward", True),
        inertia_feedforward=keys.get("inertia_feedforward", False),
        tip_stiffness=tuple(si(text) for text in keys.get("tip_stiffness", ["0 N/m"] * 3)),
        tip_damping=tuple(si(text) for text in keys.get("tip_damping", ["0 N*s/m"] * 3)),
    )


def rest_angles(name: str) -> list[float]:
    return [si(keys["rest_angle"]) for keys in table(name)["joint"].values()]


def plant(name: str) -> Plant:
    """The shipped arm, moving as its files say."""
    return Plant(urdf_text(name), table(name)["tip"], list(drives(name).values()), servo(name))
