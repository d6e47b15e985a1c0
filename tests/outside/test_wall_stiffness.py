"""Bounds of virtual walls, and what is noticed of a vibration, by published formulas.

Colgate & Schenkel 1994/97 (from memory): K = 1000 N/m at 1 ms takes b = 0.5 N s/m, with B = 0.2 N s/m 0.7 N s/m. Abbott
& Okamura 2005 (formula from memory): b = 0.3 N s/m, T = 1 ms, f_c = 0.05 N, step 0.1 mm give min(600, 1000) N/m.
0.1 um at 160 Hz is 0.101065 m/s^2. Pang, Tan & Durlach 1991 (abstract): 7 % of 2.5 to 10 N.
"""

from __future__ import annotations

import numpy as np
import pytest

from armeval.evaluate.feeling.perception import noticed
from armeval.evaluate.feeling.wall_stiffness import least_damping, stiffest_by_damping, stiffest_by_friction
from armeval.files.thresholds_file import read_thresholds


def test_damping_keeps_a_wall_passive_as_colgate_and_schenkel_say():
    assert least_damping(1000.0, 1e-3) == pytest.approx(0.5)
    assert least_damping(1000.0, 1e-3, 0.2) == pytest.approx(0.7)
    assert least_damping(1000.0, 1e-3, -0.2) == pytest.approx(0.7)
    assert stiffest_by_damping(0.7, 1e-3, 0.2) == pytest.approx(1000.0)
    assert stiffest_by_damping(0.1, 1e-3, 0.2) == 0.0


def test_friction_and_encoder_step_bound_it_as_abbott_and_okamura_say():
    by_damping, by_friction = stiffest_by_damping(0.3, 1e-3), stiffest_by_friction(0.05, 1e-4)
    assert (float(by_damping), float(by_friction)) == pytest.approx((600.0, 1000.0))
    assert np.isinf(stiffest_by_friction(0.05, 0.0))


def test_seven_percent_of_the_force_is_noticed():
    seen = noticed(read_thresholds(), 3.0, rendered_force=5.0, apparent_mass=0.2)
    assert seen.by == "force"
    assert seen.force == pytest.approx(0.35)
    assert seen.low <= seen.force <= seen.high


def test_quick_ripple_is_noticed_as_vibration_of_what_shakes():
    thresholds = read_thresholds()
    seen = noticed(thresholds, 160.0, rendered_force=5.0, apparent_mass=0.2)
    mass = 0.2 + thresholds.hand_mass
    assert seen.by == "vibration"
    assert seen.force == pytest.approx(mass * 0.101065 * thresholds.vibration(160.0) / 1e-7, rel=1e-5)


def test_the_curve_falls_by_twelve_decibels_an_octave_from_40_to_250_hertz():
    thresholds = read_thresholds()
    assert thresholds.vibration(30.0) == pytest.approx(thresholds.vibration(40.0))
    fall = 20.0 * np.log10(thresholds.vibration(60.0) / thresholds.vibration(120.0))
    assert fall == pytest.approx(12.0, abs=0.3)


def test_outside_what_was_studied_nothing_is_claimed():
    seen = noticed(read_thresholds(), 2000.0, rendered_force=5.0, apparent_mass=0.2)
    assert seen.by == "none"
    assert np.isnan(seen.force)
    assert noticed(read_thresholds(), float("nan"), rendered_force=None, apparent_mass=0.2).by == "none"
