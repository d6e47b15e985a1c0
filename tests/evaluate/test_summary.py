import numpy as np
import pytest

from armeval.errors import InputError
from armeval.evaluate.summary import summarise


def test_figures_of_a_row_of_errors():
    found = summarise([np.array([3e-3, 1e-3, 2e-3]), np.array([5e-3, 4e-3])])
    assert found.rms == pytest.approx(np.sqrt(11.0) * 1e-3)
    assert (found.mean, found.median, found.max) == pytest.approx((3e-3, 3e-3, 5e-3))
    assert found.p95 == pytest.approx(4.8e-3)
    assert found.samples == 5


def test_the_errors_are_left_as_they_were():
    errors = np.array([3e-3, 1e-3, 2e-3])
    summarise([errors])
    np.testing.assert_array_equal(errors, [3e-3, 1e-3, 2e-3])


def test_read_only_and_strided_errors_will_do():
    errors = np.random.default_rng(0).uniform(0.0, 1.0, (100, 3))
    errors.setflags(write=False)
    assert summarise([errors[:, 1]]).mean == pytest.approx(errors[:, 1].mean())


def test_there_are_never_more_effective_samples_than_samples():
    errors = np.random.default_rng(1).uniform(0.0, 1.0, 500)
    assert 0.0 < summarise([errors]).effective_samples <= 500


@pytest.mark.parametrize("laps", [[], [np.empty(0)]])
def test_no_sample_at_all_is_refused(laps):
    with pytest.raises(InputError, match="no sample"):
        summarise(laps)
