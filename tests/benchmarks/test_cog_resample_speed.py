"""How long it takes to bring a map as large as the largest open one (31,700 uneven samples) onto the circle."""

import numpy as np
from pytest_benchmark.fixture import BenchmarkFixture

from armeval.evaluate.cogging.cog_orders import detents, orders
from armeval.evaluate.cogging.cog_resample import resample


def test_resampling_31700_uneven_samples_in_two_directions(benchmark: BenchmarkFixture) -> None:
    rng = np.random.default_rng(0)
    steps = np.repeat(np.arange(3170) * (2.0 * np.pi / 3170), 5)
    angle = np.concatenate([steps, steps[::-1]]) + 5e-4 * np.round(rng.standard_normal(31_700))
    direction = np.repeat([1.0, -1.0], 15_850)
    torque = 0.02 * np.sin(72 * angle) - 0.003 * direction + 1e-3 * rng.standard_normal(31_700)
    cog_map, _ = benchmark(resample, angle, torque, direction, quantity="cog_torque")
    assert cog_map.bandwidth > 300


def test_orders_and_detents_of_a_map(benchmark: BenchmarkFixture) -> None:
    angle = 2.0 * np.pi * np.arange(1024) / 1024
    torque = 0.02 * np.sin(84 * angle) + 1e-4 * np.random.default_rng(0).standard_normal(1024)
    cog_map, _ = resample(angle, torque, None, quantity="cog_torque")
    found = benchmark(lambda: (orders(cog_map), detents(cog_map)))
    assert len(found[1]) == 84
