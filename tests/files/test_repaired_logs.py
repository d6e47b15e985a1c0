"""Whatever mixture of repairable defects a log has, its numbers come out right and the defects are counted."""

from __future__ import annotations

import gzip
import re
from dataclasses import dataclass
from pathlib import Path
from tempfile import TemporaryDirectory

import numpy as np
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from armeval.errors import Findings
from armeval.files.joint_logs.log_file import read_joint_log
from armeval.model.arm import Arm

ROWS = 200
COUNTS = np.rint(
    np.stack([2000.0 * np.sin(0.03 * np.arange(ROWS)), 1500.0 * np.cos(0.02 * np.arange(ROWS))], axis=1)
).astype(np.int64)
REACH = np.round(0.1 + 0.05 * np.sin(0.05 * np.arange(ROWS)), 6)
TIME = np.round(0.002 * np.arange(ROWS) + 0.0007 * np.random.default_rng(6).random(ROWS), 6)


@dataclass(frozen=True)
class Hand:
    """In what hand a log is written."""

    delimiter: str
    decimal: str
    end: str
    mark: bool
    comments: bool
    quoted: bool
    packed: bool


@dataclass(frozen=True)
class Defects:
    """What the logger did wrong; the rows are those of the sound log, 0 bits a counter that never rolls over."""

    twice: frozenset[int]
    late: frozenset[int]
    gap: tuple[int, int]
    bits: int


hands = st.builds(
    Hand,
    st.sampled_from([";", "\t"]),
    st.sampled_from([".", ","]),
    st.sampled_from(["\n", "\r\n", "\r"]),
    st.booleans(),
    st.booleans(),
    st.booleans(),
    st.booleans(),
) | st.builds(Hand, st.just(","), st.just("."), st.sampled_from(["\n", "\r\n"]), *[st.booleans()] * 4)
defects = st.builds(
    Defects,
    st.frozensets(st.integers(0, ROWS - 1), max_size=30),
    # A late row comes after the one that follows it; rows that are neighbours would come as a crowd.
    st.frozensets(st.integers(0, 60).map(lambda i: 3 * i), max_size=5),
    st.tuples(st.integers(20, 150), st.sampled_from([0, 15, 30])),
    st.sampled_from([0, 16, 24, 32]),
)


def written(hand: Hand, wrong: Defects) -> tuple[bytes, list[int]]:
    """Give the log's bytes, and the rows of the sound log that are in it."""
    first, count = wrong.gap
    kept = [row for row in range(ROWS) if not first <= row < first + count]
    order = list(kept)
    for late in sorted(wrong.late):
        if late in order and order.index(late) + 1 < len(order) and late + 1 in order:
            at = order.index(late)
            order[at], order[at + 1] = order[at + 1], order[at]
    order = [row for row in order for _ in range(2 if row in wrong.twice else 1)]
    rolled = COUNTS % 2**wrong.bits if wrong.bits else COUNTS
    names = ["time [s]", "turn.angle [count]", "lift.angle [count]", "reach.angle [m]"]
    lines = [hand.delimiter.join(f'"{name}"' if hand.quoted else name for name in names)]
    for place, row in enumerate(order):
        cells = [repr(float(TIME[row])), str(rolled[row, 0]), str(rolled[row, 1]), repr(float(REACH[row]))]
        lines.append(hand.delimiter.join(cell.replace(".", hand.decimal) for cell in cells))
        if hand.comments and place % 40 == 7:
            lines += ["# paused, for a while; or so", ""]
    content = ("\ufeff" if hand.mark else "") + hand.end.join(lines) + hand.end
    data = content.encode()
    return gzip.compress(data) if hand.packed else data, kept


@settings(
    max_examples=150, deadline=None, derandomize=True, suppress_health_check=[HealthCheck.function_scoped_fixture]
)
@given(hand=hands, wrong=defects)
def test_any_mixture_of_repairable_defects_gives_the_true_numbers(gantry: Arm, hand: Hand, wrong: Defects) -> None:
    content, kept = written(hand, wrong)
    heard = Findings()
    with TemporaryDirectory() as folder:
        file = Path(folder) / "l.csv"
        file.write_bytes(content)
        (log,) = read_joint_log(file, gantry, findings=heard)
    assert np.array_equal(log.time, TIME[kept])
    true = np.column_stack([COUNTS[kept] * [2.0 * np.pi / 16384, -2.0 * np.pi / 6.0 / 4096], REACH[kept]])
    np.testing.assert_allclose(log.angle, true, atol=1e-9)
    told = " ".join(str(finding) for finding in heard.found)
    twice = len(wrong.twice & set(kept))
    assert (f"{twice} sample{'s' if twice > 1 else ''} came twice" in told) == (twice > 0)
    assert ("came late" in told) == any(late in kept and late + 1 in kept for late in wrong.late)
    assert len(log.segments) == (2 if wrong.gap[1] else 1)
    assert ("a gap of" in told) == (wrong.gap[1] > 0)
    bits = set(re.findall(r"the (\d+)-bit counter", told))
    assert bits == ({str(wrong.bits)} if wrong.bits else set())
