"""How many poses a second the workspace's figures are worked out for, and how long a whole answer takes."""

from __future__ import annotations

import numpy as np
import pytest
from pytest_benchmark.fixture import BenchmarkFixture

from armeval.evaluate.feeling.tip_abilities import tip_abilities
from armeval.evaluate.feeling.workspace import workspace_map
from armeval.files.arm_file import read_arm
from armeval.files.new_trial import robot_folder


@pytest.mark.filterwarnings("ignore::armeval.errors.InputWarning")
@pytest.mark.parametrize("robot", ["plover", "tern", "heron"])
def test_figures_of_50_000_poses(benchmark: BenchmarkFixture, robot: str) -> None:
    arm = read_arm(robot_folder(robot) / "arm.toml")
    poses = np.random.default_rng(0).uniform(arm.chain.lower, arm.chain.upper, (50_000, arm.chain.count))
    found = benchmark(tip_abilities, arm, poses)
    assert len(found.ripple) == 50_000


def test_a_map_of_the_workspace_with_its_poses_found(benchmark: BenchmarkFixture) -> None:
    arm = read_arm(robot_folder("tern") / "arm.toml")
    mapped = benchmark(workspace_map, arm, spacing=0.015)
    assert len(mapped.tip) > 30_000
