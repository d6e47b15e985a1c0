from __future__ import annotations

from pathlib import Path
from typing import Any

import numpy as np
import pytest

from armeval.arrays import FloatArray
from armeval.errors import Findings
from armeval.files.cog_map_file import read_cog_map, write_cog_map
from armeval.model.cogmap import CogMap
from tests.files.findings import faults, only_fault
from tests.files.log_text import rows_of

DEGREES = np.arange(0.0, 360.0, 1.5)
ANGLE = np.radians(DEGREES)
COG = 0.012 * np.sin(12.0 * ANGLE + 0.3) + 0.002 * np.sin(ANGLE)
FRICTION = 0.003
BOTH = np.concatenate([np.ones(240), -np.ones(240)])
CONSTANTS = {"torque_constant": 0.03, "winding_resistance": 0.5, "rotor_inertia": 4e-7}


def read(file: Path, header: str, *columns: FloatArray, findings: Findings | None = None, **options: Any) -> CogMap:
    file.write_text("\n".join([header, *rows_of(*columns)]) + "\n")
    return read_cog_map(file, findings=Findings() if findings is None else findings, **options)


def torque_at(cog_map: CogMap, angle: FloatArray) -> FloatArray:
    """Evaluate a map between its entries."""
    return np.interp(angle, cog_map.angle, cog_map.torque, period=2.0 * np.pi)


@pytest.mark.parametrize(
    ("header", "value"),
    [
        ("angle [deg],cog_torque [mN*m]", 1e3 * COG),
        ("angle [deg],hold_torque [N*m]", -COG),
        ("angle [deg],hold_current [mA]", -1e3 * COG / 0.03),
        ("angle [deg],hold_voltage [V]", -COG / 0.03 * 0.5),
        ("angle [deg],spin_acceleration [rad/s^2]", COG / 4e-7 + 17.0),
    ],
)
def test_every_quantity_gives_the_torque_on_the_rotor(tmp_path: Path, header: str, value: FloatArray) -> None:
    cog_map = read(tmp_path / "m.csv", header, DEGREES, value, **CONSTANTS)
    np.testing.assert_allclose(torque_at(cog_map, ANGLE), COG, atol=2e-6)
    assert cog_map.quantity == header.split(",")[1].split(" ")[0]
    assert abs(cog_map.removed_mean) < 1e-9
    assert cog_map.source == str(tmp_path / "m.csv")


def test_two_directions_of_holding_give_friction(tmp_path: Path) -> None:
    # Dry friction opposes the turning: on the way up the drive pushes harder by it, on the way down less.
    hold = np.concatenate([-COG + FRICTION, -COG - FRICTION])
    twice = np.concatenate([DEGREES, DEGREES])
    cog_map = read(tmp_path / "m.csv", "angle [deg],hold_torque [N*m],direction", twice, hold, BOTH)
    assert cog_map.directions == 2
    assert cog_map.friction == pytest.approx(FRICTION, rel=1e-9)
    np.testing.assert_allclose(torque_at(cog_map, ANGLE), COG, atol=2e-6)


@pytest.mark.parametrize(("unit", "turn"), [("rad", 2.0 * np.pi), ("turn", 1.0), ("arcmin", 21600.0), ("deg", 360.0)])
def test_angles_may_be_in_any_unit(tmp_path: Path, unit: str, turn: float) -> None:
    cog_map = read(tmp_path / "m.csv", f"angle [{unit}],cog_torque [N*m]", DEGREES / 360.0 * turn, COG)
    np.testing.assert_allclose(torque_at(cog_map, ANGLE), COG, atol=2e-6)


def test_foreign_columns_are_named_and_others_left_alone(tmp_path: Path) -> None:
    heard = Findings()
    cog_map = read(
        tmp_path / "m.csv",
        "Time, Position, Iq, Uq",
        DEGREES,
        ANGLE,
        -COG / 0.03,
        DEGREES,
        columns={"Position": "angle [rad]", "Iq": "hold_current [A]"},
        torque_constant=0.03,
        findings=heard,
    )
    np.testing.assert_allclose(torque_at(cog_map, ANGLE), COG, atol=2e-6)
    assert not heard.found


@pytest.mark.parametrize(
    ("header", "given", "missing"),
    [
        ("angle [deg],hold_current [A]", {}, {"torque_constant"}),
        ("angle [deg],hold_voltage [V]", {}, {"torque_constant", "winding_resistance"}),
        ("angle [deg],hold_voltage [V]", {"torque_constant": 0.03}, {"winding_resistance"}),
        ("angle [deg],spin_acceleration [rad/s^2]", {"torque_constant": 0.03}, {"rotor_inertia"}),
        ("angle [deg],spin_acceleration [rad/s^2]", {"rotor_inertia": 0.0}, {"rotor_inertia"}),
    ],
)
def test_a_missing_constant_names_its_key(
    tmp_path: Path, header: str, given: dict[str, float], missing: set[str]
) -> None:
    found = faults(lambda: read(tmp_path / "m.csv", header, DEGREES, COG, **given))
    assert {fault.mend for fault in found} == {f"give `{name}` for this joint in the arm file" for name in missing}
    assert {fault.place for fault in found} == {f"column `{header.split(',')[1]}`"}


@pytest.mark.parametrize(
    ("header", "what", "mend", "place"),
    [
        ("angle [deg],torque [N*m]", "there is no measured quantity", "give one of `cog_torque [N*m]`", "header"),
        ("angle [deg],hold_torqe [N*m]", "there is no measured quantity", "did you mean `hold_torque`?", "header"),
        ("angl [deg],cog_torque [N*m]", "there is no column `angle`", "did you mean `angl`?", "header"),
        ("angle,cog_torque [N*m]", "it has no unit", "`angle [rad]`", "column `angle`"),
        ("angle [deg],cog_torque [N]", "`N` does not measure", "`N*m`", "column `cog_torque [N]`"),
    ],
)
def test_a_faulty_header_is_told(tmp_path: Path, header: str, what: str, mend: str, place: str) -> None:
    fault = only_fault(lambda: read(tmp_path / "m.csv", header, DEGREES, COG))
    assert what in fault.what
    assert mend in fault.mend
    assert fault.place == place


def test_only_one_quantity_may_be_given(tmp_path: Path) -> None:
    header = "angle [deg],cog_torque [N*m],hold_torque [N*m]"
    fault = only_fault(lambda: read(tmp_path / "m.csv", header, DEGREES, COG, -COG))
    assert "2 measured quantities: `cog_torque [N*m]`, `hold_torque [N*m]`" in fault.what


def test_a_direction_is_plus_or_minus_one(tmp_path: Path) -> None:
    direction = np.ones(240)
    direction[[3, 100]] = 0.0, -2.0
    found = faults(lambda: read(tmp_path / "m.csv", "angle [deg],cog_torque [N*m],direction", DEGREES, COG, direction))
    assert [(fault.place, fault.what) for fault in found] == [
        ("row 5, column `direction`", "the direction is 0"),
        ("row 102, column `direction`", "the direction is -2"),
    ]
    assert "+1" in found[0].mend


def test_half_a_turn_is_refused_with_its_file(tmp_path: Path) -> None:
    fault = only_fault(lambda: read(tmp_path / "m.csv", "angle [deg],cog_torque [N*m]", DEGREES[:120], COG[:120]))
    assert fault.file == str(tmp_path / "m.csv")
    assert "half a turn" in fault.what


def test_a_mistyped_direction_is_a_warning(tmp_path: Path) -> None:
    heard = Findings()
    read(tmp_path / "m.csv", "angle [deg],cog_torque [N*m],diretion", DEGREES, COG, np.ones(240), findings=heard)
    assert any("did you mean `direction`?" in finding.mend for finding in heard.found)


@pytest.mark.parametrize("name", ["m.csv", "m.csv.gz"])
@pytest.mark.parametrize("directions", [1, 2])
def test_what_is_written_reads_the_same(tmp_path: Path, name: str, directions: int) -> None:
    if directions == 1:
        cog_map = read(tmp_path / "a.csv", "angle [deg],cog_torque [N*m]", DEGREES, COG)
    else:
        torque = np.concatenate([COG - FRICTION, COG + FRICTION])
        twice = np.concatenate([DEGREES, DEGREES])
        cog_map = read(tmp_path / "a.csv", "angle [deg],cog_torque [N*m],direction", twice, torque, BOTH)
    write_cog_map(cog_map, tmp_path / name)
    back = read_cog_map(tmp_path / name)
    np.testing.assert_allclose(back.torque, cog_map.torque, atol=1e-15)
    assert back.friction == (None if directions == 1 else pytest.approx(FRICTION, rel=1e-9))
    assert back.directions == directions
