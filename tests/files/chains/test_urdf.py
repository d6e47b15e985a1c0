from __future__ import annotations

import numpy as np
import pytest

from armeval.errors import Findings
from armeval.files.chains.urdf import read_urdf
from tests.files.samples import URDF
from tests.random_arms import chain_of

POINT = '<inertial><mass value="1"/><inertia ixx="1" ixy="0" ixz="0" iyy="1" iyz="0" izz="1"/></inertial>'


def one_joint(kind: str, axis: str, limit: str = '<limit lower="-1" upper="1" effort="1" velocity="1"/>') -> str:
    return (
        f'<robot name="one"><link name="base"/><link name="arm">{POINT}</link><link name="tip"/>'
        f'<joint name="j" type="{kind}"><parent link="base"/><child link="arm"/><axis xyz="{axis}"/>{limit}</joint>'
        '<joint name="f" type="fixed"><parent link="arm"/><child link="tip"/><origin xyz="1 0 0"/></joint></robot>'
    )


def test_the_sample_reads_as_it_stands():
    chain = chain_of(URDF)
    assert chain.joints == ("shoulder", "elbow")
    assert not chain.prismatic.any()
    np.testing.assert_array_equal(chain.placement[:, :, :3], np.tile(np.eye(3), (2, 1, 1)))
    np.testing.assert_array_equal(chain.placement[:, :, 3], [[0, 0, 0], [0.2, 0, 0]])
    np.testing.assert_array_equal(chain.mass, [0.3, 0.2])
    np.testing.assert_array_equal(chain.center, [[0.1, 0, 0], [0.09, 0, 0]])
    np.testing.assert_allclose(chain.inertia[1], np.diag([1e-4, 7e-4, 7e-4]), rtol=1e-15, atol=1e-18)
    np.testing.assert_array_equal(chain.tip, [0.18, 0, 0])
    np.testing.assert_array_equal(chain.lower, [-3, -2.5])
    assert chain.tip_name == "tip"


@pytest.mark.parametrize("axis", ["1 0 0", "0 1 0", "0 0 1", "-1 0 0", "0 -1 0", "0 0 -1", "1e-6 0 -1", "3 -4 12"])
def test_every_frame_has_its_axis_along_z_and_stays_a_rotation(axis):
    chain = chain_of(one_joint("revolute", axis))
    rotation = chain.placement[0, :, :3]
    wanted = np.array([float(part) for part in axis.split()])
    np.testing.assert_allclose(rotation[:, 2], wanted / np.linalg.norm(wanted), rtol=0, atol=1e-15)
    np.testing.assert_allclose(rotation.T @ rotation, np.eye(3), rtol=0, atol=1e-15)
    assert np.linalg.det(rotation) == pytest.approx(1.0, abs=1e-15)


def test_an_axis_that_is_not_told_is_x():
    untold = one_joint("revolute", "1 0 0").replace('<axis xyz="1 0 0"/>', "")
    np.testing.assert_allclose(chain_of(untold).placement[0, :, 2], [1, 0, 0], atol=1e-15)


def test_a_continuous_joint_has_no_limits_and_slides_not():
    chain = chain_of(one_joint("continuous", "0 0 1", ""))
    assert (chain.lower[0], chain.upper[0]) == (-np.inf, np.inf)
    assert not chain.prismatic[0]


def test_a_prismatic_joint_slides_within_its_range():
    chain = chain_of(one_joint("prismatic", "0 0 2"))
    assert chain.prismatic[0]
    assert (chain.lower[0], chain.upper[0]) == (-1.0, 1.0)


def test_a_range_of_nothing_is_taken_as_no_limit_and_said():
    findings = Findings()
    text = one_joint("revolute", "0 0 1", '<limit lower="0" upper="0" effort="0" velocity="0"/>')
    chain = _read(text, findings)
    assert np.isinf([chain.lower[0], chain.upper[0]]).all()
    (finding,) = findings.found
    assert finding.level == "warning"
    assert finding.place == "joint `j`"


def test_parts_that_do_not_move_are_lumped():
    further = URDF.replace(
        "</robot>",
        '<link name="lamp"><inertial><mass value="0.1"/>'
        '<inertia ixx="0" ixy="0" ixz="0" iyy="0" iyz="0" izz="0"/></inertial></link>'
        '<joint name="screw" type="fixed"><parent link="fore"/><child link="lamp"/><origin xyz="0 0.3 0"/></joint>'
        "</robot>",
    )
    chain = chain_of(further)
    assert chain.mass[1] == pytest.approx(0.3)
    np.testing.assert_allclose(chain.center[1], [0.2 * 0.09 / 0.3, 0.1 * 0.3 / 0.3, 0.0], atol=1e-15)
    reduced = 0.2 * 0.1 / 0.3  # two bodies about their common centre: reduced mass times distance squared
    assert chain.inertia[1, 2, 2] == pytest.approx(7e-4 + reduced * (0.09**2 + 0.3**2), rel=1e-14)


def test_meshes_are_not_needed_and_nothing_is_printed(capfd, tmp_path):
    visual = (
        '<visual><geometry><mesh filename="package://none/none.stl"/></geometry><material name="steel"/></visual>'
        "<collision><geometry/></collision>"
    )
    chain_of(URDF.replace('<link name="upper">', f'<link name="upper">{visual}'))
    assert capfd.readouterr() == ("", "")


def test_a_limit_without_effort_and_speed_will_do(capfd):
    chain = chain_of(one_joint("revolute", "0 0 1", '<limit lower="-1" upper="2"/>'))
    assert chain.upper[0] == 2.0
    assert capfd.readouterr() == ("", "")


def test_names_with_signs_of_xml_in_them_survive():
    chain = chain_of(URDF.replace("shoulder", "a &amp; &quot;b&quot; &lt;c&gt;"))
    assert chain.joints[0] == 'a & "b" <c>'


def test_names_that_mean_something_to_pinocchio_are_names_like_any_other():
    chain = chain_of(URDF.replace('"base"', '"universe"').replace('"shoulder"', '"universe"'))
    assert chain.joints == ("universe", "elbow")


def test_a_part_with_moments_and_no_mass_counts_with_its_moments():
    flywheel = URDF.replace(
        '<link name="tip"/>',
        '<link name="tip"><inertial><mass value="0"/>'
        '<inertia ixx="1e-3" ixy="0" ixz="0" iyy="1e-3" iyz="0" izz="2e-3"/></inertial></link>',
    )
    assert chain_of(flywheel).inertia[1, 2, 2] == pytest.approx(7e-4 + 2e-3)


def _read(text: str, findings: Findings):
    import tempfile
    from pathlib import Path

    with tempfile.TemporaryDirectory() as folder:
        file = Path(folder) / "arm.urdf"
        file.write_text(text, encoding="utf-8")
        return read_urdf(file, "tip", findings=findings)
