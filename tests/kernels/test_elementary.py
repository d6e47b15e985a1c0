"""Sine, cosine and decay against numpy, which takes them from the C library."""

from __future__ import annotations

import numpy as np
import pytest

from armeval.arrays import FloatArray
from armeval.kernels.compile import jit
from armeval.kernels.elementary import decay, sine_cosine
from armeval.kernels.lanes import MARK, WIDTH, aligned_zeros, with_lanes
from armeval.kernels.records import Records


@jit
def sines_cosines(x: FloatArray, sine: FloatArray, cosine: FloatArray) -> None:
    for k in range(x.shape[0]):
        sine[k], cosine[k] = sine_cosine(x[k])


@jit
def decays(x: FloatArray, out: FloatArray) -> None:
    for k in range(x.shape[0]):
        out[k] = decay(x[k])


@jit
def in_lanes(given: Records) -> None:
    rows = with_lanes(given)
    for k in range(rows.shape[0]):
        rows[k]["sine"], rows[k]["cosine"] = sine_cosine(rows[k]["x"])
        rows[k]["decay"] = decay(abs(rows[k]["x"]))


@pytest.mark.parametrize("span", [1e-6, 1.0, 10.0, 1e3, 1e6])
def test_sine_and_cosine_are_those_of_the_library(span: float) -> None:
    x = np.concatenate([np.random.default_rng(3).uniform(-span, span, 50_000), [0.0, span, -span]])
    sine, cosine = np.empty_like(x), np.empty_like(x)
    sines_cosines(x, sine, cosine)
    np.testing.assert_allclose(sine, np.sin(x), rtol=0, atol=3e-16)
    np.testing.assert_allclose(cosine, np.cos(x), rtol=0, atol=3e-16)


def test_multiples_of_a_quarter_turn_are_right_to_rounding() -> None:
    x = np.arange(-1000, 1001) * (np.pi / 2)
    sine, cosine = np.empty_like(x), np.empty_like(x)
    sines_cosines(x, sine, cosine)
    np.testing.assert_allclose(sine, np.sin(x), rtol=0, atol=3e-16)
    np.testing.assert_allclose(cosine, np.cos(x), rtol=0, atol=3e-16)


def test_decay_is_the_exponential() -> None:
    x = np.concatenate([np.linspace(0.0, 40.0, 100_001), np.logspace(-12, 1, 1000)])
    out = np.empty_like(x)
    decays(x, out)
    np.testing.assert_allclose(out, np.exp(-x), rtol=1e-13)
    beyond = np.array([41.0, 1e4, 1e300, np.inf])
    out = np.empty_like(beyond)
    decays(beyond, out)
    assert (out < 5e-18).all()
    assert (out >= 0.0).all()


def test_lanes_give_what_single_numbers_give() -> None:
    row = (WIDTH,)
    given = aligned_zeros((100,), np.dtype([(name, float, row) for name in ("x", "sine", "cosine", "decay", MARK)]))
    given["x"] = np.random.default_rng(1).uniform(-20, 20, (100, WIDTH))
    in_lanes(given)
    x = given["x"].ravel()
    sine, cosine, out = np.empty_like(x), np.empty_like(x), np.empty_like(x)
    sines_cosines(x, sine, cosine)
    decays(np.abs(x), out)
    assert np.array_equal(given["sine"].ravel(), sine)
    assert np.array_equal(given["cosine"].ravel(), cosine)
    assert np.array_equal(given["decay"].ravel(), out)
