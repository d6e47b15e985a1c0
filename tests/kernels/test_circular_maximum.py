"""Largest values on arcs of a circle, against looking at every entry."""

import numpy as np
from hypothesis import given
from hypothesis import strategies as st

from armeval.kernels.circular_maximum import largest_on_arcs


@given(
    size=st.integers(1, 70),
    low=st.floats(-20.0, 20.0),
    width=st.floats(0.0, 9.0),
    seed=st.integers(0, 1000),
)
def test_it_is_the_largest_entry_on_the_arc(size, low, width, seed):
    values = np.random.default_rng(seed).normal(size=size)
    first = int(np.floor(low * size / (2.0 * np.pi)))
    last = int(np.ceil((low + width) * size / (2.0 * np.pi)))
    truth = max(values[k % size] for k in range(first, last + 1))
    assert largest_on_arcs(values, np.array([low]), np.array([low + width]))[0] == truth


def test_no_arcs_give_no_values():
    assert largest_on_arcs(np.ones(8), np.empty(0), np.empty(0)).shape == (0,)
