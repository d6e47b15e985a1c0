import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from armeval.kernels.still import within_width


def longest_stretches(signal, width):
    """Every stretch that keeps within the width and cannot be made longer, by trying all of them."""
    found = []
    k = len(signal)
    for a in range(k):
        b = a + 1
        while b < k and np.ptp(signal[a : b + 1]) <= width:
            b += 1
        if not found or b > found[-1][1]:
            found.append((a, b))
    return found


@settings(max_examples=200, deadline=None)
@given(st.lists(st.integers(0, 4), min_size=1, max_size=40), st.integers(0, 2))
def test_every_stretch_is_as_long_as_it_can_be(values, width):
    signal = np.array(values, dtype=float)
    possible = longest_stretches(signal, width)
    for first, stop in within_width(signal, float(width)):
        assert (first, stop) in possible


@settings(max_examples=200, deadline=None)
@given(st.lists(st.integers(0, 4), min_size=1, max_size=40))
def test_without_width_the_stretches_are_the_pieces_of_equal_values(values):
    signal = np.array(values, dtype=float)
    edges = np.flatnonzero(np.diff(signal)) + 1
    pieces = list(zip([0, *edges], [*edges, len(signal)], strict=True))
    assert [tuple(s) for s in within_width(signal, 0.0)] == pieces


@settings(max_examples=200, deadline=None)
@given(st.lists(st.integers(0, 4), min_size=1, max_size=40), st.integers(0, 2))
def test_a_longest_stretch_of_all_is_not_passed_over(values, width):
    signal = np.array(values, dtype=float)
    lengths = [b - a for a, b in longest_stretches(signal, width)]
    assert max(b - a for a, b in within_width(signal, float(width))) == max(lengths)


@pytest.mark.parametrize("size", [1, 2])
def test_a_short_signal_is_one_stretch(size):
    assert within_width(np.zeros(size), 0.5).tolist() == [[0, size]]
