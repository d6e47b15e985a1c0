from __future__ import annotations

import math

import pytest

from armeval.errors import InputError
from armeval.files.quantities import JointKind, Unit, bare_number


def test_a_quantity_becomes_a_number_in_si():
    assert Unit("m/s").read("60 mm/s") == pytest.approx(0.06, rel=1e-15)
    assert Unit("rad").read("-30 deg") == pytest.approx(-math.pi / 6, rel=1e-15)
    assert Unit("kg*m^2").read("4 g*cm^2") == pytest.approx(4e-7, rel=1e-15)


@pytest.mark.parametrize(
    ("given", "told"),
    [
        (0.3, 'such as "0.3 N*m"'),
        ("0.3", 'such as "0.3 N*m"'),
        ("0.3 N", "`N*m`"),
        ("0.3 Nmm", "N*m"),
        ("three N*m", "such as"),
        (True, "such as"),
        ([1], "such as"),
        ("1e999 N*m", "finite"),
    ],
)
def test_what_is_no_torque_is_refused_and_the_mend_shows_one(given, told):
    with pytest.raises(InputError) as caught:
        Unit("N*m").read(given)
    assert told in str(caught.value)


def test_a_sliding_joint_takes_force_and_a_turning_one_torque():
    unit = Unit("N*m/rad", sliding="N/m")
    assert unit.read("2 N/mm", JointKind(slides=True)) == pytest.approx(2000.0)
    assert unit.read("2 N*m/rad", JointKind(slides=False)) == 2.0
    with pytest.raises(InputError, match="N/m"):
        unit.read("2 N*m/rad", JointKind(slides=True))
    with pytest.raises(InputError, match="N\\*m/rad"):
        unit.read("2 N/mm", JointKind(slides=False))


def test_a_joint_of_unknown_kind_takes_either():
    unit = Unit("N*m/rad", sliding="N/m")
    assert unit.read("2 N/m", JointKind()) == 2.0
    assert unit.read("2 N*m/rad", JointKind()) == 2.0
    with pytest.raises(InputError):
        unit.read("2 kg", JointKind())


def test_a_value_out_of_range_is_refused_in_the_words_of_the_file():
    with pytest.raises(InputError, match='"-1 mN\\*m" is too small'):
        Unit("N*m", least=0.0).read("-1 mN*m")
    with pytest.raises(InputError, match="more than 0"):
        Unit("Hz", above=0.0).read("0 Hz")
    assert Unit("N*m", least=0.0).read("0 N*m") == 0.0


@pytest.mark.parametrize("given", ["6", True, math.nan, math.inf, 10**400, None])
def test_what_is_no_bare_number_is_refused(given):
    with pytest.raises(InputError):
        bare_number(given)


def test_a_motor_may_drive_a_slide_by_turns_per_length():
    assert Unit("", sliding="rad/m").read("0.2 turn/mm", JointKind(slides=True)) == pytest.approx(400 * math.pi)
