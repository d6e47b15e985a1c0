"""Deviation and progress on paths that cross themselves, run back over themselves or close: truth by construction."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from armeval.evaluate.planning.path_progress import follow, path_progress
from armeval.model.trajectory import Trajectory

TURN = np.linspace(0.0, 2.0 * np.pi, 601)
PATHS = {
    "figure of eight": np.column_stack([0.2 * np.sin(TURN), 0.1 * np.sin(2.0 * TURN), 0.0 * TURN]),
    "back and forth": np.array([[0, 0, 0], [0.5, 0, 0], [0, 0, 0], [0.5, 0, 0], [0.3, 0, 0]], dtype=float),
    "closed square": np.array([[0, 0, 0], [0.3, 0, 0], [0.3, 0.3, 0], [0, 0.3, 0], [0, 0, 0]], dtype=float),
    "spiral staircase": np.column_stack([0.1 * np.cos(3 * TURN), 0.1 * np.sin(3 * TURN), 0.002 * TURN]),
    "acute zigzag": np.array([[0, 0, 0], [0.2, 0.01, 0], [0, 0.02, 0], [0.2, 0.03, 0]], dtype=float),
}


def arc_of(path):
    return np.concatenate([[0.0], np.cumsum(np.linalg.norm(np.diff(path, axis=0), axis=1))])


def points_at(path, s):
    return np.column_stack([np.interp(s, arc_of(path), column) for column in path.T])


def trajectory_on(path):
    k = len(path)
    still = np.zeros((k, 1))
    arc = arc_of(path)
    return Trajectory(np.arange(k) * 1e-3, arc, path, still, still, still, path, arc, np.array([0.0, arc[-1]]))


def side_of(path, s):
    """A unit vector across the path and out of its plane's way: along z."""
    return np.tile([0.0, 0.0, 1.0], (len(s), 1))


@pytest.mark.parametrize("name", PATHS)
def test_a_lagging_tip_is_found_on_its_own_stretch(name):
    path = PATHS[name]
    length = arc_of(path)[-1]
    target = np.linspace(0.0, length, 5000)
    # Up to 4 mm behind, up to 1 mm across; where the way back or another stretch is just as near, it must not be taken.
    tip_arc = np.clip(target - 0.004 * np.sin(40.0 * target) ** 2, 0.0, length)
    across = 0.001 * np.sin(70.0 * target)
    tip = points_at(path, tip_arc) + across[:, None] * side_of(path, target)
    deviation, arc = path_progress(tip, target, trajectory_on(path))
    assert np.all(deviation <= np.abs(across) + 1e-12)
    corner = np.zeros(len(target), dtype=bool)
    for s in arc_of(path)[1:-1] if len(path) < 10 else []:
        corner |= (tip_arc < s + 0.005) & (target > s - 0.005)
    assert arc[~corner] == pytest.approx(tip_arc[~corner], abs=2e-4)
    assert deviation[~corner] == pytest.approx(np.abs(across[~corner]), abs=2e-5)
    # Right at a corner the two legs are equally good, but no other stretch is.
    assert np.abs(arc - target).max() < 0.02


def test_a_stuck_tip_is_not_drawn_to_the_stretch_that_comes_back():
    path = PATHS["back and forth"]
    target = np.linspace(0.1, 0.4, 1000)
    tip = points_at(path, np.minimum(target, 0.2))
    _, arc = path_progress(tip, target, trajectory_on(path))
    assert arc == pytest.approx(np.minimum(target, 0.2), abs=1e-9)


def test_at_a_crossing_the_tip_belongs_to_the_stretch_of_its_target():
    # Two straight stretches cross at right angles; 3 mm beside the one, the other is nearer.
    path = np.array([[-0.1, 0, 0], [0.1, 0, 0], [0.1, 0.1, 0], [0, 0.1, 0], [0, -0.1, 0]], dtype=float)
    s = np.array([0.1 - 0.0005])
    tip = points_at(path, s) + np.array([0.0, 0.003, 0.0])
    assert path_progress(tip, s, trajectory_on(path))[0] == pytest.approx(0.003)
    assert path_progress(tip, s, trajectory_on(path), window=np.inf)[0] == pytest.approx(0.0005)


def test_a_tip_on_its_target_does_not_deviate():
    path = PATHS["figure of eight"]
    s = np.linspace(0.0, arc_of(path)[-1], 1000)
    deviation, arc = path_progress(points_at(path, s), s, trajectory_on(path))
    assert deviation == pytest.approx(0.0, abs=1e-15)
    assert arc == pytest.approx(s)


@pytest.mark.parametrize("name", PATHS)
@pytest.mark.parametrize("step", [1e-5, 3e-4, 4e-3])
def test_targets_are_followed_at_any_feed(name, step):
    path = PATHS[name]
    s = np.arange(0.0, arc_of(path)[-1], step)
    found = follow(points_at(path, s), path, arc_of(path))
    assert np.all(np.diff(found) >= 0.0)
    # Rounding a corner between two targets may cost up to one step.
    assert np.abs(found - s).max() <= step
    assert np.median(np.abs(found - s)) < 1e-9


@given(seed=st.integers(0, 10_000), name=st.sampled_from(sorted(PATHS)))
def test_targets_are_followed_through_stops_and_changes_of_feed(seed, name):
    rng = np.random.default_rng(seed)
    path = PATHS[name]
    length = arc_of(path)[-1]
    steps = rng.choice([0.0, 1e-5, 2e-4, 1e-3], size=20_000) * np.repeat(rng.uniform(0.0, 1.0, 100), 200)
    s = np.minimum(np.cumsum(steps), length)
    found = follow(points_at(path, s), path, arc_of(path))
    assert np.abs(found - s).max() <= 2e-3


@pytest.mark.parametrize("name", PATHS)
def test_rounded_targets_are_followed_within_a_few_roundings(name):
    path = PATHS[name]
    s = np.arange(0.0, arc_of(path)[-1], 6e-5)
    rounding = 2e-5
    points = np.round(points_at(path, s) / rounding) * rounding
    found = follow(points, path, arc_of(path))
    assert np.all(np.diff(found) >= 0.0)
    assert np.abs(found - s).max() < 2e-3
    assert np.median(np.abs(found - s)) < 5e-5


def test_it_finds_its_way_again_after_a_gap_over_a_turn():
    path = PATHS["back and forth"]
    s = np.arange(0.0, arc_of(path)[-1], 1e-3)
    kept = (s < 0.49) | (s > 0.51)  # the whole turn at 0.5 was not logged
    found = follow(points_at(path, s[kept]), path, arc_of(path))
    late = s[kept] > 0.56
    assert found[late] == pytest.approx(s[kept][late], abs=1e-9)


def test_a_closed_path_starts_at_its_start_and_ends_at_its_end():
    path = PATHS["closed square"]
    s = np.arange(0.0, 1.2, 1e-3)
    points = points_at(path, s) + np.array([1e-5, 1e-5, 0.0])
    found = follow(points, path, arc_of(path))
    assert found[0] < 1e-3
    assert found[-1] == pytest.approx(s[-1], abs=1e-3)


def test_a_log_that_starts_later_is_followed_from_there():
    path = PATHS["closed square"]
    s = np.arange(0.45, 1.1, 1e-3)
    assert follow(points_at(path, s), path, arc_of(path)) == pytest.approx(s, abs=1e-9)


def test_no_points_make_no_progress():
    assert follow(np.empty((0, 3)), PATHS["closed square"], arc_of(PATHS["closed square"])).shape == (0,)
