"""Numbers with lanes: each lane gets what numpy gives for it."""

from __future__ import annotations

import numpy as np
import pytest

from armeval.arrays import FloatArray
from armeval.kernels.compile import jit
from armeval.kernels.lanes import MARK, WIDTH, aligned_zeros, anywhere, take, take_own, where, with_lanes
from armeval.kernels.records import Records

NAMES = ("a", "b", "sum", "difference", "product", "ratio", "negative", "size", "floor", "rounded", "chosen", "mixed",
         "taken", "own", "updated")  # fmt: skip
KIND = np.dtype([(name, float, (WIDTH,)) for name in NAMES] + [("any", float), (MARK, float, (7,))], align=True)


@jit
def work(records: Records, tables: FloatArray, own: FloatArray) -> None:
    rows = with_lanes(records)
    for k in range(rows.shape[0]):
        row = rows[k]
        a, b = row["a"], row["b"]
        row["sum"], row["difference"], row["product"], row["ratio"] = a + b, a - b, a * b, a / b
        row["negative"], row["size"], row["floor"], row["rounded"] = -a, abs(a), np.floor(a), np.rint(a)
        row["chosen"] = where((a > b) | (a == 0.0), a, b)
        row["mixed"] = where((a >= -1.0) & (a <= 1.0), 2.0 * a - 1, 7.0)
        entry = where(abs(a) < 4.0, np.floor(abs(a)), 0.0)
        row["taken"], row["own"] = take(tables, 1, 0, entry), take_own(own, 0, entry)
        updated = a
        updated += b
        updated *= 3.0
        updated -= a
        row["updated"] = updated
        row["any"] = 1.0 if anywhere(a != a) else 0.0


def filled() -> Records:
    rows = aligned_zeros((50,), KIND)
    rng = np.random.default_rng(1)
    rows["a"], rows["b"] = rng.normal(size=(2, 50, WIDTH)) * 3.0
    rows["a"][3, 2], rows["b"][4, 1], rows["a"][5, 0], rows["a"][6] = 0.0, 0.0, np.inf, np.arange(WIDTH) - 3.5
    rows["a"][7, 5] = np.nan
    return rows


@pytest.mark.filterwarnings("ignore::RuntimeWarning")
@pytest.mark.parametrize("shift", [0, 8, 24])
def test_every_operation_gives_in_each_lane_what_numpy_gives(shift: int) -> None:
    rows, rng = filled(), np.random.default_rng(2)
    raw = np.zeros(rows.nbytes + 64 + shift, np.uint8)
    start = -raw.ctypes.data % 64 + shift
    moved = raw[start : start + rows.nbytes].view(KIND)  # also where a vector would not start by itself
    moved[:] = rows
    tables, own = rng.normal(size=(2, 2, 5)), rng.normal(size=(1, WIDTH, 5))
    work(moved, tables, own)
    a, b = rows["a"], rows["b"]
    entry = np.where(np.abs(a) < 4.0, np.floor(np.abs(a)), 0.0).astype(int)
    expected = {
        "sum": a + b, "difference": a - b, "product": a * b, "ratio": a / b, "negative": -a, "size": np.abs(a),
        "floor": np.floor(a), "rounded": np.rint(a), "chosen": np.where((a > b) | (a == 0.0), a, b),
        "mixed": np.where((a >= -1.0) & (a <= 1.0), 2.0 * a - 1, 7.0), "taken": tables[1, 0][entry],
        "own": own[0][np.arange(WIDTH), entry], "updated": (a + b) * 3.0 - a, "any": np.isnan(a).any(axis=1),
    }  # fmt: skip
    for name, values in expected.items():
        np.testing.assert_allclose(moved[name], values, rtol=1e-14, atol=1e-14, err_msg=name)
