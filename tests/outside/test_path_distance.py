"""Distance from points to polylines, against shapely (GEOS) and against corner cases worked by hand.

By hand, for the polyline (0,0)-(100,0)-(100,100): (30,40) is 40 away at arc length 30; (120,130) is 36.0555 away at the
end, 200; (97,4) is 3 away at 104, on the second leg.
"""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from armeval.kernels.polyline import nearest_near


def arc_of(path):
    return np.concatenate([[0.0], np.cumsum(np.linalg.norm(np.diff(path, axis=0), axis=1))])


def nearest_anywhere(points, path):
    k = len(points)
    return nearest_near(np.asarray(points, float), np.zeros(k), np.full(k, np.inf), path, arc_of(path))


@pytest.mark.parametrize(
    ("point", "distance", "at"), [((30, 40), 40.0, 30.0), ((120, 130), 36.0555, 200.0), ((97, 4), 3.0, 104.0)]
)
def test_corner_cases_worked_by_hand(point, distance, at):
    path = np.array([[0.0, 0.0, 0.0], [100.0, 0.0, 0.0], [100.0, 100.0, 0.0]])
    found, arc = nearest_anywhere([[*point, 0.0]], path)
    assert found[0] == pytest.approx(distance, abs=5e-5)
    assert arc[0] == pytest.approx(at)


@given(seed=st.integers(0, 100_000), size=st.integers(2, 60))
def test_the_distance_to_a_random_polyline_is_shapelys(seed, size):
    shapely = pytest.importorskip("shapely")
    rng = np.random.default_rng(seed)
    flat = rng.normal(size=(size, 2))
    path = np.column_stack([flat, np.zeros(size)])
    points = np.column_stack([rng.normal(size=(40, 2)) * 1.5, np.zeros(40)])
    distance, arc = nearest_anywhere(points, path)
    line = shapely.LineString(flat)
    marks = shapely.points(points[:, :2])
    assert distance == pytest.approx(shapely.distance(line, marks), abs=1e-12)
    # Where two stretches are equally near, either arc length is right; both must give a point at that distance.
    ours = shapely.get_coordinates(shapely.line_interpolate_point(line, arc))
    assert np.linalg.norm(ours - points[:, :2], axis=1) == pytest.approx(distance, abs=1e-9)
    theirs = shapely.line_locate_point(line, marks)
    assert np.median(np.abs(arc - theirs)) < 1e-9


def test_a_pure_delay_on_a_straight_path_is_no_deviation():
    # v tau = 0.1 m/s x 20 ms = 2 mm of lag, and nothing across.
    path = np.array([[0.0, 0.0, 0.0], [1.0, 0.0, 0.0]])
    s = np.linspace(0.1, 0.9, 500)
    tip = np.column_stack([s - 0.1 * 0.020, 0.0 * s, 0.0 * s])
    distance, arc = nearest_near(tip, s, np.full(500, 0.01), path, arc_of(path))
    assert distance == pytest.approx(0.0, abs=1e-15)
    assert s - arc == pytest.approx(2e-3)
