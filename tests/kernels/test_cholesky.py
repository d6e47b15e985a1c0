"""Small systems solved in place, against numpy."""

import numpy as np
import pytest

from armeval.kernels.cholesky import factor_in_place, solve_in_place


@pytest.mark.parametrize("size", [1, 2, 5, 8])
def test_the_solution_is_numpys(size):
    rng = np.random.default_rng(size)
    root = rng.normal(size=(size, size))
    A = root @ root.T + 0.1 * np.eye(size)
    b = rng.normal(size=size)
    truth = np.linalg.solve(A, b)
    assert factor_in_place(A)
    solve_in_place(A, b)
    assert b == pytest.approx(truth, rel=1e-9)


@pytest.mark.parametrize("matrix", [[[0.0]], [[1.0, 2.0], [2.0, 1.0]], [[1.0, 0.0], [0.0, -1e-9]], [[np.nan]]])
def test_a_matrix_that_is_not_positive_definite_is_noticed(matrix):
    assert not factor_in_place(np.array(matrix))
