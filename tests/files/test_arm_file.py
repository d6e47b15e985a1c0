from __future__ import annotations

import math
import tomllib

import numpy as np
import pytest
import tomli_w
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from armeval.errors import Findings, InputError
from armeval.files.arm_file import load_arm, read_arm
from tests.files.findings import faults, only_fault
from tests.files.samples import ARM, MAP_FRICTION, URDF, write_sample


@pytest.fixture
def folder(tmp_path):
    write_sample(tmp_path)
    return tmp_path


def with_arm(folder, text):
    (folder / "arm.toml").write_text(text, encoding="utf-8")
    return folder / "arm.toml"


def altered(old: str, new: str) -> str:
    assert old in ARM
    return ARM.replace(old, new, 1)


def test_the_sample_reads_as_it_stands_in_si_units(folder):
    arm = read_arm(folder / "arm.toml")
    shoulder, elbow = arm.drives
    assert arm.name == "pair"
    assert arm.joints == ("shoulder", "elbow")
    np.testing.assert_array_equal(arm.gravity, [0, 0, -9.80665])
    assert arm.servo.period == 1e-3
    assert arm.servo.delay == 1e-3
    assert arm.servo.speed_cutoff == 120.0
    assert arm.servo.gravity_feedforward
    assert not arm.servo.inertia_feedforward
    assert shoulder.gear_ratio == -2.0
    assert shoulder.rest_angle == pytest.approx(-math.pi / 6)
    assert shoulder.torque_step == pytest.approx(2e-4)
    assert shoulder.torque_constant == pytest.approx(0.031)
    assert shoulder.rotor_inertia == pytest.approx(4e-7)
    assert shoulder.index_offset == pytest.approx(math.radians(3))
    assert (shoulder.slots, shoulder.poles) == (12, 14)
    assert shoulder.resolution == pytest.approx(2 * math.pi / 16384 / 2)
    assert (elbow.gear_ratio, elbow.index_offset) == (1.0, 0.0)
    assert elbow.resolution == pytest.approx(2 * math.pi / 4096)
    assert elbow.viscous_friction == pytest.approx(1e-4)
    assert elbow.breakaway_friction == pytest.approx(4e-3)
    assert elbow.cog_map is not None
    assert elbow.cog_map.peak_to_peak == pytest.approx(0.010, rel=1e-3)


def test_friction_defaults_to_what_the_two_directions_say_seen_from_the_joint(folder):
    shoulder = read_arm(folder / "arm.toml").drives[0]
    assert shoulder.coulomb_friction == pytest.approx(2.0 * MAP_FRICTION, rel=1e-6)  # gear ratio -2
    assert shoulder.breakaway_friction == shoulder.coulomb_friction


def test_friction_that_is_told_wins_over_the_map(folder):
    elbow = read_arm(folder / "arm.toml").drives[1]
    assert elbow.coulomb_friction == pytest.approx(3e-3)


def test_gravity_falls_against_up(folder):
    arm = read_arm(with_arm(folder, altered('tip = "tip"', 'tip = "tip"\nup = [0, 3, 4]\ngravity = "10 m/s^2"')))
    np.testing.assert_allclose(arm.gravity, [0, -6, -8], atol=1e-15)


def test_a_tip_impedance_servo_takes_its_stiffness_along_the_axes(folder):
    servo = """law = "tip_impedance"
tip_stiffness = ["1 N/mm", "2 N/mm", "3 N/mm"]
tip_damping = ["1 N*s/m", "2 N*s/m", "3 N*s/m"]"""
    arm = read_arm(with_arm(folder, altered('law = "joint_pd"', servo)))
    np.testing.assert_allclose(arm.servo.tip_stiffness, [1000, 2000, 3000])
    np.testing.assert_allclose(arm.servo.tip_damping, [1, 2, 3])


def test_a_sliding_joint_takes_force_length_and_turns_per_length(folder):
    (folder / "pair.urdf").write_text(
        URDF.replace('name="elbow" type="revolute"', 'name="elbow" type="prismatic"'), encoding="utf-8"
    )
    elbow = """
[joint.elbow]
gear_ratio = "0.2 turn/mm"
rest_angle = "50 mm"
stiffness = "2 N/mm"
damping = "3 N*s/m"
torque_limit = "20 N"
coulomb_friction = "0.5 N"
stribeck_speed = "1 mm/s"
encoder_on = "joint"
encoder_counts = "200 count/mm"
"""
    text = ARM[: ARM.index("[joint.elbow]")] + elbow
    drive = read_arm(with_arm(folder, text)).drives[1]
    assert drive.gear_ratio == pytest.approx(400 * math.pi)
    assert (drive.rest_angle, drive.stiffness, drive.stribeck_speed) == pytest.approx((0.05, 2000.0, 0.001))
    assert drive.resolution == pytest.approx(5e-6)
    found = faults(lambda: read_arm(with_arm(folder, ARM)))
    assert {"[joint.elbow] stiffness", "[joint.elbow] torque_limit"} <= {fault.place for fault in found}


@pytest.mark.parametrize(
    ("old", "new", "place", "told"),
    [
        ('stiffness = "1.5 N*m/rad"', "stiffness = 1.5", "[joint.shoulder] stiffness", '"1.5 N*m/rad"'),
        ('stiffness = "1.5 N*m/rad"', 'stiffness = "1.5"', "[joint.shoulder] stiffness", '"1.5 N*m/rad"'),
        ('stiffness = "1.5 N*m/rad"', 'stiffness = "1.5 N/m"', "[joint.shoulder] stiffness", "`N*m/rad`"),
        ('stiffness = "1.5 N*m/rad"', 'stifness = "1.5 N*m/rad"', "[joint.shoulder] stifness", "`stiffness`"),
        ('damping = "0.02 N*m*s/rad"', 'damping = "-1 N*m*s/rad"', "[joint.shoulder] damping", "0 or more"),
        ("gear_ratio = -2", "gear_ratio = 0", "[joint.shoulder] gear_ratio", "not 0"),
        ("gear_ratio = -2", 'gear_ratio = "2"', "[joint.shoulder] gear_ratio", "bare number"),
        ("gear_ratio = -2", "gear_ratio = nan", "[joint.shoulder] gear_ratio", "finite"),
        ('torque_limit = "0.35 N*m"', 'torque_limit = "0 N*m"', "[joint.shoulder] torque_limit", "more than 0"),
        ("encoder_counts = 4096", 'encoder_counts = "4096"', "[joint.elbow] encoder_counts", "bare number"),
        ('encoder_on = "joint"', 'encoder_on = "jiont"', "[joint.elbow] encoder_on", "'joint'"),
        ("slots = 12", "slots = 12.5", "[joint.shoulder] slots", "whole number"),
        ("slots = 12", "slots = 0", "[joint.shoulder] slots", "1 or more"),
        ('static_friction = "4 mN*m"', 'static_friction = "2 mN*m"', "[joint.elbow] static_friction", "at least"),
        ('rest_angle = "60 deg"', 'rest_angle = "160 deg"', "[joint.elbow] rest_angle", "143 deg"),
        ('index_offset = "3 deg"', "index_ofset = 3", "[joint.shoulder.cog_map] index_ofset", "`index_offset`"),
        ("[joint.elbow]", "[joint.elbo]", "[joint.elbo]", "`elbow`"),
        ("[joint.elbow]", "[jont.elbow]", "jont", "`joint`"),
        ('rate = "1 kHz"', 'rate = "1 ms"', "[servo] rate", "`Hz`"),
        ('rate = "1 kHz"', "", "[servo] rate", "add it"),
        ('law = "joint_pd"', 'law = "joint_pid"', "[servo] law", "'joint_pd'"),
        ('law = "joint_pd"', 'law = "tip_impedance"', "[servo] tip_stiffness", "three"),
        ('tip = "tip"', 'tip = "tip"\nup = [0, 0, 0]', "up", "[0, 0, 1]"),
        ('tip = "tip"', 'tip = "tip"\nup = [0, 1]', "up", "give 3"),
        ('tip = "tip"', 'tip = "tip"\nup = [0, 0, "1"]', "up, entry 3", "bare number"),
        ('name = "pair"', "name = 3", "name", "quotes"),
        ('schema = "armeval/arm/1"', "", "schema", "armeval/arm/1"),
    ],
)
def test_one_fault_is_told_with_its_place_and_mend(folder, old, new, place, told):
    found = faults(lambda: read_arm(with_arm(folder, altered(old, new))))
    (fault,) = [fault for fault in found if fault.place == place]
    assert told in f"{fault.what} {fault.mend}"
    assert fault.file == str(folder / "arm.toml")


def test_a_joint_without_a_drive_is_told(folder):
    fault = only_fault(lambda: read_arm(with_arm(folder, ARM[: ARM.index("[joint.elbow]")])))
    assert fault.place == "[joint.elbow]"
    assert "[joint.elbow]" in fault.mend


def test_faults_in_arm_urdf_and_maps_are_told_at_once_each_with_its_file(folder):
    (folder / "maps" / "elbow.csv").write_text("angle [deg],cog_torque\n0,1\n", encoding="utf-8")
    (folder / "pair.urdf").write_text(URDF.replace('child link="fore"', 'child link="for"'), encoding="utf-8")
    (folder / "maps" / "shoulder.csv").unlink()
    found = faults(lambda: read_arm(with_arm(folder, altered('rate = "1 kHz"', "rate = 1000"))))
    assert {fault.file.removeprefix(str(folder)) for fault in found} == {
        "/arm.toml",
        "/pair.urdf",
        "/maps/elbow.csv",
        "/maps/shoulder.csv",
    }


def test_a_fault_in_a_drive_does_not_hide_that_its_map_is_missing(folder):
    text = altered("slots = 12", "slots = 0").replace("maps/shoulder.csv", "maps/sholder.csv")
    slots, missing = faults(lambda: read_arm(with_arm(folder, text)))
    assert slots.place == "[joint.shoulder] slots"
    assert (missing.file, missing.place) == (str(folder / "maps" / "sholder.csv"), "joint `shoulder`")
    assert "`shoulder.csv`" in missing.mend


def test_a_missing_urdf_comes_with_the_one_that_was_meant(folder):
    found = faults(lambda: read_arm(with_arm(folder, altered('"pair.urdf"', '"pear.urdf"'))))
    assert any("`pair.urdf`" in fault.mend for fault in found)


def test_a_trial_where_an_arm_is_due_is_told_and_nothing_else(folder):
    fault = only_fault(lambda: read_arm(folder / "trial.toml"))
    assert "`trial`" in fault.what
    assert fault.place == "schema"


def test_a_joint_without_inertia_needs_a_rotor(folder):
    urdf = (
        URDF[: URDF.index('<link name="fore">')]
        + (
            '<link name="fore"><inertial><mass value="0.1"/>'
            '<inertia ixx="0" ixy="0" ixz="0" iyy="0" iyz="0" izz="0"/></inertial></link>'
        )
        + URDF[URDF.index('  <link name="tip"/>') :]
    )
    (folder / "pair.urdf").write_text(urdf, encoding="utf-8")
    fault = only_fault(lambda: read_arm(folder / "arm.toml"))
    assert fault.place == "[joint.elbow] rotor_inertia"
    with_rotor = altered("[joint.elbow]", '[joint.elbow]\nrotor_inertia = "4 g*cm^2"')
    read_arm(with_arm(folder, with_rotor))


def test_a_stand_in_serves_to_check_further_files_when_a_drive_is_faulty(folder):
    findings = Findings()
    reading = load_arm(with_arm(folder, altered('"0.8 N*m/rad"', '"0.8"')), findings)
    assert reading.arm is None
    assert reading.stand_in is not None
    assert reading.stand_in.joints == ("shoulder", "elbow")
    assert len(findings.found) == 1


def test_what_the_law_does_not_use_is_doubted(folder):
    findings = Findings()
    text = altered('law = "joint_pd"', 'law = "joint_pd"\ntip_damping = ["1 N*s/m", "1 N*s/m", "1 N*s/m"]')
    read_arm(with_arm(folder, text), findings=findings)
    (finding,) = findings.found
    assert (finding.level, finding.place) == ("warning", "[servo] tip_damping")


values = st.one_of(
    st.floats(),
    st.integers(),
    st.text(max_size=8),
    st.booleans(),
    st.lists(st.floats(), max_size=4),
    st.builds("{} {}".format, st.floats(), st.sampled_from(["N*m", "N*m/rad", "deg", "Hz", "s", "kg", "%", "N*m/A"])),
)


def arm_or_input_error(folder) -> None:
    """Whatever the file holds, nothing else may come of it, and an error says something."""
    try:
        read_arm(folder / "arm.toml", findings=Findings())
    except InputError as error:
        told = [finding.what for finding in error.findings if finding.level == "error"]
    else:
        return
    assert told
    assert all(told)


@settings(max_examples=150, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(data=st.data())
def test_whatever_one_value_becomes_the_answer_is_an_arm_or_an_input_error(folder, data):
    content = tomllib.loads(ARM)
    for joint in content["joint"].values():
        joint.pop("cog_map")
    table = data.draw(st.sampled_from([content, content["servo"], *content["joint"].values()]))
    table[data.draw(st.sampled_from(sorted(table)))] = data.draw(values)
    with_arm(folder, tomli_w.dumps(content))
    arm_or_input_error(folder)


@settings(max_examples=100, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(cut=st.integers(0, len(ARM)), junk=st.text(max_size=6), gone=st.integers(0, 40))
def test_whatever_is_cut_or_typed_into_the_text_the_answer_is_an_arm_or_an_input_error(folder, cut, junk, gone):
    with_arm(folder, ARM[:cut] + junk + ARM[cut + gone :])
    arm_or_input_error(folder)
