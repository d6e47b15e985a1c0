"""The shipped cog maps: reproducible, and saying what they were made from."""

import math
import warnings

import numpy as np
import pytest

from armeval.errors import InputWarning
from armeval.evaluate.cogging.cog_orders import orders
from armeval.files.arm_file import read_arm
from tests.plant import make_maps, shipped

DESIGN_ORDER = {"tern": 84, "plover": 200, "heron": 36}
MAPS = [(name, joint) for name, motors in shipped.MOTORS.items() for joint in motors]


@pytest.fixture(scope="module")
def drives():
    with warnings.catch_warnings():
        warnings.filterwarnings("ignore", message=".*only one turning direction", category=InputWarning)
        arms = {name: read_arm(shipped.FOLDER / name / "arm.toml") for name in shipped.MOTORS}
    return {(name, drive.joint): drive for name, arm in arms.items() for drive in arm.drives}


@pytest.mark.parametrize("place", sorted(make_maps.MAPS))
def test_a_shipped_map_is_what_the_script_writes(place):
    assert (shipped.FOLDER / place).read_text(encoding="utf-8") == make_maps.text(place)


def test_between_them_the_maps_come_in_every_quantity_and_both_numbers_of_directions(drives):
    maps = [drive.cog_map for drive in drives.values()]
    assert {cog_map.quantity for cog_map in maps} == {
        "cog_torque",
        "hold_torque",
        "hold_current",
        "hold_voltage",
        "spin_acceleration",
    }
    assert {cog_map.directions for cog_map in maps} == {1, 2}


@pytest.mark.parametrize(("name", "joint"), MAPS)
def test_the_strongest_order_is_that_of_the_design(drives, name, joint):
    drive = drives[name, joint]
    assert orders(drive.cog_map)[0].order == DESIGN_ORDER[name] == math.lcm(drive.slots, drive.poles)


@pytest.mark.parametrize(("name", "joint"), MAPS)
def test_a_map_read_back_gives_the_motor_that_it_was_made_from(drives, name, joint):
    motor, cog_map = shipped.MOTORS[name][joint], drives[name, joint].cog_map
    found = {order.order: order for order in orders(cog_map)}
    assert set(found) == {order for order, _, _ in motor.harmonics}
    for order, amplitude, phase in motor.harmonics:
        # one harmonic's share of the noise of hundreds of readings is a few hundredths of one reading's
        assert found[order].amplitude == pytest.approx(amplitude, abs=0.15 * motor.noise + 0.01 * amplitude)
        turned = (found[order].phase - phase + math.pi) % (2.0 * math.pi) - math.pi
        assert abs(turned) < 0.15 * motor.noise / amplitude + 0.02
    if cog_map.directions == 2:
        assert cog_map.friction == pytest.approx(motor.friction, abs=0.1 * motor.noise)


@pytest.mark.parametrize(("name", "joint"), MAPS)
def test_cogging_is_a_few_percent_of_the_motor_s_torque(drives, name, joint):
    drive = drives[name, joint]
    share = np.abs(drive.cog_map.torque).max() * abs(drive.gear_ratio) / drive.torque_limit
    assert 0.02 < share < 0.08
