"""Cogging that compensation leaves, against the map and the table themselves."""

from dataclasses import replace

import numpy as np
import pytest

from armeval.evaluate.cogging.cog_loss import compensation_table, lookup, order_residual
from armeval.evaluate.cogging.net_cogging import net_cogging, pitch
from armeval.kernels.periodic import periodic_slopes, periodic_values
from armeval.model.cogmap import CogMap
from armeval.model.trial import Compensation
from tests.planar_arms import harmonic_map, planar_arm

ORDER, AMPLITUDE = 84, 0.02
ANGLE = np.random.default_rng(3).uniform(-9.0, 9.0, 4000)


def arm():
    return planar_arm((0.2,), (0.0,), cog_map=harmonic_map(ORDER, AMPLITUDE))


def test_without_compensation_it_is_the_map():
    table = net_cogging(arm())[0]
    assert periodic_values(table, ANGLE) == pytest.approx(-AMPLITUDE * np.sin(ORDER * ANGLE), abs=1e-9)
    slope = -AMPLITUDE * ORDER * np.cos(ORDER * ANGLE)
    assert periodic_slopes(table, ANGLE) == pytest.approx(slope, abs=1e-5)


@pytest.mark.parametrize("index_error", [0.0, np.radians(0.1)])
def test_with_compensation_it_is_the_map_less_the_table_looked_up(index_error):
    compensation = Compensation(table_bins=1000, index_error=index_error, map_noise=0.0)
    table = net_cogging(arm(), compensated=True, compensation=compensation)[0]
    stored = compensation_table(arm().drives[0].cog_map, compensation)
    left = -AMPLITUDE * np.sin(ORDER * ANGLE) - lookup(stored, ANGLE + index_error, "linear")
    # With an index error, kinks lie between the entries of our table and are rounded off there.
    assert periodic_values(table, ANGLE) == pytest.approx(left, abs=4e-3 * AMPLITUDE)


@pytest.mark.parametrize(("interpolation", "tolerance"), [("linear", 5e-3), ("nearest", 0.04)])
def test_what_is_left_has_the_rms_of_the_closed_form(interpolation, tolerance):
    # Steps between bins are spread over a sixteenth of a bin, which takes some 3 % off the RMS of a stepped table.
    compensation = Compensation(1024, interpolation, index_error=np.radians(0.1), map_noise=0.0)
    table = net_cogging(arm(), compensated=True, compensation=compensation)[0]
    share = order_residual(ORDER, bins=1024, interpolation=interpolation, angle_error=compensation.index_error)
    even = 2.0 * np.pi * (np.arange(100_000) + 0.5) / 100_000
    rms = np.sqrt(np.mean(periodic_values(table, even) ** 2))
    assert rms == pytest.approx(share * AMPLITUDE / np.sqrt(2.0), rel=tolerance)


def test_the_slope_of_an_interpolated_table_is_that_of_what_is_left():
    compensation = Compensation(table_bins=1024, map_noise=0.0)
    table = net_cogging(arm(), compensated=True, compensation=compensation)[0]
    # Between two bins the table is straight: the slope is that of the map less the rise over the bin.
    bins = 1024
    middle = 2.0 * np.pi * (np.arange(bins) + 0.5) / bins
    stored = compensation_table(arm().drives[0].cog_map, compensation)
    rise = (np.roll(stored, -1) - stored) / (2.0 * np.pi / bins)
    slope = -AMPLITUDE * ORDER * np.cos(ORDER * middle) - rise
    assert periodic_slopes(table, middle) == pytest.approx(slope, abs=1e-4 * AMPLITUDE * ORDER)


def test_a_stepped_table_has_its_slope_over_one_bin():
    compensation = Compensation(1024, "nearest", map_noise=0.0)
    slope = net_cogging(arm(), compensated=True, compensation=compensation)[0][:, 1]
    # Over a bin the steps take off nearly all the slope; without them it would be the map's, 84 x 0.02.
    assert np.abs(slope).max() < 0.3 * AMPLITUDE * ORDER


def test_the_tables_noise_is_the_replays_with_the_same_seed():
    compensation = Compensation(table_bins=256, map_noise=1e-3)
    stored = compensation_table(arm().drives[0].cog_map, compensation, np.random.default_rng(5))
    table = net_cogging(arm(), compensated=True, compensation=compensation, seed=5)[0]
    nodes = 2.0 * np.pi * np.arange(256) / 256
    assert periodic_values(table, nodes) == pytest.approx(-AMPLITUDE * np.sin(ORDER * nodes) - stored, abs=1e-9)


def test_a_drive_without_a_map_has_none():
    bare = planar_arm((0.2,), (0.0,))
    assert not net_cogging(bare)[0].any()
    assert not net_cogging(bare, compensated=True)[0].any()


def test_the_pitch_is_that_of_the_strongest_order():
    angle = 2.0 * np.pi * np.arange(1024) / 1024
    both = CogMap(0.01 * np.sin(12 * angle) + 0.02 * np.sin(36 * angle))
    assert pitch(both) == pytest.approx(2.0 * np.pi / 36)
    assert pitch(replace(both, torque=0.01 * np.sin(12 * angle))) == pytest.approx(2.0 * np.pi / 12)
    assert pitch(None) == pytest.approx(2.0 * np.pi)
