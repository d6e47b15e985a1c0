"""The standstill map of a real motor, made by others' firmware, read with nothing but a table of its columns.

Source: heitor-andrade/laas_anti_cogging at eb0391d736f1aaaf6cb0c72ea5a9b5c1350284c4, BSD 3-Clause, (c) 2023
heitor-andrade, file ``stopped_data.txt``. What the map says is tested in ``test_open_motor_map.py``; here it is only
brought in. Skipped unless the environment variable ARMEVAL_OPEN_DATA names the folder that holds it.
"""

from __future__ import annotations

import os
from pathlib import Path

import numpy as np
import pytest

from armeval.errors import Findings
from armeval.evaluate.cogging.cog_resample import resample
from armeval.files.cog_map_file import read_cog_map

FOLDER = os.environ.get("ARMEVAL_OPEN_DATA")
FILE = Path(FOLDER or ".") / "motor-map" / "stopped_data.txt"
pytestmark = pytest.mark.skipif(not FOLDER or not FILE.exists(), reason="ARMEVAL_OPEN_DATA holds no motor-map")

COLUMNS = {"Position": "angle [rad]", "Iq": "hold_current [A]"}


def test_the_file_is_read_as_it_is() -> None:
    cog_map = read_cog_map(FILE, torque_constant=1.0, columns=COLUMNS, findings=Findings())
    assert cog_map.samples == 31_666
    assert cog_map.directions == 1
    assert cog_map.quantity == "hold_current"


def test_with_a_direction_added_it_is_the_same_as_from_the_numbers(tmp_path: Path) -> None:
    table = np.genfromtxt(FILE, delimiter=",", skip_header=1)
    target = table[:, 1] + table[:, 6]
    direction = np.where(np.arange(len(target)) <= np.argmax(target), 1, -1)
    lines = FILE.read_text().splitlines()
    file = tmp_path / "both.txt"
    rows = [f"{line}, {turned}" for line, turned in zip(lines[1:], direction, strict=True)]
    file.write_text("\n".join([f"{lines[0]}, direction", *rows]))
    cog_map = read_cog_map(file, torque_constant=0.5, columns=COLUMNS, findings=Findings())
    expected, _ = resample(table[:, 1], -0.5 * table[:, 3], 1.0 * direction, quantity="hold_current")
    np.testing.assert_allclose(cog_map.torque, expected.torque, atol=1e-12)
    assert cog_map.friction == pytest.approx(expected.friction)
