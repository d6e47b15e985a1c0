"""The force that a hand meets, against MuJoCo with the tip led along the same path by a stiff constraint.

Two, three and four joints (the last one redundant: its inner motion is the arm's own in both). Both forces are averaged
over ten samples: where a joint turns round, dry friction jumps, and the two programs differ by a sample in when.
"""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest

from armeval.evaluate.feeling.hand_force import hand_force
from armeval.evaluate.feeling.hand_motion import planned_motion
from armeval.evaluate.feeling.inner_motion import with_inner_motion
from armeval.evaluate.plan import plan
from armeval.files.arm_file import read_arm
from armeval.files.new_trial import robot_folder
from armeval.files.path_file import read_path
from armeval.model.arm import Arm
from armeval.model.cogmap import CogMap
from armeval.model.trial import Compensation
from tests.plant import led_plant, shipped
from tests.plant.plant_drive import PlantDrive

BINS = 256
LAW = Compensation(table_bins=BINS, index_error=math.radians(0.4), map_noise=0.0)
WINDOW = 10


def _ideal(arm: Arm, drives: list[PlantDrive]) -> Arm:
    """The arm with the plant's own cogging, encoders without counts and a servo without delay, torque steps or loss."""
    turn = 2.0 * np.pi * np.arange(4096) / 4096
    own = [
        CogMap(sum(size * np.sin(order * turn + phase) for order, size, phase in drive.harmonics)) for drive in drives
    ]
    made = [
        replace(drive, cog_map=cog_map, torque_step=0.0, dead_time_torque=0.0, encoder_counts=0.0)
        for drive, cog_map in zip(arm.drives, own, strict=True)
    ]
    return replace(arm, drives=tuple(made), servo=replace(arm.servo, delay=0.0))


def _both(name: str, compensated: bool, carries_weight: bool) -> tuple[np.ndarray, np.ndarray]:
    """Force by the package and force by MuJoCo, (k, 3) each, away from the ends of the path."""
    drives = list(shipped.drives(name).values())
    arm = _ideal(read_arm(robot_folder(name) / "arm.toml"), drives)
    drives = [
        replace(
            drive,
            table=known.cog_map.at(2.0 * np.pi * np.arange(BINS) / BINS),
            table_offset=known.index_offset + LAW.index_error,
        )
        for drive, known in zip(drives, arm.drives, strict=True)
    ]
    path = read_path(robot_folder(name) / "starter_path.csv", arm.joints, [False] * len(arm.joints))
    trajectory = plan(arm, replace(path, points=path.points[:40]), feed=0.06, acceleration=1.0)
    given = motion = planned_motion(arm, trajectory, bandwidth=10.0, space="tip")
    if len(arm.joints) > 3:
        motion = with_inner_motion(arm, given, compensated=compensated, compensation=LAW, carries_weight=carries_weight)
    force = hand_force(arm, motion, compensated=compensated, compensation=LAW, carries_weight=carries_weight)
    led = led_plant.lead(
        shipped.urdf_text(name),
        shipped.table(name)["tip"],
        drives,
        np.array(given.tip),
        given.period,
        given.joint[0],
        given.joint_speed[0],
        carries_weight=carries_weight,
        compensated=compensated,
    )
    assert np.abs(led.tip - given.tip)[100:-100].max() < 2e-6
    blind = force.directions.blind
    seen = led.force if blind is None else led.force - np.outer(led.force @ blind, blind)
    return _averaged(force.total)[100:-100], _averaged(seen)[100:-100]


def _averaged(force: np.ndarray) -> np.ndarray:
    return np.column_stack([np.convolve(column, np.full(WINDOW, 1.0 / WINDOW), "valid") for column in force.T])


def _apart(a: np.ndarray, b: np.ndarray) -> float:
    return float(np.sqrt(np.mean((a - b) ** 2) / np.mean(b**2)))


@pytest.mark.filterwarnings("ignore::armeval.errors.InputWarning")
@pytest.mark.parametrize("name", ["plover", "tern"])
@pytest.mark.parametrize(("compensated", "carries_weight"), [(False, True), (False, False), (True, True)])
def test_the_force_on_the_hand_is_what_another_engine_measures(name, compensated, carries_weight):
    ours, measured = _both(name, compensated, carries_weight)
    assert _apart(ours, measured) < 0.02


@pytest.mark.filterwarnings("ignore::armeval.errors.InputWarning")
def test_so_it_is_for_a_redundant_arm_whose_inner_motion_is_its_own():
    ours, measured = _both("heron", True, True)
    assert _apart(ours, measured) < 0.02


@pytest.mark.filterwarnings("ignore::armeval.errors.InputWarning")
def test_and_for_a_bare_redundant_arm_until_it_snaps_past_a_detent_on_a_knife_s_edge():
    # 1.6 s into the path the inner motion either catches in a detent or just passes it; the engines' step decides.
    ours, measured = _both("heron", False, True)
    assert _apart(ours[:1450], measured[:1450]) < 0.02
