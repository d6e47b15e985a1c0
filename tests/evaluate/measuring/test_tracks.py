import numpy as np
import pytest
import shapely

from armeval.evaluate.measuring.tracks import progress_along, track
from tests.slides import along, delayed, lap_of, slides


def zigzag(seed, points=30):
    """A planar path whose stretches stay clear of each other."""
    rng = np.random.default_rng(seed)
    return np.column_stack([0.02 * np.arange(points), 0.01 * rng.uniform(-1.0, 1.0, points), np.zeros(points)])


@pytest.mark.parametrize("seed", range(4))
def test_deviation_is_the_distance_to_the_path_as_shapely_finds_it(seed):
    trajectory = along(zigzag(seed), period=5e-3)
    rng = np.random.default_rng(seed)
    tip = trajectory.tip + np.column_stack([1e-3 * rng.standard_normal((len(trajectory.arc), 2)), 0.0 * trajectory.arc])
    lap = lap_of(trajectory, tip)
    line = shapely.LineString(trajectory.path[:, :2])
    np.testing.assert_allclose(lap.deviation, shapely.distance(line, shapely.points(tip[:, :2])), atol=1e-12)
    at = shapely.line_locate_point(line, shapely.points(tip[:, :2]))
    np.testing.assert_allclose(trajectory.arc - lap.lag, at, atol=1e-6)


def test_deviation_at_a_crossing_is_that_of_the_stretch_being_travelled():
    cross = along([[-0.1, 0.0, 0.0], [0.1, 0.0, 0.0], [0.1, 0.1, 0.0], [0.0, 0.1, 0.0], [0.0, -0.1, 0.0]])
    tip = cross.tip + np.array([0.0, 0.0, 1e-3]) + np.outer(cross.arc < 0.2, [0.0, 3e-3, 0.0])
    lap = lap_of(cross, tip)
    crossing = np.abs(cross.arc - 0.1) < 0.02
    np.testing.assert_allclose(lap.deviation[crossing], np.hypot(1e-3, 3e-3), rtol=1e-9)


def test_lag_on_the_way_back_is_counted_on_the_way_back():
    there_and_back = along([[0.0, 0.0, 0.0], [0.1, 0.0, 0.0], [0.0, 0.0, 0.0]], feed=0.1)
    lap = lap_of(there_and_back, delayed(there_and_back, 0.03))
    returning = there_and_back.arc > 0.11
    np.testing.assert_allclose(lap.lag[returning], 0.003, atol=1e-9)


def test_long_laps_are_worked_on_in_pieces_with_the_same_result():
    trajectory = along(zigzag(1), feed=0.003)
    tip = trajectory.tip + 1e-3 * np.random.default_rng(0).standard_normal(trajectory.tip.shape)
    assert len(tip) > 2 * (1 << 16)
    lap = lap_of(trajectory, tip)
    piece = slice((1 << 16) - 50, (1 << 16) + 50)
    deviation, lag = progress_along(tip[piece], trajectory.arc[piece], trajectory)
    np.testing.assert_allclose(lap.deviation[piece], deviation)
    np.testing.assert_allclose(lap.lag[piece], lag)


def test_targets_are_followed_along_the_path_where_no_arc_length_is_given():
    trajectory = along([[0.0, 0.0, 0.0], [0.1, 0.0, 0.0], [0.1, 0.1, 0.0], [0.0, 0.0, 0.0]])
    lap = track(
        slides(),
        trajectory,
        run="bare",
        compensated=False,
        source="prediction",
        lap=1,
        file=None,
        time=trajectory.time,
        angle=trajectory.joint,
        target=trajectory.joint,
    )
    np.testing.assert_allclose(lap.arc, trajectory.arc, atol=1e-9)
    np.testing.assert_allclose(lap.resolution, 0.0)
