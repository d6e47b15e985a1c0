import numpy as np
import pytest

from armeval.evaluate.measuring.criteria import components, lap_sums, over_laps, stretches
from tests.slides import along, lap_of

CORNER = along([[0.0, 0.0, 0.0], [0.1, 0.0, 0.0], [0.1, 0.2, 0.0]], feed=0.1)


def sums(error):
    return lap_sums(lap_of(CORNER, CORNER.tip + error), CORNER)


def test_the_same_offset_is_along_one_stretch_and_across_the_next():
    first, second = stretches(sums(np.array([3e-4, 0.0, 0.0])), CORNER.corners)
    assert first.components.along_mean == pytest.approx(3e-4)
    assert first.components.across_rms == pytest.approx(0.0, abs=1e-12)
    assert second.components.along_rms == pytest.approx(0.0, abs=1e-12)
    assert second.components.across_rms == pytest.approx(3e-4)
    assert (first.start, first.end, second.start, second.end) == pytest.approx((0.0, 0.1, 0.1, 0.3))


def test_along_and_across_make_up_the_tracking_error():
    error = 1e-3 * np.random.default_rng(0).standard_normal(CORNER.tip.shape)
    found = components(sums(error))
    assert found.along_rms**2 + found.across_rms**2 == pytest.approx(np.mean(np.sum(error**2, axis=1)))


def test_stretches_hold_all_samples_once():
    error = 1e-3 * np.random.default_rng(1).standard_normal(CORNER.tip.shape)
    found = stretches(sums(error), CORNER.corners)
    size = np.linalg.norm(error, axis=1)
    before = CORNER.arc < 0.1
    assert [stretch.samples for stretch in found] == [before.sum(), (~before).sum()]
    assert found[0].tracking_rms == pytest.approx(np.sqrt(np.mean(size[before] ** 2)))
    assert found[1].tracking_max == pytest.approx(size[~before].max())


def test_laps_join_to_what_all_their_samples_say():
    rng = np.random.default_rng(2)
    errors = [scale * rng.standard_normal(CORNER.tip.shape) for scale in (1e-4, 3e-4)]
    joined = over_laps([sums(error) for error in errors])
    found = stretches(joined, CORNER.corners)[0]
    before = CORNER.arc < 0.1
    sizes = np.concatenate([np.linalg.norm(error[before], axis=1) for error in errors])
    assert found.samples == len(sizes)
    assert found.tracking_rms == pytest.approx(np.sqrt(np.mean(sizes**2)))
    assert found.tracking_max == pytest.approx(sizes.max())


def test_a_stretch_without_samples_claims_nothing():
    dense = along([[0.0, 0.0, 0.0], [0.1005, 0.0, 0.0], [0.1005, 1e-5, 0.0], [0.2, 1e-5, 0.0]], feed=0.1, period=0.01)
    found = stretches(lap_sums(lap_of(dense, dense.tip), dense), dense.corners)
    empty = found[1]
    assert empty.samples == 0
    assert np.isnan([empty.tracking_rms, empty.tracking_max, empty.deviation_rms, empty.components.lag_time]).all()


def test_an_arm_that_stands_still_has_no_delay_to_speak_of():
    trajectory = along([[0.0, 0.0, 0.0], [0.1, 0.0, 0.0]], feed=0.1, rest=1.0)
    track = lap_of(trajectory, trajectory.tip)
    resting = trajectory.time < 0.9
    part = lap_sums(track, trajectory)
    assert part.samples.sum() == len(resting)
    assert components(part).lag_time == pytest.approx(0.0, abs=1e-12)
