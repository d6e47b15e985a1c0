"""What the window does, and ties; distances themselves are held against shapely elsewhere."""

import numpy as np
import pytest

from armeval.kernels.polyline import distances_at, nearest_near, progress

HAIRPIN = np.array([[0.0, 0.0, 0.0], [1.0, 0.0, 0.0], [0.0, 0.0, 0.0]])
ARC = np.array([0.0, 1.0, 2.0])


def nearest(point, expected, window):
    distance, arc = nearest_near(np.array([point]), np.array([expected]), np.array([window]), HAIRPIN, ARC)
    return distance[0], arc[0]


def test_nothing_outside_the_window_is_seen():
    assert nearest([0.5, 0.3, 0.0], 0.9, 0.2) == pytest.approx((np.hypot(0.2, 0.3), 0.7))
    assert nearest([0.5, 0.3, 0.0], 0.9, np.inf) == pytest.approx((0.3, 0.5))


def test_of_equally_near_places_the_expected_one_counts():
    assert nearest([0.4, 0.1, 0.0], 0.5, np.inf)[1] == pytest.approx(0.4)
    assert nearest([0.4, 0.1, 0.0], 1.5, np.inf)[1] == pytest.approx(1.6)


def test_beyond_the_ends_the_end_counts():
    assert nearest([-0.1, 0.0, 0.0], -0.3, 0.0) == pytest.approx((0.1, 0.0))
    assert nearest([0.0, 0.2, 0.0], 2.7, 0.1) == pytest.approx((0.2, 2.0))


def test_distances_of_many_points_do_not_depend_on_their_order():
    rng = np.random.default_rng(0)
    path = np.cumsum(rng.normal(size=(40, 3)), axis=0)
    arc = np.concatenate([[0.0], np.cumsum(np.linalg.norm(np.diff(path, axis=0), axis=1))])
    points, expected, window = rng.normal(size=(300, 3)) * 4, rng.uniform(0, arc[-1], 300), rng.uniform(0, 9, 300)
    together = nearest_near(points, expected, window, path, arc)
    order = rng.permutation(300)
    shuffled = nearest_near(points[order], expected[order], window[order], path, arc)
    assert np.array_equal(shuffled[0], together[0][order])
    for k in range(300):
        # Densely sampled within the window, nothing is nearer.
        s = np.linspace(max(expected[k] - window[k], 0.0), min(expected[k] + window[k], arc[-1]), 2000)
        dense = np.column_stack([np.interp(s, arc, column) for column in path.T])
        least = np.linalg.norm(dense - points[k], axis=1).min()
        assert together[0][k] <= least + 1e-12
        assert least <= together[0][k] + (s[1] - s[0])


def test_progress_never_goes_back_and_stands_still_with_its_points():
    points = np.array([[0.2, 0, 0], [0.2, 0, 0], [0.19, 0, 0], [0.3, 0, 0], [0.3, 0, 0]], dtype=float)
    assert progress(points, HAIRPIN, ARC, 0.0) == pytest.approx([0.2, 0.2, 0.2, 0.3, 0.3])


def test_distances_at_known_arc_lengths_need_no_order():
    path = np.array([[0.0, 0.0, 0.0], [1.0, 0.0, 0.0], [1.0, 2.0, 0.0]])
    expected = np.array([3.0, 0.5, 1.0, 2.0, -1.0, 4.0])
    points = np.array(
        [[1.0, 2.0, 0.4], [0.5, 0.1, 0.0], [1.0, 0.0, 0.3], [1.2, 1.0, 0.0], [0.0, -0.5, 0.0], [1.0, 2.6, 0.0]]
    )
    found = distances_at(points, expected, path, np.array([0.0, 1.0, 3.0]))
    np.testing.assert_allclose(found, [0.4, 0.1, 0.3, 0.2, 0.5, 0.6])
