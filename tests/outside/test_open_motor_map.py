"""A standstill map of a real outrunner motor, measured by others.

Source: heitor-andrade/laas_anti_cogging at eb0391d736f1aaaf6cb0c72ea5a9b5c1350284c4, BSD 3-Clause, (c) 2023
heitor-andrade, file ``stopped_data.txt``: one turn forward and back in steps of 0.002 rad, five readings a step; the
current that held the rotor there. No torque constant is published: torque is told per N m/A. Skipped unless the
environment variable ARMEVAL_OPEN_DATA names the folder that holds ``motor-map/stopped_data.txt``.
"""

from __future__ import annotations

import os
from pathlib import Path

import numpy as np
import numpy.typing as npt
import pytest

from armeval.evaluate.cogging.cog_agreement import agreement
from armeval.evaluate.cogging.cog_orders import detents, orders
from armeval.evaluate.cogging.cog_resample import resample
from armeval.model.cogmap import CogMap

FloatArray = npt.NDArray[np.float64]
FOLDER = os.environ.get("ARMEVAL_OPEN_DATA")
FILE = Path(FOLDER or ".") / "motor-map" / "stopped_data.txt"
pytestmark = pytest.mark.skipif(not FOLDER or not FILE.exists(), reason="ARMEVAL_OPEN_DATA holds no motor-map")


@pytest.fixture(scope="module")
def readings() -> tuple[FloatArray, FloatArray, FloatArray]:
    """Angle [rad], current [A], and the turning direction: the target rises, turns back once, and falls."""
    table = np.genfromtxt(FILE, delimiter=",", skip_header=1)
    angle, current, target = table[:, 1], table[:, 3], table[:, 1] + table[:, 6]
    rising = np.arange(len(target)) <= np.argmax(target)
    return angle, current, np.where(rising, 1.0, -1.0)


@pytest.fixture(scope="module")
def cog_map(readings: tuple[FloatArray, FloatArray, FloatArray]) -> CogMap:
    angle, current, direction = readings
    return resample(angle, -current, direction, quantity="hold_current")[0]


def binned(angle: FloatArray, values: FloatArray, bins: int = 1000) -> FloatArray:
    """Mean of the values in each of the even bins over the turn."""
    place = (np.mod(angle, 2.0 * np.pi) * bins / (2.0 * np.pi)).astype(int)
    return np.bincount(place, values, bins) / np.bincount(place, minlength=bins)


def test_the_dominant_order_is_72(cog_map: CogMap) -> None:
    first, second = orders(cog_map)[:2]
    assert first.order == 72
    assert first.amplitude > 4.0 * second.amplitude


def test_the_file_is_one_turn_forward_and_back(
    readings: tuple[FloatArray, FloatArray, FloatArray], cog_map: CogMap
) -> None:
    assert cog_map.directions == 2
    assert cog_map.samples == len(readings[0]) == 31_666
    assert cog_map.widest_gap < np.radians(0.25)
    assert cog_map.noise_from == "repeats"


def test_friction_is_half_the_difference_of_the_directions_bin_by_bin(
    readings: tuple[FloatArray, FloatArray, FloatArray], cog_map: CogMap
) -> None:
    # the rotor rests more often in some stretches of a step than in others: a plain mean over readings is not the
    # mean over the turn, means over narrow bins are
    angle, current, direction = readings
    up, down = direction > 0.0, direction < 0.0
    half = 0.5 * (binned(angle[up], current[up]) - binned(angle[down], current[down]))
    assert cog_map.friction == pytest.approx(half.mean(), rel=0.02)


def test_cogging_is_the_mean_of_the_directions_bin_by_bin(
    readings: tuple[FloatArray, FloatArray, FloatArray], cog_map: CogMap
) -> None:
    angle, current, direction = readings
    up, down = direction > 0.0, direction < 0.0
    mean = -0.5 * (binned(angle[up], current[up]) + binned(angle[down], current[down]))
    centre = 2.0 * np.pi * (np.arange(1000) + 0.5) / 1000
    spectrum = 2.0 * np.fft.rfft(mean) / 1000
    assert cog_map.rms == pytest.approx(np.std(mean), rel=0.02)
    assert orders(cog_map)[0].amplitude == pytest.approx(abs(spectrum[72]) / np.sinc(0.072), rel=0.02)
    assert np.corrcoef(cog_map.at(centre), mean)[0, 1] > 0.99


def test_the_two_directions_are_the_same_motor(readings: tuple[FloatArray, FloatArray, FloatArray]) -> None:
    angle, current, direction = readings
    up, down = (
        resample(angle[side], -current[side], None, quantity="hold_current")[0]
        for side in (direction > 0.0, direction < 0.0)
    )
    found = agreement(up, down)
    assert found.correlation > 0.97
    assert abs(found.shift) < np.radians(0.25)


def test_one_turn_has_72_detents(cog_map: CogMap) -> None:
    assert detents(cog_map).size == 72
