"""Block lengths and interval factors against published values.

Politis & White 2004, Econometric Reviews 23(1), 53-70, with Patton, Politis & White 2009, 28(4), 372-375. The series
and its values 13.635665 and 15.60894 are those of the test suite of the `arch` library (read there), itself checked
against the authors' own program. The limit for an AR(1) series and its effective sample sizes follow from the
definitions (derived). Chi-square factors of an RMS are textbook material.
"""

import numpy as np
import pytest
from scipy import stats
from scipy.signal import lfilter

from armeval.evaluate.measuring.intervals import block_length, rms_bootstrap, rms_interval


def autoregressive(seed, correlation, samples):
    noise = np.random.default_rng(seed).standard_normal(samples + 1000)
    return lfilter([1.0], [1.0, -correlation], noise)[1000:]


def test_block_lengths_of_the_published_series():
    series = np.random.RandomState(0).standard_normal(10_100)
    for i in range(1, len(series)):
        series[i] += 0.3 * series[i - 1]
    found = block_length(series[100:])
    assert found.stationary == pytest.approx(13.635665, rel=1e-6)
    assert found.circular == pytest.approx(15.60894, rel=1e-6)


@pytest.mark.parametrize("correlation", [0.3, 0.6, 0.9])
def test_block_length_tends_to_the_limit_of_an_autoregressive_series(correlation):
    samples = 500_000
    # For correlation 0.9 and 1000 samples this limit is 44.7726.
    limit = (2.0 * correlation / (1.0 - correlation**2)) ** (2.0 / 3.0) * samples ** (1.0 / 3.0)
    found = block_length(autoregressive(1, correlation, samples))
    assert found.stationary == pytest.approx(limit, rel=0.1)
    assert found.circular == pytest.approx(1.5 ** (1.0 / 3.0) * limit, rel=0.1)


def test_long_run_variance_of_an_autoregressive_series():
    assert block_length(autoregressive(2, 0.9, 1_000_000)).variance == pytest.approx(1.0 / (1.0 - 0.9) ** 2, rel=0.05)


@pytest.mark.parametrize(("samples", "low", "high"), [(30, 0.799112, 1.336673), (100, 0.878542, 1.160737)])
def test_chi_square_factors_of_an_rms_are_met_on_average_by_independent_errors(samples, low, high):
    ends = stats.chi2.ppf([0.975, 0.025], samples)
    assert np.sqrt(samples / ends) == pytest.approx((low, high), abs=1e-6)
    found = []
    for seed in range(300):
        errors = np.abs(np.random.default_rng(seed).standard_normal(samples))
        found.append(np.array(rms_interval([errors])) / np.sqrt(np.mean(errors**2)))
    # A bootstrap knows nothing of the normal distribution, so it only comes near.
    assert np.median(found, axis=0) == pytest.approx((low, high), rel=0.06)


def test_effective_sample_size_of_an_autoregressive_series():
    # n (1 - rho^2) / (1 + rho^2) for a mean square, rho = 0.9: 104.97 of 1000.
    shares = [
        rms_bootstrap([np.abs(autoregressive(seed, 0.9, 100_000))]).effective_samples / 100_000 for seed in range(20)
    ]
    assert np.mean(shares) == pytest.approx(0.10497, rel=0.1)
