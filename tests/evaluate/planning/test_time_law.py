"""Trapezoidal speed: durations and speeds that can be worked out by hand."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from armeval.errors import InputError
from armeval.evaluate.planning.time_law import servo_times, trapezoid


def test_a_long_stretch_takes_length_over_feed_plus_feed_over_acceleration():
    time, arc = trapezoid(np.array([0.0, 0.3]), 0.06, 0.5, 1e-3)
    assert time[-1] == pytest.approx(0.3 / 0.06 + 0.06 / 0.5)
    assert arc[0] == 0.0
    assert arc[-1] == 0.3
    assert np.interp(0.06, time, arc) == pytest.approx(0.5 * 0.5 * 0.06**2)
    assert np.interp(1.0, time, arc) == pytest.approx(0.06 * (1.0 - 0.5 * 0.12))


def test_a_short_stretch_never_gets_to_the_feed():
    time, arc = trapezoid(np.array([0.0, 0.002]), 0.06, 0.5, 1e-4)
    assert time[-1] == pytest.approx(2.0 * np.sqrt(0.002 / 0.5), abs=1e-4)
    assert np.diff(arc).max() / 1e-4 == pytest.approx(np.sqrt(0.002 * 0.5), rel=1e-2)


def test_it_stands_still_at_every_stop():
    corners = np.array([0.0, 0.1, 0.103, 0.25])
    arc = trapezoid(corners, 0.05, 1.0, 1e-4)[1]
    speed = np.diff(arc) / 1e-4
    for stop in corners[1:-1]:
        k = int(np.searchsorted(arc, stop))
        assert speed[k - 1 : k + 1].min() < 1.0 * 1e-4


@given(
    lengths=st.lists(st.floats(1e-4, 0.5), min_size=1, max_size=6),
    feed=st.floats(0.005, 0.5),
    acceleration=st.floats(0.05, 10.0),
)
def test_feed_and_acceleration_are_never_exceeded(lengths, feed, acceleration):
    period = 1e-3
    corners = np.concatenate([[0.0], np.cumsum(lengths)])
    time, arc = trapezoid(corners, feed, acceleration, period)
    speed = np.diff(arc) / period
    assert speed.min() >= 0.0
    assert speed.max() <= feed * (1.0 + 1e-6)
    assert np.abs(np.diff(speed)).max(initial=0.0) / period <= acceleration * (1.0 + 1e-6) + 1e-6
    assert arc[-1] == corners[-1]
    assert np.diff(time) == pytest.approx(period)


def test_times_end_with_the_first_period_after_the_motion():
    assert servo_times(0.01, 1e-3)[-1] == pytest.approx(0.01)
    assert servo_times(0.0101, 1e-3)[-1] == pytest.approx(0.011)


def test_a_feed_in_the_wrong_unit_is_refused_before_it_fills_the_memory():
    with pytest.raises(InputError, match="servo periods"):
        trapezoid(np.array([0.0, 1.0]), 1e-6, 1.0, 1e-3)
