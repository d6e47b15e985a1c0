"""Shares that add up: what each player of a game is worth, where players belong to groups.

The Shapley value gives each player the mean, over all orders in which the players may come, of what it adds when it
comes (L. S. Shapley, "A value for n-person games", 1953). Where players belong to groups, the Owen value counts only
the orders in which the members of a group come one after the other (G. Owen, "Values of games with a priori unions",
1977): the members of a group then share exactly what the group itself has in the Shapley value of the game between the
groups. A group of one is a player as in Shapley's game.

A coalition is a tuple of sets, one a group: the places of its members that take part.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from itertools import combinations, product
from math import comb

import numpy as np

from armeval.arrays import FloatArray

Coalition = tuple[frozenset[int], ...]


def coalitions(sizes: Sequence[int]) -> list[Coalition]:
    """List the coalitions whose worth the Owen value asks for: at most one group takes part with some members only.

    Parameters
    ----------
    sizes
        Number of players in each group.
    """
    whole = [(frozenset[int](), frozenset(range(size))) for size in sizes]
    found = list(product(*whole))
    for group, size in enumerate(sizes):
        parts = [part for part in _subsets(range(size)) if 0 < len(part) < size]
        others = list(product(*whole[:group], (frozenset[int](),), *whole[group + 1 :]))
        found += [(*other[:group], part, *other[group + 1 :]) for part in parts for other in others]
    return found


def owen_value(sizes: Sequence[int], worth: Mapping[Coalition, FloatArray]) -> list[FloatArray]:
    """Share the worth of all players together among them.

    Parameters
    ----------
    sizes
        Number of players in each group, each at least one.
    worth
        Of every coalition that :func:`coalitions` lists, arrays of equal shape w: w games played at once.

    Returns
    -------
    One array a group, of shape (size, *w): the share of each of its players. All shares add up to the worth of all
    players less that of nobody.
    """
    groups = len(sizes)
    shares = []
    for group, size in enumerate(sizes):
        others = [range(2) if other != group else range(1) for other in range(groups)]
        own = []
        for player in range(size):
            share = np.zeros_like(np.asarray(worth[tuple(frozenset[int]() for _ in sizes)], dtype=np.float64))
            for present in product(*others):
                weight = 1.0 / (groups * comb(groups - 1, sum(present)))
                around = [
                    frozenset(range(n)) if here else frozenset[int]() for n, here in zip(sizes, present, strict=True)
                ]
                for before in _subsets(p for p in range(size) if p != player):
                    without = (*around[:group], before, *around[group + 1 :])
                    with_it = (*around[:group], before | {player}, *around[group + 1 :])
                    part = 1.0 / (size * comb(size - 1, len(before)))
                    share += weight * part * (worth[with_it] - worth[without])
            own.append(share)
        shares.append(np.stack(own))
    return shares


def _subsets(members: Sequence[int] | Iterator[int]) -> Iterator[frozenset[int]]:
    whole = list(members)
    for size in range(len(whole) + 1):
        yield from map(frozenset, combinations(whole, size))
