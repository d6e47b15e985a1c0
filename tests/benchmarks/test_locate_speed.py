"""How fast rests are found in a long log (run with --benchmark-only)."""

import numpy as np
import pytest

from armeval.evaluate.sticking.rests import sticking_events
from armeval.model.trial import StickingRule
from tests.evaluate.sticking_cases import Case, lap, moved, to_and_fro


@pytest.mark.parametrize("samples", [3_600_000])
def test_an_hour_of_one_joint_at_a_kilohertz_that_hardly_sticks(benchmark, samples):
    arm = Case().arm()
    t = np.arange(samples) * 1e-3
    target = 0.3 + 0.5 * np.sin(0.5 * t)
    track = lap(arm, target, target - 0.003)
    benchmark.pedantic(sticking_events, args=(arm, track, StickingRule()), rounds=3, warmup_rounds=1)


def test_a_joint_that_rests_at_every_turn(benchmark):
    case = Case(Fc=0.006, Fs=0.007)
    target, told = to_and_fro(0.15, turns=60)
    angle, _ = moved(case, target, told)
    track = lap(case.arm(), target, angle)
    found = benchmark.pedantic(sticking_events, args=(case.arm(), track, StickingRule()), rounds=3, warmup_rounds=1)
    assert len(found) >= 55
