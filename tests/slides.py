"""An arm of three crossed slides: its tip is where its joints are, so every error can be written down by hand."""

from __future__ import annotations

import numpy as np

from armeval.evaluate.lap_track import LapTrack
from armeval.evaluate.measuring.tracks import track
from armeval.model.arm import Arm
from armeval.model.chain import Chain
from armeval.model.drive import Drive
from armeval.model.joint_log import JointLog
from armeval.model.planned_path import PlannedPath
from armeval.model.servo import Servo
from armeval.model.trajectory import Trajectory
from armeval.model.trial import Run, Trial

NAMES = ("east", "north", "up")


def slides() -> Arm:
    """Three slides along x, y and z of the base; the tip is (east, north, up)."""
    # Rotations whose third column is each slide's axis in the frame of the slide before it.
    east = np.array([[0.0, 0.0, 1.0], [1.0, 0.0, 0.0], [0.0, 1.0, 0.0]])
    north = np.array([[0.0, 1.0, 0.0], [0.0, 0.0, 1.0], [1.0, 0.0, 0.0]])
    up = np.eye(3)
    in_base = [east, north, up]
    in_former = [east, east.T @ north, north.T @ up]
    assert all(np.allclose(R[:, 2], axis) for R, axis in zip(in_base, np.eye(3), strict=True))
    placement = np.concatenate([np.array(in_former), np.zeros((3, 3, 1))], axis=2)
    chain = Chain(
        joints=NAMES,
        prismatic=np.ones(3, dtype=bool),
        placement=placement,
        mass=np.ones(3),
        center=np.zeros((3, 3)),
        inertia=np.tile(1e-3 * np.eye(3), (3, 1, 1)),
        tip=np.zeros(3),
        lower=np.full(3, -np.inf),
        upper=np.full(3, np.inf),
    )
    drives = tuple(Drive(name) for name in NAMES)
    return Arm("slides", chain, drives, Servo("joint_pd", 1e-3), np.array([0.0, 0.0, -9.80665]))


def along(points: np.ndarray, *, feed: float = 0.1, period: float = 1e-3, rest: float = 0.0) -> Trajectory:
    """Constant speed along a polyline of points (p, 3), with a rest at either end; stretches end at every point."""
    points = np.asarray(points, dtype=float)
    length = np.concatenate([[0.0], np.cumsum(np.linalg.norm(np.diff(points, axis=0), axis=1))])
    moving = length[-1] / feed
    time = period * np.arange(round((moving + 2.0 * rest) / period) + 1)
    arc = np.clip((time - rest) * feed, 0.0, length[-1])
    tip = np.column_stack([np.interp(arc, length, column) for column in points.T])
    speed = np.gradient(tip, period, axis=0)
    return Trajectory(time, arc, tip, tip, speed, np.gradient(speed, period, axis=0), points, length, length)


def trial_of(arm: Arm, trajectory: Trajectory, **runs: tuple[JointLog, ...]) -> Trial:
    """A made-up trial with those runs; a run is compensated where its name says so."""
    return Trial(
        title="slides",
        arm=arm,
        path=PlannedPath(trajectory.tip, time=trajectory.time),
        runs=tuple(Run(name, name.startswith("compensated"), laps) for name, laps in runs.items()),
    )


def lap_of(trajectory: Trajectory, tip: np.ndarray, *, lap: int = 1, run: str = "bare") -> LapTrack:
    """A lap whose tip is known at every servo period."""
    return track(
        slides(),
        trajectory,
        run=run,
        compensated=run.startswith("compensated"),
        source="log",
        lap=lap,
        file=f"{run}-{lap}.csv",
        time=trajectory.time,
        angle=np.asarray(tip),
        target=trajectory.joint,
        arc=trajectory.arc,
    )


def delayed(trajectory: Trajectory, delay: float) -> np.ndarray:
    """Tip of an arm that does exactly what it is told, too late."""
    return np.column_stack([np.interp(trajectory.time - delay, trajectory.time, column) for column in trajectory.tip.T])


def circle(turns=1.0):
    angle = np.linspace(0.0, 2.0 * np.pi * turns, round(180 * turns) + 1)
    return 0.05 * np.column_stack([np.cos(angle), np.sin(angle), 0.0 * angle])


def eight():
    angle = np.linspace(0.0, 2.0 * np.pi, 241)
    return 0.05 * np.column_stack([np.sin(angle), np.sin(2.0 * angle), 0.0 * angle])


def back_and_forth():
    turns = np.arange(9) % 2
    return np.column_stack([0.08 * turns, np.zeros(9), np.zeros(9)])


def comb():
    """Equal teeth: half a stretch or a whole tooth away the log fits almost as well."""
    x, y = [], []
    for tooth in range(8):
        x += [0.01 * tooth, 0.01 * tooth, 0.01 * tooth + 0.005, 0.01 * tooth + 0.005]
        y += [0.0, 0.03, 0.03, 0.0]
    return np.column_stack([x, y, np.zeros(len(x))])


PATHS = {"circle": circle(), "eight": eight(), "back and forth": back_and_forth(), "comb": comb()}
