"""The glove game (L. S. Shapley 1953, G. Owen 1977; from memory, worked out by hand again here).

One has a left glove, two have a right glove each; a pair is worth 1. Of the six orders of coming, the left glove
completes a pair in four: it comes second or third. Each right glove does so in one, right after the left: shares 2/3,
1/6, 1/6. If the left glove and the first right one act as one, the second right glove can never complete a pair. Inside
the union, before the second right glove has come, whoever is second completes the pair, 1/2 each; after it has come,
only the left glove does. Shares 3/4, 1/4, 0.
"""

import numpy as np
import pytest

from armeval.evaluate.replaying.owen_value import coalitions, owen_value


def pairs(left: int, right: int) -> np.ndarray:
    return np.array(float(min(left, right)))


def test_three_players_share_as_shapley_says():
    worth = {c: pairs(len(c[0]), len(c[1]) + len(c[2])) for c in coalitions((1, 1, 1))}
    shares = [float(share[0]) for share in owen_value((1, 1, 1), worth)]
    assert shares == pytest.approx([2.0 / 3.0, 1.0 / 6.0, 1.0 / 6.0])


def test_a_union_of_two_shares_as_owen_says():
    # First group: player 0 has the left glove, player 1 a right one.
    worth = {c: pairs(int(0 in c[0]), int(1 in c[0]) + len(c[1])) for c in coalitions((2, 1))}
    union, other = owen_value((2, 1), worth)
    assert union == pytest.approx(np.array([0.75, 0.25]))
    assert other == pytest.approx(np.array([0.0]))
