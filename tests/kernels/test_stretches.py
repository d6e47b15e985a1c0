import numpy as np
import pytest

from armeval.kernels.stretches import corner_passes, stretch_sums

PATH = np.array([[0.0, 0.0, 0.0], [1.0, 0.0, 0.0], [1.0, 1.0, 0.0]])
PATH_ARC = np.array([0.0, 1.0, 2.0])


def test_sums_by_stretch_are_those_of_their_samples():
    rng = np.random.default_rng(0)
    k = 200
    arc = np.sort(rng.uniform(0.0, 2.0, k))
    time = np.cumsum(rng.uniform(0.01, 0.02, k))
    tip, target = 0.1 * rng.standard_normal((k, 3)), 0.1 * rng.standard_normal((k, 3))
    deviation, lag = rng.uniform(0.0, 0.1, k), 0.1 * rng.standard_normal(k)
    sums = stretch_sums(time, arc, tip, target, deviation, lag, PATH, PATH_ARC, PATH_ARC)
    error = tip - target
    speed = np.empty(k)
    speed[1:-1] = (arc[2:] - arc[:-2]) / (time[2:] - time[:-2])
    speed[0], speed[-1] = (arc[1] - arc[0]) / (time[1] - time[0]), (arc[-1] - arc[-2]) / (time[-1] - time[-2])
    for i, direction in enumerate(np.eye(3)[:2]):
        own = (arc < 1.0) if i == 0 else (arc >= 1.0)
        along = error[own] @ direction
        across = np.linalg.norm(error[own] - np.outer(along, direction), axis=1)
        assert sums.samples[i] == own.sum()
        assert sums.tracking_square[i] == pytest.approx(np.sum(error[own] ** 2))
        assert sums.tracking_max[i] == pytest.approx(np.linalg.norm(error[own], axis=1).max())
        assert sums.deviation_square[i] == pytest.approx(np.sum(deviation[own] ** 2))
        assert sums.deviation_max[i] == pytest.approx(deviation[own].max())
        assert sums.along[i] == pytest.approx(along.sum())
        assert sums.along_square[i] == pytest.approx(np.sum(along**2))
        assert sums.across_square[i] == pytest.approx(np.sum(across**2))
        assert sums.across_max[i] == pytest.approx(across.max())
        assert sums.lag[i] == pytest.approx(lag[own].sum())
        assert sums.lag_max[i] == pytest.approx(np.abs(lag[own]).max())
        assert sums.drift[i] == pytest.approx(np.sum(lag[own] * speed[own]))
        assert sums.speed_square[i] == pytest.approx(np.sum(speed[own] ** 2))


def test_a_corner_is_passed_between_samples():
    """Two samples on either side of a corner, which the straight line between them misses by 0.1 / sqrt(2)."""
    arc = np.array([0.5, 0.9, 1.1, 1.5])
    tip = np.array([[0.5, 0.0, 0.0], [0.9, 0.0, 0.0], [1.0, 0.1, 0.0], [1.0, 0.5, 0.0]])
    rounding, overshoot = corner_passes(arc, tip, np.zeros(4), PATH, PATH_ARC, PATH_ARC, np.array([[1.0, 0.0, 0.0]]))
    assert rounding[0] == pytest.approx(0.1 / np.sqrt(2.0))
    assert overshoot[0] == 0.0


def test_only_what_lies_beyond_the_path_that_follows_is_overshoot():
    arc = np.array([0.9, 1.0, 1.2, 1.4])
    tip = np.array([[0.9, 0.3, 0.0], [1.05, 0.0, 0.0], [1.02, 0.2, 0.0], [0.9, 0.4, 0.0]])
    _, overshoot = corner_passes(arc, tip, np.zeros(4), PATH, PATH_ARC, PATH_ARC, np.array([[1.0, 0.0, 0.0]]))
    assert overshoot[0] == pytest.approx(0.05)


def test_a_corner_that_no_sample_is_near_is_unknown():
    rounding, overshoot = corner_passes(
        np.array([0.1, 1.9]), np.zeros((2, 3)), np.zeros(2), PATH, PATH_ARC, PATH_ARC, np.array([[1.0, 0.0, 0.0]])
    )
    assert np.isnan([rounding[0], overshoot[0]]).all()
