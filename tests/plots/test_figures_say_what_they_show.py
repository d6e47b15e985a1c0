"""Each figure: units on its axes, and what it draws are the numbers that it was given."""

from __future__ import annotations

import numpy as np
import pytest
from matplotlib.axes import Axes
from matplotlib.figure import Figure

from armeval.evaluate.measuring.along_path import ErrorAlongPath
from armeval.evaluate.measuring.error_orders import ErrorOrders
from armeval.plots.along_path import along_path_plot, band_plot
from armeval.plots.cog_map import cog_map_plot, cog_orders_plot
from armeval.plots.error_orders import error_orders_plot
from armeval.plots.path import mark_stretch, path_plot
from armeval.plots.pose import pose_plot
from armeval.plots.sticking import joint_strip, largest_in_bins, region_lanes
from armeval.plots.style import AFTER, BEFORE, label_text, quiet_style
from armeval.plots.summary import SummaryRow, summary_plot
from armeval.plots.view import View, broad_view, side_view
from armeval.report.answers import Answers
from tests.planar_arms import harmonic_map


@pytest.fixture
def ax() -> Axes:
    return Figure().subplots()


def _labels(ax: Axes) -> tuple[str, str]:
    return ax.get_xlabel(), ax.get_ylabel()


def test_error_along_the_path_is_drawn_in_millimetres(ax: Axes) -> None:
    error = ErrorAlongPath(np.array([0.05, 0.15, 0.25]), np.array([[1e-3, 2e-3, 3e-3], [1e-3, 4e-3, 3e-3]]))
    assert along_path_plot(error, ax, stroke=BEFORE, label="bare") is ax
    (line,) = ax.lines
    assert line.get_xdata() == pytest.approx([50.0, 150.0, 250.0])
    assert line.get_ydata() == pytest.approx([1.0, np.sqrt(10.0), 3.0])
    assert all("[mm]" in label for label in _labels(ax))
    assert ax.get_xlim() == pytest.approx((0.0, 300.0))


def test_the_band_reaches_from_the_best_lap_to_the_worst(ax: Axes) -> None:
    error = ErrorAlongPath(np.array([0.05, 0.15]), np.array([[1e-3, 2e-3], [5e-3, 4e-3]]))
    along_path_plot(error, ax, stroke=BEFORE, label="bare")
    (band,) = ax.collections
    heights = band.get_paths()[0].vertices[:, 1]
    assert heights.min() == pytest.approx(1.0)
    assert heights.max() == pytest.approx(5.0)


def test_one_lap_has_no_band(ax: Axes) -> None:
    along_path_plot(ErrorAlongPath(np.array([0.05, 0.15]), np.array([[1e-3, 2e-3]])), ax, stroke=BEFORE, label="bare")
    assert not ax.collections


def test_a_predicted_band_keeps_its_edges(ax: Axes) -> None:
    band_plot(np.array([0.1, 0.2]), np.array([1e-3, 2e-3]), np.array([3e-3, 6e-3]), ax, stroke=AFTER)
    heights = ax.collections[0].get_paths()[0].vertices[:, 1]
    assert (heights.min(), heights.max()) == pytest.approx((1.0, 6.0))


def test_a_summary_shows_rms_and_interval_and_leaves_predictions_open(ax: Axes) -> None:
    rows = [
        SummaryRow("bare, measured", 4e-3, 3.5e-3, 4.5e-3, BEFORE, predicted=False),
        SummaryRow("bare, predicted", 4.2e-3, 4.2e-3, 4.2e-3, BEFORE, predicted=True),
    ]
    summary_plot(rows, ax)
    interval, marker, _, open_marker = ax.lines
    assert interval.get_xdata() == pytest.approx([3.5, 4.5])
    assert marker.get_xdata() == pytest.approx([4.0])
    assert open_marker.get_markerfacecolor() == "white"
    assert "[mm]" in ax.get_xlabel()
    assert [label.get_text() for label in ax.get_yticklabels()] == ["bare, measured", "bare, predicted"]


def test_the_path_is_drawn_with_target_before_and_after(ax: Axes, answers: Answers) -> None:
    assert answers.before is not None
    assert answers.after is not None
    path_plot(answers.trajectory, [answers.before, answers.after], ax)
    target, before, after = ax.lines
    path = answers.trajectory.path
    assert np.asarray(target.get_xdata()) == pytest.approx(1e3 * path[:, 1])
    assert np.asarray(target.get_ydata()) == pytest.approx(1e3 * path[:, 0])
    assert before.get_linestyle() != after.get_linestyle()
    assert all("[mm]" in label for label in _labels(ax))


def test_a_marked_stretch_keeps_to_the_path(ax: Axes, answers: Answers) -> None:
    mark_stretch(ax, answers.trajectory, 0.02, 0.05, "1", view=View(0, 1))
    (band,) = ax.lines
    assert np.asarray(band.get_xdata()) == pytest.approx(240.0)
    assert np.ptp(np.asarray(band.get_ydata())) == pytest.approx(30.0)


def test_the_arm_is_drawn_through_its_joints_in_millimetres(ax: Axes) -> None:
    skeleton = np.array([[0.0, 0.0, 0.0], [0.0, 0.0, 0.1], [0.2, 0.0, 0.1]])
    pose_plot(skeleton[:2], skeleton, ax, view=View(0, 2))
    arm = ax.lines[1]
    assert np.asarray(arm.get_xdata()) == pytest.approx([0.0, 0.0, 200.0])
    assert np.asarray(arm.get_ydata()) == pytest.approx([0.0, 100.0, 100.0])


@pytest.mark.parametrize(
    ("extent", "view"),
    [
        ((0.3, 0.1, 0.0), View(0, 1)),
        ((0.1, 0.3, 0.0), View(1, 0, leftward=True)),
        ((0.1, 0.0, 0.3), View(0, 2)),
        ((0.0, 0.3, 0.1), View(1, 2)),
    ],
)
def test_a_path_lies_broad_and_z_points_up(extent: tuple[float, float, float], view: View) -> None:
    assert broad_view(np.array([[0.0, 0.0, 0.0], extent])) == view


def test_a_view_from_above_is_turned_and_not_mirrored(ax: Axes) -> None:
    """Seen from above, x up the paper puts y to the left: x, y and the way to the eye stay right-handed."""
    View(1, 0, leftward=True).set_up(ax)
    left, right = ax.get_xlim()
    assert left > right


def test_a_flat_arm_needs_no_second_view() -> None:
    points = np.array([[0.0, 0.0, 0.0], [0.2, 0.1, 0.0]])
    assert side_view(points, View(0, 1)) is None
    assert side_view(points + np.array([[0, 0, 0], [0, 0, 0.2]]), View(0, 1)) == View(0, 2)


def test_regions_stand_where_they_are_along_the_path(ax: Axes, answers: Answers) -> None:
    run = answers.location.runs[0]
    region_lanes([(run.name, run.regions, BEFORE)], ax, length=answers.trajectory.length, numbers={"1": 0.05})
    spans = [path.get_extents() for path in ax.collections[0].get_paths()]
    assert len(spans) == len(run.regions) > 0
    for span, region in zip(spans, run.regions, strict=True):
        assert 0.5 * (span.x0 + span.x1) == pytest.approx(5e2 * (region.start_arc + region.end_arc))
        assert span.width >= 1e3 * (region.end_arc - region.start_arc) - 1e-6
    assert "[mm]" in ax.get_xlabel()
    assert [text.get_text() for text in ax.texts] == ["1"]


def test_a_joint_strip_draws_its_own_rests_only(ax: Axes, answers: Answers) -> None:
    run = answers.location.runs[0]
    ratio = answers.prediction.runs[0].ratio
    joint_strip("elbow", [(ratio, BEFORE)], [(run.name, run.events, BEFORE)], ax, length=answers.trajectory.length)
    own = [event for event in run.events if event.joint == "elbow"]
    assert len(ax.collections[0].get_paths()) == len(own) < len(run.events)
    assert "elbow" in ax.get_ylabel()
    assert "[–]" in ax.get_ylabel()
    drawn = np.asarray(ax.lines[0].get_ydata())
    assert np.nanmax(drawn) == pytest.approx(ratio.max[ratio.joints.index("elbow")])


def test_thinning_a_line_keeps_its_peaks() -> None:
    arc = np.linspace(0.0, 1.0, 10_001)
    values = np.zeros_like(arc)
    values[7777] = 3.0
    kept = largest_in_bins(arc, values, 1.0, 100)
    assert kept.shape == (100,)
    assert kept[77] == 3.0
    assert kept.sum() == 3.0


def test_a_cog_map_goes_once_round_with_its_rests_outside() -> None:
    ax = Figure().subplots(subplot_kw={"projection": "polar"})
    cog_map_plot(harmonic_map(12, 0.02), ax, rests=[(np.array([0.5, 1.5]), BEFORE, "bare")])
    outline, rests = ax.lines[0], ax.lines[-1]
    assert np.ptp(np.asarray(outline.get_xdata())) == pytest.approx(2.0 * np.pi)
    assert np.abs(np.asarray(outline.get_ydata())).max() == pytest.approx(20.0)
    assert np.asarray(rests.get_xdata()) == pytest.approx([0.5, 1.5])
    assert np.asarray(rests.get_ydata()).min() > 20.0


def test_orders_of_a_map_stand_as_stems_in_millinewton_metres(ax: Axes) -> None:
    cog_orders_plot([12, 84], np.array([2e-3, 5e-3]), ax)
    ends = [segment[1].tolist() for segment in ax.collections[0].get_segments()]
    assert ends == [pytest.approx([12.0, 2.0]), pytest.approx([84.0, 5.0])]
    assert "[mN·m]" in ax.get_ylabel()


def test_a_spectrum_is_drawn_in_degrees_with_expected_orders_named(ax: Axes) -> None:
    spectrum = ErrorOrders("lift", np.array([1.0, 2.0, 3.0]), np.radians([0.0, 1.0, 0.5]), 3.0)
    error_orders_plot([("bare", spectrum, BEFORE)], ax, expected=[2])
    assert np.asarray(ax.lines[-1].get_ydata()) == pytest.approx([0.0, 1.0, 0.5])
    assert _labels(ax) == ("order [cycles a motor turn]", "joint error [deg]")
    assert [text.get_text() for text in ax.texts] == ["2"]


def test_a_sliding_joint_errs_in_millimetres(ax: Axes) -> None:
    spectrum = ErrorOrders("slide", np.array([1.0, 2.0]), np.array([1e-3, 2e-3]), 3.0)
    error_orders_plot([("bare", spectrum, BEFORE)], ax, slides=True)
    assert np.asarray(ax.lines[-1].get_ydata()) == pytest.approx([1.0, 2.0])
    assert ax.get_ylabel() == "joint error [mm]"


@pytest.mark.parametrize("name", ["$x_$", "$", "a $ b $ c", "_hidden", "<b>&amp;"])
def test_a_name_is_drawn_as_it_is_written(name: str) -> None:
    """A formula in a run's name would be set, or would not parse and stop the report."""
    with quiet_style():
        made = Figure()
        ax = made.subplots()
        text = ax.set_title(label_text(name))
        made.canvas.draw()
        shown, is_formula = text._preprocess_math(text.get_text())
    assert not is_formula
    assert shown == name


def test_a_long_name_is_cut_to_its_place() -> None:
    assert len(label_text("n" * 300, 20)) == 20
