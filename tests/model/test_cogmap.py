import numpy as np
import pytest

from armeval.errors import InputError
from armeval.model.cogmap import CogMap

ANGLE = 2.0 * np.pi * np.arange(64) / 64


def test_the_map_between_its_entries_is_the_harmonic_that_it_holds() -> None:
    cog_map = CogMap(torque=0.02 * np.sin(12 * ANGLE + 0.4))
    anywhere = np.array([[0.123, 1.9], [-4.0, 77.0]])
    np.testing.assert_allclose(cog_map.at(anywhere), 0.02 * np.sin(12 * anywhere + 0.4), atol=1e-15)


def test_the_map_at_its_entries_is_the_entries() -> None:
    torque = np.random.default_rng(1).standard_normal(64)
    np.testing.assert_allclose(CogMap(torque=torque).at(ANGLE), torque, atol=1e-13)
    np.testing.assert_allclose(CogMap(torque=torque[:63]).at(2 * np.pi * np.arange(63) / 63), torque[:63], atol=1e-13)


def test_peak_to_peak_and_rms_of_a_sine_are_twice_the_amplitude_and_its_root_half() -> None:
    cog_map = CogMap(torque=0.02 * np.sin(4 * ANGLE))
    assert cog_map.peak_to_peak == pytest.approx(0.04)
    assert cog_map.rms == pytest.approx(0.02 / np.sqrt(2.0))


def test_a_spectrum_ends_at_the_bandwidth() -> None:
    cog_map = CogMap(torque=np.cos(4 * ANGLE), bandwidth=10)
    assert cog_map.spectrum.shape == (11,)
    assert cog_map.spectrum[4] == pytest.approx(0.5)


@pytest.mark.parametrize("torque", [np.zeros(7), np.full(16, np.nan), np.zeros((4, 4))])
def test_what_is_no_table_is_refused(torque: np.ndarray) -> None:
    with pytest.raises(InputError):
        CogMap(torque=torque)


def test_a_bandwidth_beyond_the_entries_is_refused() -> None:
    with pytest.raises(InputError, match="bandwidth is 33"):
        CogMap(torque=np.zeros(64), bandwidth=33)


def test_entries_cannot_be_changed() -> None:
    with pytest.raises(ValueError, match="read-only"):
        CogMap(torque=np.zeros(64)).torque[0] = 1.0
