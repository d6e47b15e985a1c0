import numpy as np

from armeval.kernels.distances import distances, farthest


def test_distances_are_norms():
    first, second = np.random.default_rng(0).standard_normal((2, 40, 3))
    np.testing.assert_allclose(distances(first, second), np.linalg.norm(first - second, axis=1))


def test_the_farthest_point_from_a_polyline_at_known_arc_lengths():
    path = np.array([[0.0, 0.0, 0.0], [1.0, 0.0, 0.0], [1.0, 2.0, 0.0]])
    arc = np.array([0.0, 0.5, 1.0, 2.0, 3.0])
    points = np.array([[0.0, 0.0, 0.0], [0.5, 0.1, 0.0], [1.0, 0.0, 0.3], [1.0, 1.0, -0.2], [1.0, 2.0, 0.0]])
    distance, which = farthest(points, arc, path, np.array([0.0, 1.0, 3.0]))
    assert (distance, which) == (0.3, 2)
