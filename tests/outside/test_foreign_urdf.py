"""Two small arms that others drew, from the example-robot-data distribution (BSD): `finger_edu`, `double_pendulum`.

The files are found through ARMEVAL_OPEN_DATA. Names, masses and lengths below stand in the files; how the arms move and
weigh is compared with pinocchio reading the same text.
"""

from __future__ import annotations

import os
from pathlib import Path

import numpy as np
import pytest

from armeval.errors import Findings
from armeval.files.chains.urdf import read_urdf
from tests.outside.plain_chain import agree
from tests.random_arms import pinocchio_model

FOLDER = Path(os.environ.get("ARMEVAL_OPEN_DATA", ".")) / "urdf"

pytestmark = pytest.mark.skipif("ARMEVAL_OPEN_DATA" not in os.environ, reason="ARMEVAL_OPEN_DATA is not set")


@pytest.mark.parametrize(("name", "tip"), [("finger_edu", "finger_tip_link"), ("double_pendulum", "link2")])
def test_a_foreign_arm_moves_and_weighs_as_pinocchio_says(name, tip, capfd):
    file = FOLDER / f"{name}.urdf"
    chain = read_urdf(file, tip, findings=Findings())
    assert capfd.readouterr() == ("", "")
    agree(chain, pinocchio_model(file.read_text(encoding="utf-8")), tip, np.random.default_rng(1), poses=20)


def test_the_finger_ends_in_a_tip_that_is_lumped_with_its_last_link():
    findings = Findings()
    chain = read_urdf(FOLDER / "finger_edu.urdf", "finger_tip_link", findings=findings)
    assert findings.found == []
    assert chain.joints == (
        "finger_base_to_upper_joint",
        "finger_upper_to_middle_joint",
        "finger_middle_to_lower_joint",
    )
    np.testing.assert_allclose(chain.mass, [0.14854, 0.14854, 0.03070 + 0.01], rtol=1e-12)
    assert np.linalg.norm(chain.tip) == pytest.approx(np.hypot(0.008, 0.16))
    np.testing.assert_allclose(chain.placement[0, :, 2], [-1, 0, 0], atol=1e-15)
    np.testing.assert_allclose(chain.placement[0, :, 3], [0, 0, 0.283], atol=1e-15)


def test_the_exporters_ranges_of_nothing_are_no_limits():
    findings = Findings()
    chain = read_urdf(FOLDER / "double_pendulum.urdf", "link2", findings=findings)
    assert np.isinf(chain.lower).all()
    assert np.isinf(chain.upper).all()
    assert [finding.place for finding in findings.found] == ["joint `joint1`", "joint `joint2`"]
