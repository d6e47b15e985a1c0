"""A small invented arm with everything a trial needs, written into a folder, for the readers' tests to alter."""

from __future__ import annotations

import gzip
from pathlib import Path

import numpy as np

URDF = """\
<?xml version="1.0"?>
<robot name="pair">
  <link name="base"/>
  <link name="upper">
    <inertial>
      <origin xyz="0.1 0 0"/><mass value="0.3"/>
      <inertia ixx="1e-4" ixy="0" ixz="0" iyy="1.2e-3" iyz="0" izz="1.2e-3"/>
    </inertial>
  </link>
  <link name="fore">
    <inertial>
      <origin xyz="0.09 0 0"/><mass value="0.2"/>
      <inertia ixx="1e-4" ixy="0" ixz="0" iyy="7e-4" iyz="0" izz="7e-4"/>
    </inertial>
  </link>
  <link name="tip"/>
  <joint name="shoulder" type="revolute">
    <parent link="base"/><child link="upper"/><axis xyz="0 0 1"/>
    <limit lower="-3" upper="3" effort="1" velocity="1"/>
  </joint>
  <joint name="elbow" type="revolute">
    <parent link="upper"/><child link="fore"/><origin xyz="0.2 0 0"/><axis xyz="0 0 1"/>
    <limit lower="-2.5" upper="2.5" effort="1" velocity="1"/>
  </joint>
  <joint name="tip_mount" type="fixed">
    <parent link="fore"/><child link="tip"/><origin xyz="0.18 0 0"/>
  </joint>
</robot>
"""

ARM = """\
schema = "armeval/arm/1"
name = "pair"
urdf = "pair.urdf"
tip = "tip"

[servo]
law = "joint_pd"
rate = "1 kHz"
delay = "1 ms"
speed_filter = "120 Hz"

[joint.shoulder]
rest_angle = "-30 deg"
gear_ratio = -2
stiffness = "1.5 N*m/rad"
damping = "0.02 N*m*s/rad"
torque_limit = "0.35 N*m"
torque_step = "0.2 mN*m"
torque_constant = "31 mN*m/A"
winding_resistance = "0.4 ohm"
rotor_inertia = "4 g*cm^2"
encoder_counts = 16384
slots = 12
poles = 14
cog_map = { file = "maps/shoulder.csv", index_offset = "3 deg" }

[joint.elbow]
rest_angle = "60 deg"
stiffness = "0.8 N*m/rad"
damping = "0.01 N*m*s/rad"
torque_limit = "0.2 N*m"
coulomb_friction = "3 mN*m"
static_friction = "4 mN*m"
viscous_friction = "0.1 mN*m*s/rad"
encoder_counts = 4096
encoder_on = "joint"
cog_map = "maps/elbow.csv"
"""

TRIAL = """\
schema = "armeval/trial/1"
title = "Two corners"
arm = "arm.toml"
path = "path.csv"
feed = "60 mm/s"
acceleration = "1 m/s^2"

[[run]]
name = "bare"
compensated = false
logs = "logs/bare-*.csv"

[[run]]
name = "smoothed"
compensated = true
"""

#: Friction [N m, motor side] that the two directions of the shoulder's map differ by.
MAP_FRICTION = 0.002


def write_sample(folder: Path, *, arm: str = ARM, trial: str = TRIAL, urdf: str = URDF) -> Path:
    """Write arm, maps, path and three laps of logs; give the ``trial.toml``."""
    for name in ("maps", "logs"):
        (folder / name).mkdir(parents=True, exist_ok=True)
    (folder / "pair.urdf").write_text(urdf, encoding="utf-8")
    (folder / "arm.toml").write_text(arm, encoding="utf-8")
    write_map(folder / "maps" / "shoulder.csv", MAP_FRICTION)
    write_map(folder / "maps" / "elbow.csv", 0.001)
    (folder / "path.csv").write_text("x [mm],y [mm],z [mm]\n300,0,0\n300,50,0\n250,50,0\n", encoding="utf-8")
    for number in (1, 2, 3):
        write_log(folder / "logs" / f"bare-{number}.csv", shift=0.001 * number)
    (folder / "trial.toml").write_text(trial, encoding="utf-8")
    return folder / "trial.toml"


def write_map(file: Path, friction: float) -> None:
    """Write a map of order 84 in two directions, 720 angles each [mN m]."""
    angle = np.arange(0.0, 360.0, 0.5)
    cogging = 5.0 * np.sin(84 * np.radians(angle))
    rows = [
        f"{a:.3f},{t - 1e3 * sign * friction:.9f},{sign:+d}"
        for sign in (+1, -1)
        for a, t in zip(angle, cogging, strict=True)
    ]
    file.write_text("angle [deg],cog_torque [mN*m],direction\n" + "\n".join(rows) + "\n", encoding="utf-8")


def write_log(file: Path, shift: float = 0.0) -> None:
    """Write one lap in degrees; packed where the name ends in ``.gz``."""
    time = np.arange(0.0, 2.0, 0.002)
    shoulder, elbow = 10.0 * np.sin(time) + shift, 50.0 + 10.0 * np.cos(time)
    rows = "\n".join(f"{t:.3f},{s:.6f},{e:.6f}" for t, s, e in zip(time, shoulder, elbow, strict=True))
    text = f"time [s],shoulder.angle [deg],elbow.angle [deg]\n{rows}\n".encode()
    file.write_bytes(gzip.compress(text) if file.suffix == ".gz" else text)
