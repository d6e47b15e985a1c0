"""What a cog map owes to its noise is not predicted of the rotor."""

from dataclasses import replace

import numpy as np
import pytest

from armeval.evaluate.cogging.cog_loss import compensation_table
from armeval.evaluate.cogging.modelled_arm import modelled
from armeval.evaluate.plan import plan
from armeval.evaluate.predict import predict
from armeval.evaluate.replaying.sticking_ratio import sticking_ratio
from armeval.model.planned_path import PlannedPath
from armeval.model.trial import Compensation, Run, Trial
from tests.planar_arms import harmonic_map, planar_arm

ORDER, AMPLITUDE, NOISE = 84, 0.02, 0.002
CLEAN = harmonic_map(ORDER, AMPLITUDE)


def noisy_map(seed=0):
    entries = np.random.default_rng(seed).normal(scale=NOISE, size=len(CLEAN.torque))
    return replace(CLEAN, torque=CLEAN.torque + entries, noise=NOISE, bandwidth=2048)


def arm(cog_map):
    return planar_arm((0.2, 0.2), (0.2, 0.9), cog_map=cog_map, stiffness=3.0, damping=0.05, rotor_inertia=2e-4)


PATH = PlannedPath(np.array([[0.2, 0.9], [0.5, 0.6]]), space="joint", time=np.array([0.0, 3.0]))


def prediction(cog_map):
    trial = Trial("noise", arm(cog_map), PATH, (Run("bare", compensated=False),))
    return predict(trial).run("bare")


def test_noise_raises_neither_sticking_ratio_nor_predicted_error():
    # What stands out of the noise still carries the noise of its own order: 0.002 sqrt(2 / 4096) N m, 0.2 %.
    noisy, clean = prediction(noisy_map()), prediction(CLEAN)
    assert noisy.ratio.max == pytest.approx(clean.ratio.max, rel=0.01)
    assert noisy.errors.tracking.rms == pytest.approx(clean.errors.tracking.rms, rel=0.01)
    assert noisy.slow.tracking_rms == pytest.approx(clean.slow.tracking_rms, rel=0.01)


def test_taken_as_it_is_the_noise_would_have_raised_the_sticking_ratio():
    trajectory = plan(arm(CLEAN), PATH)
    with_noise, clean = (sticking_ratio(arm(each), trajectory).max for each in (noisy_map(), CLEAN))
    assert np.all(np.asarray(with_noise) > 2.0 * np.asarray(clean))


def test_the_firmwares_table_gets_the_noise_back():
    known = modelled(arm(noisy_map())).drives[0].cog_map
    assert known.noise == NOISE
    bins = 4096
    table = compensation_table(known, Compensation(table_bins=bins), np.random.default_rng(1))
    added = table - known.at(2.0 * np.pi * np.arange(bins) / bins)
    assert np.std(added) == pytest.approx(NOISE, rel=0.05)


def test_joints_without_a_map_stay_as_they_are():
    given = arm(None)
    assert modelled(given).drives == given.drives
