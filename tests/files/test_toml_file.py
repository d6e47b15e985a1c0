from __future__ import annotations

from typing import Annotated, Literal

import pytest
from pydantic import StrictBool

from armeval.errors import Findings
from armeval.files.quantities import Unit
from armeval.files.toml_file import Table, check_schema, place, read_toml, validate
from tests.files.findings import only_fault


class Wheel(Table):
    radius: Annotated[float, Unit("m", above=0.0)]
    spokes: int = 3


class Cart(Table):
    wheel: list[Wheel]
    drive: Literal["rope", "chain"] = "rope"
    covered: StrictBool = False
    axle: Wheel | None = None


def found_in(content):
    findings = Findings("cart.toml")
    assert validate(Cart, content, findings) is None
    return {finding.place: finding for finding in findings.found}


def test_a_sound_table_is_read():
    findings = Findings()
    cart = validate(Cart, {"wheel": [{"radius": "20 cm"}], "covered": True}, findings)
    assert cart is not None
    assert cart.wheel[0].radius == 0.2
    assert not findings.found


def test_every_fault_is_found_at_once():
    found = found_in({"wheel": [{"radius": "20 cm"}, {"radius": 2}], "drive": "belt", "covered": 1, "axle": {}})
    assert found.keys() == {"[[wheel]] 2, radius", "drive", "covered", "[axle] radius"}
    assert "'rope' or 'chain'" in found["drive"].mend
    assert "true" in found["covered"].mend
    assert "missing" in found["[axle] radius"].what
    assert all(finding.file == "cart.toml" for finding in found.values())


@pytest.mark.parametrize(
    ("content", "where", "meant"),
    [
        ({"wheel": [{"radius": "1 m"}], "drve": "rope"}, "drve", "`drive`"),
        ({"wheel": [{"radius": "1 m", "spoke": 4}]}, "[[wheel]] 1, spoke", "`spokes`"),
        ({"wheel": [], "axle": {"radius": "1 m", "radios": "2 m"}}, "[axle] radios", "`radius`"),
    ],
)
def test_an_unknown_key_comes_with_the_one_that_was_meant(content, where, meant):
    assert meant in found_in(content)[where].mend


def test_a_table_that_is_no_table_is_named():
    found = found_in({"wheel": {"radius": "1 m"}, "axle": 3})
    assert found.keys() == {"wheel", "axle"}
    assert "table" in found["axle"].what
    assert "[[wheel]]" in found["wheel"].mend


def test_places_read_as_they_stand_in_the_file():
    assert place(("joint", "lift", "stiffness")) == "[joint.lift] stiffness"
    assert place(("servo", "tip_stiffness", 1)) == "[servo] tip_stiffness, entry 2"
    assert place(("run", 0, "name")) == "[[run]] 1, name"
    assert place(("title",)) == "title"


def test_a_slip_in_toml_is_placed_by_line_and_column(tmp_path):
    file = tmp_path / "a.toml"
    file.write_text('schema = "x"\nfeed = 60 mm/s\n', encoding="utf-8")
    fault = only_fault(lambda: read_toml(file))
    assert fault.place == "line 2, column 11"
    assert "in quotes" in fault.mend


def test_an_unclosed_text_ends_at_the_end_of_the_file(tmp_path):
    file = tmp_path / "a.toml"
    file.write_text('schema = """x', encoding="utf-8")
    assert only_fault(lambda: read_toml(file)).file == str(file)


def test_a_file_of_another_kind_is_told_apart_from_one_without_a_schema():
    wanted = "armeval/arm/1"
    findings = Findings()
    assert check_schema({"schema": wanted}, wanted, findings)
    assert not findings.found
    assert check_schema({}, wanted, findings)
    assert not check_schema({"schema": "armeval/trial/1"}, wanted, findings)
    assert check_schema({"schema": "armeval/arm/2"}, wanted, findings)
    assert check_schema({"schema": 1}, wanted, findings)
    without, other, newer, number = findings.found
    assert wanted in without.mend
    assert "`trial`" in other.what
    assert "`armeval/arm/2`" in newer.what
    assert number.place == "schema"
