import numpy as np
import pytest
from scipy.signal import lfilter

from armeval.evaluate.measuring.intervals import reduction_interval, rms_bootstrap, rms_interval

TRIALS = 200


def hanging_together(rng, correlation, samples, components=3):
    """Gaussian errors of unit variance in each component whose neighbours correlate: an AR(1) process, (3, k)."""
    noise = rng.standard_normal((components, samples + 1000))
    return lfilter([np.sqrt(1.0 - correlation**2)], [1.0, -correlation], noise, axis=1)[:, 1000:]


def norm(errors):
    return np.sqrt(np.sum(errors**2, axis=0))


def coverage(make, truth, trials=TRIALS):
    hits = 0
    for seed in range(trials):
        low, high = make(np.random.default_rng(seed))
        hits += low <= truth <= high
    return hits / trials


# Of 200 intervals that cover with 95 %, between 90 % and 98 % cover with more than 99 % chance.


@pytest.mark.parametrize(("correlation", "samples"), [(0.0, 400), (0.9, 1000), (0.99, 20_000)])
def test_an_interval_covers_the_true_rms_of_one_lap(correlation, samples):
    found = coverage(lambda rng: rms_interval([norm(hanging_together(rng, correlation, samples))]), np.sqrt(3.0))
    assert 0.90 <= found <= 0.98


def test_an_interval_covers_when_laps_have_nothing_in_common():
    found = coverage(
        lambda rng: rms_interval([norm(hanging_together(rng, 0.95, 4000)) for _ in range(3)]), np.sqrt(3.0)
    )
    assert 0.90 <= found <= 0.98


def test_an_interval_covers_when_most_of_the_error_comes_back_in_every_lap():
    def laps(rng):
        common = hanging_together(rng, 0.98, 5000)
        return rms_interval([norm(common + 0.3 * hanging_together(rng, 0.95, 5000)) for _ in range(3)])

    assert 0.90 <= coverage(laps, np.sqrt(3.0 * 1.09)) <= 0.98


def test_a_paired_reduction_covers_the_true_one():
    def runs(rng):
        common = hanging_together(rng, 0.98, 5000)
        before = [norm(common + 0.3 * hanging_together(rng, 0.95, 5000)) for _ in range(3)]
        after = [norm(0.5 * common + 0.3 * hanging_together(rng, 0.95, 5000)) for _ in range(3)]
        return reduction_interval(before, after)

    assert 0.90 <= coverage(runs, 1.0 - np.sqrt(0.34 / 1.09)) <= 0.98


def test_repeating_a_lap_tells_nothing_new():
    lap = norm(hanging_together(np.random.default_rng(5), 0.9, 3000))
    np.testing.assert_allclose(rms_interval([lap, lap, lap]), rms_interval([lap]), rtol=1e-9)


def test_laps_that_differ_as_a_whole_widen_the_interval():
    rng = np.random.default_rng(6)
    laps = [norm(hanging_together(rng, 0.9, 5000)) for _ in range(4)]
    scale = np.sqrt(np.mean(np.concatenate(laps) ** 2))
    level = [1.0, 1.15, 1.3, 1.45]
    drifting = [lap * k / np.sqrt(np.mean(lap**2)) * scale for lap, k in zip(laps, level, strict=True)]
    steady, widened = np.ptp(rms_interval(laps)), np.ptp(rms_interval(drifting))
    # Student's t with 3 degrees of freedom on the spread of the four levels, in log RMS.
    spread = 2.0 * 3.18 * np.std(np.log(level), ddof=1) / np.sqrt(4) * scale * np.mean(level)
    assert widened > 3.0 * steady
    assert widened == pytest.approx(spread, rel=0.2)


def test_the_same_errors_give_the_same_interval():
    lap = norm(hanging_together(np.random.default_rng(7), 0.9, 2000))
    assert rms_interval([lap]) == rms_interval([lap.copy()])


def test_a_higher_level_is_wider_and_both_hold_the_rms():
    lap = norm(hanging_together(np.random.default_rng(8), 0.9, 2000))
    rms = np.sqrt(np.mean(lap**2))
    ends = [*rms_interval([lap], level=0.99), *rms_interval([lap], level=0.8)]
    assert ends[0] < ends[2] < rms < ends[3] < ends[1]


def test_constant_errors_leave_nothing_open():
    np.testing.assert_allclose(rms_interval([np.full(500, 2e-3)]), 2e-3)


def test_no_error_at_all_has_an_interval_of_nothing():
    assert rms_interval([np.zeros(100)]) == (0.0, 0.0)


def test_a_single_sample_says_nothing_about_spread():
    assert np.isnan(rms_interval([np.array([1e-3])])).all()


@pytest.mark.parametrize("samples", [2, 3, 5, 8, 20])
def test_a_handful_of_samples_gives_a_finite_interval_about_the_rms(samples):
    lap = np.abs(np.random.default_rng(samples).standard_normal(samples))
    low, high = rms_interval([lap])
    assert 0.0 < low <= np.sqrt(np.mean(lap**2)) <= high < np.inf


def test_laps_of_unequal_length_weigh_by_their_samples():
    rng = np.random.default_rng(9)
    short, long = norm(hanging_together(rng, 0.5, 700)), 3.0 * norm(hanging_together(rng, 0.5, 2100))
    low, high = rms_interval([short, long])
    assert low < np.sqrt(np.mean(np.concatenate([short, long]) ** 2)) < high


def test_finer_sampling_of_the_same_errors_changes_the_interval_little():
    lap = norm(hanging_together(np.random.default_rng(10), 0.9, 4000))
    fine = np.repeat(lap, 25)
    np.testing.assert_allclose(rms_interval([fine]), rms_interval([lap]), rtol=0.01)
    assert rms_bootstrap([fine]).effective_samples == pytest.approx(rms_bootstrap([lap]).effective_samples, rel=0.15)


def test_a_run_against_itself_is_no_reduction_beyond_doubt():
    lap = norm(hanging_together(np.random.default_rng(11), 0.9, 2000))
    assert reduction_interval([lap], [lap]) == pytest.approx((0.0, 0.0), abs=1e-12)


def test_an_error_halved_everywhere_is_halved_beyond_doubt():
    rng = np.random.default_rng(12)
    common = hanging_together(rng, 0.9, 2000)
    laps = [norm(common + 0.3 * hanging_together(rng, 0.9, 2000)) for _ in range(3)]
    assert reduction_interval(laps, [0.5 * lap for lap in laps]) == pytest.approx((0.5, 0.5), abs=1e-9)


def test_pairing_goes_by_place_on_the_path_where_the_feed_differs():
    rng = np.random.default_rng(12)
    place = np.linspace(0.0, 1.0, 4000)
    lap = norm(hanging_together(rng, 0.99, 4000))
    arc = np.sort(rng.uniform(0.0, 1.0, 9000) ** 2)
    other = 0.5 * np.interp(arc, place, lap)
    # Twice as slow here, twice as fast there: by share of the lap the wrong places meet and doubt grows.
    paired = reduction_interval([lap], [other], [place], [arc])
    by_share = reduction_interval([lap], [other])
    assert np.ptp(paired) < 0.7 * np.ptp(by_share)
    reduction = 1.0 - np.sqrt(np.mean(other**2) / np.mean(lap**2))
    assert paired[0] < reduction < paired[1]


def test_an_error_that_vanished_is_a_reduction_of_one():
    lap = norm(hanging_together(np.random.default_rng(13), 0.9, 500))
    assert reduction_interval([lap], [np.zeros(500)]) == (1.0, 1.0)
