"""A pure delay tau at speed v on a straight path: timed error v tau, nothing across, lag v tau (derived)."""

import numpy as np
import pytest

from armeval.evaluate.run_errors import run_errors
from tests.slides import along, delayed, lap_of

STRAIGHT = [[0.0, 0.02, 0.01], [0.6, 0.02, 0.01]]


@pytest.mark.parametrize(("feed", "delay"), [(0.1, 0.020), (0.06, 0.005), (0.25, 0.0015)])
def test_a_delay_on_a_straight_path(feed, delay):
    trajectory = along(STRAIGHT, feed=feed, rest=0.0)
    found = run_errors([lap_of(trajectory, delayed(trajectory, delay))], trajectory)
    begun = trajectory.time >= delay
    track = found.tracks[0]
    np.testing.assert_allclose(track.tracking[begun], feed * delay, rtol=1e-9)
    np.testing.assert_allclose(track.lag[begun], feed * delay, rtol=1e-9)
    np.testing.assert_allclose(track.deviation, 0.0, atol=1e-12)
    assert found.tracking.median == pytest.approx(feed * delay)
    assert found.deviation.max == pytest.approx(0.0, abs=1e-12)
    assert found.components.across_max == pytest.approx(0.0, abs=1e-10)
    assert found.components.lag_time == pytest.approx(delay, rel=0.01)
    assert found.components.lag_max == pytest.approx(feed * delay)


def test_two_millimetres_at_a_tenth_of_a_metre_a_second():
    trajectory = along(STRAIGHT, feed=0.1)
    assert run_errors([lap_of(trajectory, delayed(trajectory, 0.020))]).tracking.max == pytest.approx(2e-3)


def test_an_arm_that_runs_ahead_has_a_negative_lag():
    trajectory = along(STRAIGHT, feed=0.1)
    found = run_errors([lap_of(trajectory, delayed(trajectory, -0.010))], trajectory)
    assert found.components.lag_time == pytest.approx(-0.010, rel=0.01)
    assert found.components.along_mean > 0.0
