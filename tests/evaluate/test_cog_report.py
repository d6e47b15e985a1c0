from __future__ import annotations

import json
import math

import numpy as np
import pytest

from armeval.errors import InputError
from armeval.evaluate.cog_report import cog_report
from armeval.model.arm import Arm
from armeval.model.chain import Chain
from armeval.model.cogmap import CogMap
from armeval.model.drive import Drive
from armeval.model.servo import Servo
from armeval.model.trial import Compensation

ANGLE = 2.0 * np.pi * np.arange(1024) / 1024
LIFT = CogMap(
    torque=0.016 * np.sin(84 * ANGLE + 0.4) + 0.004 * np.sin(12 * ANGLE + 1.0),
    friction=0.003,
    friction_ripple=0.003 + 0.0005 * np.sqrt(2.0) * np.sin(2 * ANGLE),
    noise=1e-4,
    noise_from="repeats",
    removed_mean=0.001,
    widest_gap=0.01,
    directions=2,
    samples=4000,
    distinct=1000,
    source="maps/lift.csv",
)


def arm(**maps: CogMap | None) -> Arm:
    n = len(maps)
    chain = Chain(
        joints=tuple(maps),
        prismatic=np.zeros(n, dtype=bool),
        placement=np.tile(np.eye(3, 4), (n, 1, 1)),
        mass=np.ones(n),
        center=np.zeros((n, 3)),
        inertia=np.tile(np.eye(3), (n, 1, 1)),
        tip=np.array([0.1, 0.0, 0.0]),
        lower=np.full(n, -3.0),
        upper=np.full(n, 3.0),
    )
    drives = tuple(Drive(joint=joint, slots=12, poles=14, cog_map=cog_map) for joint, cog_map in maps.items())
    return Arm("two joints", chain, drives, Servo("joint_pd", period=1e-3), np.array([0.0, 0.0, -9.80665]))


def test_the_document_says_what_the_map_says() -> None:
    report = cog_report(arm(turn=None, lift=LIFT), title="Harbour outline", warnings=["mind the gap"])
    document = json.loads(report.to_json())
    assert document["schema"] == "armeval/map/1"
    assert document["trial"] == "Harbour outline"
    assert document["warnings"] == ["mind the gap"]
    (entry,) = document["maps"]
    assert entry["joint"] == "lift"
    assert entry["peak_to_peak_Nm"] == pytest.approx(np.ptp(LIFT.torque))
    assert entry["rms_Nm"] == pytest.approx(math.sqrt((0.016**2 + 0.004**2) / 2))
    assert entry["friction_Nm"] == 0.003
    assert entry["friction_ripple_rms_Nm"] == pytest.approx(0.0005)
    assert entry["noise_Nm"] == 1e-4
    assert entry["expected_order"] == 84
    assert entry["file"] == "maps/lift.csv"
    assert [order["order"] for order in entry["orders"]] == [84, 12]
    assert [order["kind"] for order in entry["orders"]] == ["expected", "tolerance"]
    assert entry["orders"][0]["amplitude_Nm"] == pytest.approx(0.016)
    assert entry["orders"][0]["phase_rad"] == pytest.approx(0.4)
    assert len(entry["detents_rad"]) == 84
    assert entry["compensation"]["rms_before_Nm"] == pytest.approx(entry["rms_Nm"])
    assert 0.0 < entry["compensation"]["share_left"] < 0.1
    assert document["agreement"] == []


def test_noise_adds_nothing_to_the_peaks_that_are_told() -> None:
    noisy = LIFT.torque + 1e-3 * np.random.default_rng(1).standard_normal(1024)
    (entry,) = cog_report(arm(lift=CogMap(torque=noisy, noise=1e-3))).to_document()["maps"]
    assert entry["peak_to_peak_Nm"] == pytest.approx(np.ptp(LIFT.torque), rel=0.01)
    assert entry["rms_Nm"] == pytest.approx(LIFT.rms, rel=0.01)
    assert np.ptp(noisy) > 1.05 * np.ptp(LIFT.torque)


def test_a_map_of_one_direction_has_no_friction_in_the_document() -> None:
    (entry,) = json.loads(cog_report(arm(lift=CogMap(torque=LIFT.torque))).to_json())["maps"]
    assert entry["friction_Nm"] is None
    assert entry["direction_lag_rad"] is None


def test_frames_have_a_row_a_map_and_a_row_an_order() -> None:
    report = cog_report(arm(turn=LIFT, lift=LIFT))
    assert list(report.to_frame()["joint"]) == ["turn", "lift"]
    assert list(report.to_frame()["strongest_order"]) == [84, 84]
    assert list(report.orders_frame()["order"]) == [84, 12, 84, 12]


def test_a_table_that_does_harm_is_warned_of() -> None:
    report = cog_report(arm(lift=LIFT), compensation=Compensation(index_error=math.radians(1.0)))
    assert "lift: compensation with this table does more harm than good" in report.warnings[0]
    assert cog_report(arm(lift=LIFT)).warnings == ()


def test_a_strongest_order_that_the_motor_cannot_have_is_warned_of() -> None:
    (warning,) = cog_report(arm(lift=CogMap(torque=np.sin(50 * ANGLE)))).warnings
    assert "50" in warning
    assert "neither" in warning


def test_a_map_of_noise_alone_says_so_and_has_no_orders() -> None:
    report = cog_report(arm(lift=CogMap(torque=np.random.default_rng(0).standard_normal(1024))))
    assert report.maps[0].orders == ()
    assert report.orders_frame().empty
    assert "no order stands out" in report.warnings[0]
    assert json.loads(report.to_json())["maps"][0]["detents_rad"] == []


def test_a_second_map_is_compared_joint_by_joint() -> None:
    second = CogMap(torque=np.roll(LIFT.torque, 5), friction=0.004)
    report = cog_report(arm(turn=LIFT, lift=LIFT), second={"lift": second})
    (entry,) = json.loads(report.to_json())["agreement"]
    assert entry["joint"] == "lift"
    assert entry["shift_rad"] == pytest.approx(5 * 2 * np.pi / 1024, abs=1e-9)
    assert entry["friction_difference_Nm"] == pytest.approx(0.001)


def test_an_arm_without_maps_is_refused() -> None:
    with pytest.raises(InputError, match="no joint of two joints has a cog map"):
        cog_report(arm(turn=None))


def test_a_second_map_of_a_joint_that_has_none_is_refused() -> None:
    with pytest.raises(InputError, match="`turn` has no cog map"):
        cog_report(arm(turn=None, lift=LIFT), second={"turn": LIFT})
