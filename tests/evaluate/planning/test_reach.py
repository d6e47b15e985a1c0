"""How places along a path are told, and what counts as one bad stretch."""

import numpy as np

from armeval.evaluate.planning.reach import RowPlaces, find_beyond_range, find_singular, stretches
from tests.planar_arms import planar_chain


def test_bad_samples_within_two_millimetres_are_one_stretch():
    arc = np.arange(20) * 1e-3
    bad = np.zeros(20, dtype=bool)
    bad[[3, 4, 6, 12]] = True
    assert list(stretches(bad, arc)) == [slice(3, 7), slice(12, 13)]
    assert list(stretches(np.zeros(20, dtype=bool), arc)) == []


def test_places_are_told_by_the_points_around_them():
    rows = RowPlaces(np.array([0.0, 0.1, 0.1, 0.25]))
    assert rows.text(0.02, 0.05) == "points 1 to 2, s = 20.00 mm to 50.00 mm"
    assert rows.text(0.02, 0.2) == "points 1 to 4, s = 20.00 mm to 200.0 mm"
    assert rows.text(0.0, 0.0) == "point 1, s = 0 mm"
    assert rows.text(0.25, 0.25) == "point 4, s = 250.0 mm"


def test_a_pose_that_jumps_where_the_arm_is_well_placed_asks_for_other_rest_angles():
    chain = planar_chain((0.2, 0.2))
    q = np.array([[0.3, 1.2]] * 5 + [[1.5, -1.2]] * 5)
    arc = np.arange(10) * 1e-4
    found = find_singular(chain, q, np.ones(10, dtype=bool), arc, 1e-3, RowPlaces(np.array([0.0, 9e-4]))).found
    assert len(found) == 1
    assert found[0].what == (
        "the pose nearest to the rest angles changes at once: joint `elbow` would have to jump by 138 deg"
    )
    assert "rest_angle" in found[0].mend


def test_an_arm_that_turns_about_a_far_axis_is_not_near_singular():
    chain = planar_chain((0.2, 0.2))
    q = np.column_stack([np.linspace(0.0, 1.0, 1000), np.full(1000, 1.0)])
    arc = np.arange(1000) * 1e-3 * 0.35
    assert not find_singular(chain, q, np.ones(1000, dtype=bool), arc, 1e-3, RowPlaces(arc[[0, -1]])).found


def test_every_joint_beyond_its_range_is_told():
    chain = planar_chain((0.2, 0.2), limit=1.0)
    found = find_beyond_range(chain, np.array([[0.0, 0.0], [1.1, -1.2], [0.5, 0.0], [-1.3, 0.0]])).found
    assert [finding.place for finding in found] == ["points 2 to 4", "point 2"]
