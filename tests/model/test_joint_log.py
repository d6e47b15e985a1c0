from __future__ import annotations

import numpy as np
import pytest

from armeval.errors import InputError
from armeval.model.joint_log import GAP_PERIODS, JointLog


def log_at(*times: float) -> JointLog:
    return JointLog(np.array(times), np.zeros((len(times), 2)), source="made-up.csv")


def test_the_period_is_the_usual_step() -> None:
    assert log_at(0.0, 0.01, 0.02, 0.03, 0.5).period == pytest.approx(0.01)


def test_a_log_without_gaps_is_one_segment() -> None:
    assert log_at(0.0, 0.01, 0.019, 0.03).segments == (slice(0, 4),)


def test_a_long_step_parts_a_log() -> None:
    log = log_at(0.0, 0.01, 0.02, 0.52, 0.53, 0.54, 0.55, 1.0)
    assert log.segments == (slice(0, 3), slice(3, 7), slice(7, 8))


@pytest.mark.parametrize(("periods", "count"), [(GAP_PERIODS - 0.01, 1), (GAP_PERIODS + 0.01, 2)])
def test_a_gap_is_longer_than_so_many_periods(periods: float, count: int) -> None:
    assert len(log_at(0.0, 1.0, 2.0, 3.0, 3.0 + periods).segments) == count


def test_the_period_of_a_long_log_is_that_of_all_its_steps() -> None:
    steps = np.where(np.random.default_rng(7).random(400_000) < 0.8, 0.001, 0.002)
    log = JointLog(np.cumsum(steps), np.zeros((400_000, 1)))
    assert log.period == pytest.approx(float(np.median(np.diff(log.time))), rel=1e-6)


@pytest.mark.parametrize("times", [(0.0, 0.01, 0.01), (0.0, 0.02, 0.01)])
def test_time_must_rise(times: tuple[float, ...]) -> None:
    with pytest.raises(InputError, match=r"made-up.csv, sample 3: time does not rise"):
        log_at(*times)


def test_one_sample_is_no_log() -> None:
    with pytest.raises(InputError, match="1 row"):
        log_at(0.0)
