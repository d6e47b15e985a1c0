"""The Rayleigh test against published examples.

J. H. Zar, "Biostatistical analysis", 5th ed. 2010, example 27.1: eight angles, z = 5.448, 0.001 < P < 0.002; a
simulation gives 0.00165. astropy's documentation of ``rayleightest``: 130, 90, 0, 145 degrees, P = 0.2563.
"""

import numpy as np
import pytest

from armeval.evaluate.sticking.periodicity import rayleigh

ZAR = np.radians([45.0, 55.0, 81.0, 96.0, 110.0, 117.0, 132.0, 154.0])


def test_published_example_of_eight_angles():
    r, p = rayleigh(ZAR)
    assert r == pytest.approx(0.825218, abs=5e-7)
    assert len(ZAR) * r**2 == pytest.approx(5.448, abs=5e-4)
    assert 0.001 < p < 0.002
    assert p == pytest.approx(0.001651, abs=1.8e-5)


def test_published_example_of_four_angles():
    _, p = rayleigh(np.radians([130.0, 90.0, 0.0, 145.0]))
    assert p == pytest.approx(0.2563488, abs=5e-7)


def test_angles_without_preference_are_rarely_called_significant():
    rng = np.random.default_rng(5)
    p = np.array([rayleigh(rng.uniform(0.0, 2.0 * np.pi, 8))[1] for _ in range(4000)])
    for level in (0.01, 0.05, 0.5):
        spread = 4.0 * np.sqrt(level * (1.0 - level) / 4000)
        assert np.mean(p < level) == pytest.approx(level, abs=spread)
