"""What a URDF may get wrong, and what is said about it."""

from __future__ import annotations

import contextlib
from pathlib import Path

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from armeval.errors import Finding, Findings, InputError, InputWarning
from armeval.files.chains.urdf import read_urdf
from tests.files.findings import faults, only_fault
from tests.files.samples import URDF


@pytest.fixture
def against(tmp_path: Path, capfd):
    """Errors found in URDF text; whatever is wrong, nothing may be printed."""

    def found(text: str, tip: str = "tip") -> list[Finding]:
        file = tmp_path / "arm.urdf"
        file.write_text(text, encoding="utf-8")
        errors = faults(lambda: read_urdf(file, tip))
        assert all(error.file == str(file) and error.mend for error in errors)
        assert capfd.readouterr() == ("", "")
        return errors

    return found


def altered(old: str, new: str) -> str:
    assert old in URDF
    return URDF.replace(old, new, 1)


@pytest.mark.parametrize(
    ("text", "place", "what", "mend"),
    [
        ("<robot>\n<link name='a'>\n</robot>", "line 3, column 3", "not XML", "mend"),
        ("hello", "line 1, column 1", "not XML", "mend"),
        ("<sdf/>", "", "<sdf>", "<robot>"),
        ('<robot xmlns:xacro="http://www.ros.org/wiki/xacro"><xacro:macro/></robot>', "", "xacro", "expand"),
        ('<robot name="none"/>', "", "no link", "links"),
        (altered('<child link="fore"/>', '<child link="for"/>'), "joint `elbow`", "`for` is not defined", "`fore`"),
        (altered('<parent link="upper"/>', ""), "joint `elbow`", "no parent", "<parent"),
        (altered('name="elbow"', 'name="shoulder"'), "joint `shoulder`", "two joints", "own"),
        (altered('name="elbow" ', ""), "joint number 2", "no name", "name="),
        (altered('"elbow" type="revolute"', '"elbow" type="floating"'), "joint `elbow`", "`floating`", "`revolute`"),
        (altered('"elbow" type="revolute"', '"elbow" type="revolut"'), "joint `elbow`", "`revolut`", "`revolute`"),
        (altered('<axis xyz="0 0 1"/>', '<axis xyz="0 0 0"/>'), "joint `shoulder`", "axis", "direction"),
        (altered('<axis xyz="0 0 1"/>', '<axis xyz="0 1"/>'), "joint `shoulder`", "three numbers", '"0 0 1"'),
        (altered('<axis xyz="0 0 1"/>', '<axis xyz="0 0 nan"/>'), "joint `shoulder`", "three numbers", '"0 0 1"'),
        (altered('<mass value="0.3"/>', '<mass value="0,3"/>'), "link `upper`", "not a number", "decimal point"),
        (altered('<mass value="0.3"/>', ""), "link `upper`", "no <mass>", "<mass>"),
        (altered('iyy="1.2e-3" ', ""), "link `upper`", "no `iyy`", "iyy="),
        (altered('<mass value="0.3"/>', '<mass value="-0.3"/>'), "link `upper`", "-0.3 kg", "0 or more"),
        (altered('ixx="1e-4"', 'ixx="-1e-4"'), "link `upper`", "below zero", "signs"),
        (altered('ixy="0"', 'ixy="1e-3"'), "link `upper`", "below zero", "signs"),
        (
            altered('<limit lower="-3" upper="3" effort="1" velocity="1"/>', ""),
            "joint `shoulder`",
            "range",
            "continuous",
        ),
        (altered('lower="-3" upper="3"', 'lower="3" upper="-3"'), "joint `shoulder`", "above", "exchange"),
        (
            altered('<axis xyz="0 0 1"/>', '<axis xyz="0 0 1"/><mimic joint="elbow"/>'),
            "joint `shoulder`",
            "mimics",
            "coupling",
        ),
    ],
)
def test_one_fault_is_told_once_with_its_place_and_mend(against, text, place, what, mend):
    errors = against(text)
    assert [error.place for error in errors if what in error.what and mend in error.mend] == [place], errors


def test_a_tip_that_is_no_link_comes_with_the_one_that_was_meant(against):
    (error,) = against(URDF, "tipp")
    assert "`tipp`" in error.place
    assert "`tip`" in error.mend


def test_a_tip_before_the_last_joint_is_refused_with_the_joint(against):
    (error,) = against(URDF, "upper")
    assert "`elbow`" in error.what
    assert "beyond the last joint" in error.mend


def test_a_tree_is_refused_with_the_joints_that_part(against):
    branch = (
        '<link name="thumb"/><joint name="grip" type="revolute"><parent link="upper"/><child link="thumb"/>'
        '<limit lower="0" upper="1" effort="1" velocity="1"/></joint></robot>'
    )
    forked, without_mass = against(URDF.replace("</robot>", branch))
    assert "`elbow`" in forked.what
    assert "`grip`" in forked.what
    assert forked.place == "link `upper`"
    assert without_mass.place == "joint `grip`"


def test_a_link_with_two_parents_is_refused_with_both_joints(against):
    second = '<joint name="strut" type="fixed"><parent link="base"/><child link="fore"/></joint></robot>'
    errors = against(URDF.replace("</robot>", second))
    (error,) = [error for error in errors if error.place == "link `fore`"]
    assert "`elbow`" in error.what
    assert "`strut`" in error.what


def test_loose_links_are_named(against):
    (error,) = against(URDF.replace("</robot>", '<link name="table"/></robot>'))
    assert "`base`" in error.what
    assert "`table`" in error.what
    assert "join" in error.mend


def test_a_loop_is_named(against):
    errors = against(altered('<parent link="base"/>', '<parent link="fore"/>'))
    (error,) = [error for error in errors if "loop" in error.what]
    assert "`upper`" in error.what
    assert "`fore`" in error.what


def test_a_body_without_mass_is_refused_with_its_joint_and_links(against):
    text = URDF[: URDF.index('<link name="fore">')] + '<link name="fore"/>' + URDF[URDF.index('  <link name="tip"/>') :]
    (error,) = against(text)
    assert error.place == "joint `elbow`"
    assert "`fore` and `tip`" in error.mend


def test_an_arm_that_cannot_move_is_refused(against):
    text = URDF.replace('"revolute"', '"fixed"')
    (error,) = against(text)
    assert "no joint moves" in error.what


def test_faults_of_many_links_and_joints_are_told_at_once(against):
    text = altered('ixx="1e-4"', 'ixx="x"').replace('<parent link="upper"/>', '<parent link="uper"/>')
    text = text.replace('<axis xyz="0 0 1"/>', '<axis xyz="0 0 0"/>', 1)
    assert {error.place for error in against(text)} == {"link `upper`", "joint `elbow`", "joint `shoulder`"}


def test_moments_that_no_body_has_are_doubted_and_still_read(tmp_path):
    file = tmp_path / "arm.urdf"
    file.write_text(altered('izz="1.2e-3"', 'izz="2.4e-3"'), encoding="utf-8")
    findings = Findings()
    read_urdf(file, "tip", findings=findings)
    (finding,) = findings.found
    assert finding.level == "warning"
    assert finding.place == "link `upper`"
    assert "together" in finding.what


def test_a_warning_without_a_listener_is_one_of_pythons_own(tmp_path):
    file = tmp_path / "arm.urdf"
    file.write_text(altered('lower="-3" upper="3"', 'lower="0" upper="0"'), encoding="utf-8")
    with pytest.warns(InputWarning, match="no limit") as caught:
        read_urdf(file, "tip")
    assert caught[0].filename == __file__


def test_a_missing_urdf_is_an_error_like_any_other(tmp_path):
    assert "no such file" in only_fault(lambda: read_urdf(tmp_path / "arm.urdf", "tip")).what


@settings(max_examples=150, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(cut=st.integers(0, len(URDF)), junk=st.text(max_size=4), gone=st.integers(0, 30))
def test_whatever_is_cut_or_typed_into_the_text_the_answer_is_a_chain_or_an_input_error(
    tmp_path, capfd, cut, junk, gone
):
    file = tmp_path / "arm.urdf"
    file.write_text(URDF[:cut] + junk + URDF[cut + gone :], encoding="utf-8")
    with contextlib.suppress(InputError):
        read_urdf(file, "tip", findings=Findings())
    assert capfd.readouterr() == ("", "")
