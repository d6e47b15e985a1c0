"""Shares of a whole: the axioms that single them out, and all orders of coming counted one by one."""

from itertools import permutations

import numpy as np
import pytest

from armeval.evaluate.replaying.owen_value import coalitions, owen_value


def random_worths(sizes, rng):
    return {coalition: rng.normal(size=2) for coalition in coalitions(sizes)}


def over_all_orders(sizes, worth):
    """Mean of what each player adds when it comes, over all orders that keep each group together."""
    groups = [[(g, p) for p in range(size)] for g, size in enumerate(sizes)]
    orders = [[]]
    for _ in groups:
        orders = [order + list(own) for order in orders for g in groups if g[0] not in order for own in permutations(g)]
    added = {player: [] for group in groups for player in group}
    for order in orders:
        come = [set() for _ in sizes]
        for group, player in order:
            before = worth[tuple(map(frozenset, come))]
            come[group].add(player)
            added[group, player].append(worth[tuple(map(frozenset, come))] - before)
    return [np.array([np.mean(added[g, p], axis=0) for p in range(size)]) for g, size in enumerate(sizes)]


@pytest.mark.parametrize("sizes", [(1,), (3,), (1, 1, 1), (2, 1), (3, 2, 1), (2, 2, 1, 1)])
def test_shares_are_the_mean_over_all_orders(sizes):
    worth = random_worths(sizes, np.random.default_rng(1))
    for found, expected in zip(owen_value(sizes, worth), over_all_orders(sizes, worth), strict=True):
        assert found == pytest.approx(expected, abs=1e-12)


def test_shares_add_up_to_the_whole_less_what_nobody_has():
    sizes = (3, 1, 2, 1)
    worth = random_worths(sizes, np.random.default_rng(2))
    whole, nothing = worth[tuple(frozenset(range(n)) for n in sizes)], worth[tuple(frozenset() for _ in sizes)]
    assert sum(share.sum(axis=0) for share in owen_value(sizes, worth)) == pytest.approx(whole - nothing, abs=1e-12)


def test_a_group_shares_what_it_would_have_as_one_player():
    sizes = (3, 1, 2)
    worth = random_worths(sizes, np.random.default_rng(3))
    as_one = {
        c: worth[tuple(frozenset(range(n)) if part else part for n, part in zip(sizes, c, strict=True))]
        for c in coalitions((1, 1, 1))
    }
    for members, one in zip(owen_value(sizes, worth), owen_value((1, 1, 1), as_one), strict=True):
        assert members.sum(axis=0) == pytest.approx(one[0], abs=1e-12)


def test_who_adds_nothing_has_nothing_and_equals_have_equal_shares():
    # Worth: 1 for the first player, 3 for the second and third together; the fourth adds nothing.
    worth = {c: np.array([len(c[0]) + 3.0 * (len(c[1]) == 2)]) for c in coalitions((1, 2, 1))}
    first, pair, idle = owen_value((1, 2, 1), worth)
    assert first[0, 0] == pytest.approx(1.0)
    assert pair[:, 0] == pytest.approx([1.5, 1.5])
    assert idle[0, 0] == 0.0


def test_only_coalitions_with_one_group_in_parts_are_asked_for():
    listed = coalitions((3, 3, 1, 1, 1, 1))
    assert len(listed) == len(set(listed)) == 2**6 + 2 * 6 * 2**5
    assert all(sum(0 < len(part) < n for part, n in zip(c, (3, 3, 1, 1, 1, 1), strict=True)) <= 1 for c in listed)
