import numpy as np

from armeval.kernels.distances import distances


def test_distances_are_norms():
    first, second = np.random.default_rng(0).standard_normal((2, 40, 3))
    np.testing.assert_allclose(distances(first, second), np.linalg.norm(first - second, axis=1))
