"""Native cogging orders of known motors.

Sources: native order = least common multiple of slots and poles, Z. Q. Zhu and D. Howe, "Influence of design
parameters on cogging torque in permanent magnet machines", IEEE Trans. Energy Conversion 15(4), 2000 (abstract).
Two-phase hybrid steppers have four detents an electrical period: T. Kenjo, "Stepping motors and their microprocessor
controls"; P. Acarnley, "Stepping motors" (from memory). That a 24-slot, 20-pole motor can show 20, 24 and a dominant 48
although its native order is 120 is common practice, no source.
"""

import pytest

from armeval.evaluate.cogging.cog_orders import expected_orders


@pytest.mark.parametrize(
    ("slots", "poles", "order"),
    [
        (12, 14, 84),
        (9, 12, 36),
        (12, 10, 60),
        (24, 20, 120),
        (24, 22, 264),
        (36, 42, 252),
        (24, 28, 168),
    ],
)
def test_the_native_order_is_the_least_common_multiple(slots: int, poles: int, order: int) -> None:
    expected = expected_orders(slots, poles)
    assert expected.fundamental == order
    assert expected.kind(order) == expected.kind(2 * order) == "expected"


def test_a_two_phase_stepper_of_50_teeth_has_200_detents() -> None:
    expected = expected_orders(None, 2 * 50)
    assert expected.fundamental == 4 * 50
    assert expected.kind(50) == "tolerance"


@pytest.mark.parametrize("order", [20, 24, 48])
def test_a_24_slot_20_pole_motor_shows_slots_and_poles_by_its_tolerances(order: int) -> None:
    assert expected_orders(24, 20).kind(order) == "tolerance"
