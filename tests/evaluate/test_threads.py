import threading

import pytest

from armeval.evaluate.threads import chunks, spread


@pytest.mark.parametrize("parts", [[], [3], [3, 1, 2, 5]])
def test_results_come_in_the_order_of_the_parts(parts):
    assert spread(lambda part: part * part, parts) == [part * part for part in parts]


def test_several_parts_are_worked_on_at_once():
    both = threading.Barrier(2, timeout=5.0)
    with pytest.MonkeyPatch.context() as patch:
        patch.setattr("os.cpu_count", lambda: 2)
        spread(lambda _: both.wait(), [1, 2])


def test_a_fault_in_one_part_is_raised():
    def work(part):
        if part == 2:
            raise ValueError("part 2")
        return part

    with pytest.raises(ValueError, match="part 2"):
        spread(work, [1, 2, 3, 4])


def test_chunks_hold_every_sample_once():
    assert [(part.start, part.stop) for part in chunks(10, 4)] == [(0, 4), (4, 8), (8, 10)]
    assert chunks(0) == []
