"""Units stop at the door, and say plainly why they were not let in."""

import math

import pytest

from armeval.errors import InputError
from armeval.units import header, length_text, quantity, scale, significant, time_text, torque_text


@pytest.mark.parametrize(
    ("text", "unit", "value"),
    [
        ("60 mm/s", "m/s", 0.06),
        ("-30 deg", "rad", -math.pi / 6),
        ("1.5 N*m/rad", "N*m/rad", 1.5),
        ("0.01 N*m/deg", "N*m/rad", 0.01 * 180 / math.pi),
        ("1.5 N*m", "N*m/rad", 1.5),
        ("4 g*cm^2", "kg*m^2", 4e-7),
        ("0.4 ohm", "ohm", 0.4),
        ("31 mN*m/A", "N*m/A", 0.031),
        ("120 rpm", "rad/s", 4 * math.pi),
        ("2 turn", "rad", 4 * math.pi),
        ("1 kHz", "Hz", 1000.0),
        ("0.2 turn/mm", "rad/m", 400 * math.pi),
        ("1e3 mm", "m", 1.0),
    ],
)
def test_a_quantity_is_read_into_si(text, unit, value):
    assert quantity(text, unit) == pytest.approx(value, rel=1e-12)


@pytest.mark.parametrize("given", ["60", 60, 60.0])
def test_a_bare_number_is_refused_and_shown_with_its_unit(given):
    with pytest.raises(InputError, match=r"has no unit.*60.* m/s"):
        quantity(given, "m/s")


@pytest.mark.parametrize(
    ("text", "unit"),
    [("60 Hz", "rad/s"), ("60 rpm", "Hz"), ("5 percent", "rad"), ("5 N", "N*m"), ("3 mm", "rad"), ("1 V", "A")],
)
def test_a_unit_of_another_kind_is_refused(text, unit):
    with pytest.raises(InputError, match=f"give it in `{unit}`".replace("*", r"\*")):
        quantity(text, unit)


@pytest.mark.parametrize("text", ["five mm", "1 furlongg", "mm", "", "1 m; import os", "1e999 m", True, None, [1]])
def test_what_is_no_quantity_is_refused(text):
    with pytest.raises(InputError):
        quantity(text, "m")


def test_headers_are_split_into_name_and_unit():
    assert header("lift.angle [deg]") == ("lift.angle", "deg")
    assert header(" lap ") == ("lap", None)
    with pytest.raises(InputError, match="cannot be read"):
        header("a [b] [c]")


def test_scale_is_a_factor():
    assert scale("deg", "rad") == pytest.approx(math.pi / 180)


@pytest.mark.parametrize(
    ("value", "text"),
    [(0.0, "0"), (4.126, "4.13"), (0.03119, "0.0312"), (84.04, "84.0"), (1234.0, "1234"), (3e-9, "3.00e-09")],
)
def test_numbers_are_written_with_the_digits_that_mean_something(value, text):
    assert significant(value) == text


def test_lengths_torques_and_times_are_written_in_the_units_of_the_trade():
    assert length_text(0.004126) == "4.13 mm"
    assert torque_text(0.0182) == "18.2 mN·m"
    assert time_text(0.035) == "35.0 ms"
    assert time_text(1.204) == "1.20 s"
