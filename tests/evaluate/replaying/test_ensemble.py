"""Ensembles: what is drawn, what is the same whatever the number of threads, what the bands say."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from armeval.errors import InputError
from armeval.evaluate.measuring.tracks import track
from armeval.evaluate.replaying.ensemble import ensemble
from armeval.evaluate.replaying.members import clean_tables, drawn_member
from armeval.evaluate.replaying.replay import replay
from armeval.model.spreads import Spreads
from armeval.model.trial import Compensation, StickingRule
from tests.evaluate.replaying.test_replay import three_joints
from tests.plant.truth import rests

NONE = Spreads(rotor_index=0.0, friction=0.0, torque_constant=0.0, start=0.0)
QUIET = Compensation(map_noise=0.0)


def test_the_numbers_do_not_depend_on_threads_or_on_how_many_members_there_are() -> None:
    arm, trajectory, _ = three_joints()
    settings = {
        "compensated": True,
        "seed": 4,
        "settle": 0.1,
        "compensation": Compensation(index_error=2e-3, map_noise=1e-4),
    }
    one = ensemble(arm, trajectory, members=20, threads=1, **settings)  # type: ignore[arg-type]
    two = ensemble(arm, trajectory, members=20, threads=2, **settings)  # type: ignore[arg-type]
    few = ensemble(arm, trajectory, members=5, threads=2, **settings)  # type: ignore[arg-type]
    for name in ("tracking", "deviation", "error", "sticking"):
        assert np.array_equal(getattr(one, name), getattr(two, name), equal_nan=True)
    assert np.array_equal(one.tracking[:5], few.tracking)
    other = ensemble(arm, trajectory, members=5, **(settings | {"seed": 5}))  # type: ignore[arg-type]
    assert (other.tracking != few.tracking).all()


@pytest.mark.parametrize("compensated", [False, True])
def test_members_without_spread_move_as_the_single_replay_does(compensated: bool) -> None:
    arm, trajectory, _ = three_joints()
    moved = replay(arm, trajectory, compensated=compensated, compensation=QUIET, settle=0.1)
    lap = track(
        arm, trajectory, run="one", compensated=compensated, source="prediction", lap=1, file=None, time=moved.time,
        angle=moved.angle, target=trajectory.joint, arc=trajectory.arc,
    )  # fmt: skip
    found = ensemble(
        arm, trajectory, compensated=compensated, compensation=QUIET, spreads=NONE, members=3, settle=0.1, bins=50
    )
    rms = np.sqrt(np.mean(lap.tracking**2))
    np.testing.assert_allclose(found.tracking, rms, rtol=1e-6)
    np.testing.assert_allclose(found.deviation, np.sqrt(np.mean(lap.deviation**2)), rtol=0.01)
    at = np.minimum((trajectory.arc / trajectory.length * 50).astype(int), 49)
    squares = np.bincount(at, lap.tracking**2, minlength=50) / np.bincount(at, minlength=50)
    np.testing.assert_allclose(found.error, np.tile(np.sqrt(squares), (3, 1)), rtol=1e-5)
    np.testing.assert_allclose(found.band, np.tile(np.sqrt(squares), (5, 1)), rtol=1e-5)


def test_a_joint_sticks_where_its_rests_are() -> None:
    arm, trajectory, _ = three_joints(coulomb_friction=0.03, static_friction=0.04)
    moved = replay(arm, trajectory, compensated=False, settle=0.1)
    wanted = np.zeros((3, 50))
    at = np.minimum((trajectory.arc / trajectory.length * 50).astype(int), 49)
    for rest in rests(moved.angle, moved.speed, trajectory.joint_speed, 1e-3):
        wanted[rest.joint, at[rest.first : rest.last + 1]] = 1.0
    assert wanted.any()
    assert not wanted.all()
    found = ensemble(
        arm, trajectory, compensated=False, compensation=QUIET, spreads=NONE, members=1, settle=0.1, bins=50,
        rule=StickingRule(),
    )  # fmt: skip
    assert np.array_equal(found.sticking, wanted)


def test_members_are_drawn_with_the_spreads_they_are_told() -> None:
    arm, trajectory, _ = three_joints()
    compensation = Compensation(map_noise=3e-4, table_bins=256, index_error=0.02)
    tables, start = clean_tables(arm, compensation), trajectory.joint[0]
    spreads = Spreads(friction=0.3, torque_constant=0.05, start=0.01)
    drawn = [
        drawn_member(arm, compensation, spreads, start, tables, np.random.default_rng([9, number]))
        for number in range(2000)
    ]
    index = np.array([drive.index_offset for drive in arm.drives])
    for values, spread in (
        ([member.rotor_index - index for member in drawn], 0.02),
        ([np.log(member.dry_friction) for member in drawn], 0.3),
        ([np.log(member.viscous_friction) for member in drawn], 0.3),
        ([member.torque_gain - 1.0 for member in drawn], 0.05),
        ([member.start - start for member in drawn], 0.01),
        ([(member.tables - tables)[:, 0] for member in drawn], 3e-4),
    ):
        np.testing.assert_allclose(np.std(values, axis=0), spread, rtol=0.08)
        np.testing.assert_allclose(np.mean(values, axis=0), 0.0, atol=0.1 * spread)
    assert all((member.table_index == index).all() for member in drawn)


def test_more_uncertainty_gives_wider_intervals() -> None:
    arm, trajectory, _ = three_joints()
    settings = {"compensated": True, "members": 40, "settle": 0.1, "compensation": QUIET}
    widths = []
    for rotor_index in (0.0, 0.002, 0.02):
        found = ensemble(arm, trajectory, spreads=replace(NONE, rotor_index=rotor_index), **settings)  # type: ignore[arg-type]
        low, high = found.tracking_interval
        assert low <= np.median(found.tracking) <= high
        widths.append(high - low)
    assert widths[0] < widths[1] < widths[2]


def test_results_come_as_a_table_and_as_a_document() -> None:
    arm, trajectory, _ = three_joints()
    told = []
    found = ensemble(
        arm, trajectory, compensated=False, members=16, settle=0.0, bins=10,
        progress=lambda what, done, total: told.append((what, done, total)),
    )  # fmt: skip
    assert told[-1] == ("ensemble", 2, 2)
    frame = found.to_frame()
    assert list(frame.columns) == ["arc_m", "p5_m", "p25_m", "p50_m", "p75_m", "p95_m"] + [
        f"{j}_sticks" for j in arm.joints
    ]
    assert (frame["p5_m"] <= frame["p95_m"]).all()
    content = found.to_document()
    assert content["members"] == 16
    assert [row["joint"] for row in content["sticking"]] == list(arm.joints)
    assert content["tracking_rms_m"]["low"] <= content["tracking_rms_m"]["median"] <= content["tracking_rms_m"]["high"]


def test_an_ensemble_of_none_is_refused() -> None:
    arm, trajectory, _ = three_joints()
    with pytest.raises(InputError, match="0 members"):
        ensemble(arm, trajectory, compensated=False, members=0)
    with pytest.raises(InputError, match="friction"):
        Spreads(friction=-0.1)
