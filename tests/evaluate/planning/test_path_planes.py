import numpy as np
import pytest

from armeval.evaluate.planning.path_planes import lay_planes, plane_crossings
from tests.slides import along, delayed, lap_of

SQUARE = along([[0.0, 0.0, 0.0], [0.1, 0.0, 0.0], [0.1, 0.3, 0.0]], feed=0.1)


def test_planes_keep_away_from_corners_and_share_the_path_by_length():
    planes = lay_planes(SQUARE, 20)
    assert len(planes.at) == 20
    assert (planes.at < 0.1).sum() == 5
    assert planes.at[[0, 4, 5, 19]] == pytest.approx([0.01, 0.09, 0.11, 0.39])
    np.testing.assert_allclose(planes.point[5], [0.1, 0.01, 0.0], atol=1e-12)
    np.testing.assert_allclose(planes.direction[[0, 19]], [[1.0, 0.0, 0.0], [0.0, 1.0, 0.0]], atol=1e-12)


def test_every_stretch_has_a_plane():
    assert len(lay_planes(SQUARE, 1).at) == 2


def test_a_late_tip_crosses_late_and_at_the_same_place():
    lap = lap_of(SQUARE, delayed(SQUARE, 0.0305))
    planes = lay_planes(SQUARE, 8)
    point, time = plane_crossings(lap, planes)
    np.testing.assert_allclose(point, planes.point, atol=1e-9)
    np.testing.assert_allclose(time, planes.at / 0.1 + 0.0305, atol=1e-9)


def test_a_tip_that_hangs_back_and_forth_counts_where_it_first_crosses():
    shake = np.outer(0.004 * np.sin(40.0 * SQUARE.time), [1.0, 0.0, 0.0])
    lap = lap_of(SQUARE, SQUARE.tip + shake)
    planes = lay_planes(SQUARE, 8)
    _, time = plane_crossings(lap, planes)
    side = lap.tip[:, 0] - planes.point[0, 0]
    assert time[0] == pytest.approx(SQUARE.time[int(np.argmax(side >= 0.0))], abs=1.1e-3)


def test_a_curve_that_meets_its_own_planes_again_is_crossed_once_a_plane():
    angle = np.linspace(0.0, 1.9 * np.pi, 400)
    ring = 0.05 * np.column_stack([np.cos(angle), np.sin(angle), 0.0 * angle])
    path = along(ring, feed=0.05)
    one_stretch = type(path)(**{**vars(path), "corners": path.path_arc[[0, -1]]})
    lap = lap_of(one_stretch, one_stretch.tip * 1.01)
    planes = lay_planes(one_stretch, 50)
    point, _ = plane_crossings(lap, planes)
    np.testing.assert_allclose(np.linalg.norm(point - planes.point, axis=1), 5e-4, rtol=0.02)


def test_a_plane_that_is_never_crossed_is_unknown():
    lap = lap_of(SQUARE, np.minimum(SQUARE.tip, [0.045, 1.0, 1.0]))
    point, time = plane_crossings(lap, lay_planes(SQUARE, 8))
    assert np.isnan(point[1]).all()
    assert np.isnan(time[1])
    assert np.isfinite(time[0])
