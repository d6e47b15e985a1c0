import numpy as np
import pytest

from armeval.kernels.block_bootstrap import studentised_shifts


@pytest.mark.parametrize(("bins", "length"), [(12, 1), (12, 4), (13, 5)])
def test_each_draw_is_what_drawing_its_bins_one_by_one_gives(bins, length):
    rng = np.random.default_rng(bins + length)
    total, count = rng.uniform(0.5, 2.0, (2, bins)), rng.integers(1, 5, (2, bins)).astype(float)
    sign = np.array([-1.0, 1.0])
    blocks = -(-bins // length)
    start = rng.integers(0, bins, (50, blocks))

    def running(x):
        return np.cumsum(np.concatenate([np.zeros((2, 1)), x, x[:, :length]], axis=1), axis=1)

    found = studentised_shifts(running(total), running(count), sign, start, length, bins)

    theta = sign @ np.log(total.sum(axis=1) / count.sum(axis=1))
    for drawn, shift in zip(start, found, strict=True):
        rows = [(first + np.arange(length)) % bins for first in drawn]
        rows[-1] = rows[-1][: bins - length * (blocks - 1)]
        whole, weight = (sum(x[:, row].sum(axis=1) for row in rows) for x in (total, count))
        mean = whole / weight
        parts = [np.sum(sign * (total[:, row].sum(axis=1) / mean - count[:, row].sum(axis=1)) / weight) for row in rows]
        if np.allclose(parts, 0.0, atol=1e-12):
            assert np.isnan(shift)
            continue
        expected = (sign @ np.log(mean) - theta) / np.sqrt(np.sum(np.square(parts)))
        assert shift == pytest.approx(expected, rel=1e-9)


def test_blocks_that_are_all_alike_have_no_studentised_shift():
    ones = np.arange(8.0)[None, :]
    found = studentised_shifts(ones, ones, np.ones(1), np.zeros((3, 6), dtype=np.int64), 1, 6)
    assert np.isnan(found).all()
