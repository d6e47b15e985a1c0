"""The log of the demo that a hand leads is the one that its maker writes, and fits the shipped arm."""

from __future__ import annotations

import numpy as np
import pyarrow.parquet as pq

from tests.plant.make_demo import JOINTS, demo_drives, demo_plant
from tests.plant.make_feel_demo import DEMO, LOG_EVERY, PERIOD, hand_path


def test_the_logged_tip_goes_where_the_invented_hand_went():
    columns = pq.read_table(DEMO / "logs" / "led-1.parquet").to_pydict()
    drives = demo_drives()
    counts = np.column_stack([columns[f"{joint}.angle [count]"] for joint in JOINTS])
    tip = demo_plant(drives).tip(counts * [drive.resolution for drive in drives])
    assert set(np.diff(columns["time [ms]"])) == {round(1e3 * PERIOD * LOG_EVERY)}
    assert np.linalg.norm(tip - hand_path()[::LOG_EVERY], axis=1).max() < 5e-4


def test_nothing_in_the_log_tells_the_force_or_where_the_hand_meant_to_go():
    names = pq.read_schema(DEMO / "logs" / "led-1.parquet").names
    assert not [name for name in names if "target" in name or "torque" in name]
