"""The shipped demo against the truth of the plant that made it."""

import json
from dataclasses import replace

import numpy as np
import pytest

from armeval.evaluate.measure import measure
from armeval.files.demo import demo_folder, write_demo
from armeval.files.trial_file import read_trial
from tests.plant import harbour, make_demo
from tests.plant.planner import stops


@pytest.fixture(scope="module")
def trial(tmp_path_factory):
    return read_trial(write_demo(tmp_path_factory.mktemp("demo") / "harbour"))


@pytest.fixture(scope="module")
def truth():
    return json.loads(make_demo.TRUTH.read_text(encoding="utf-8"))


@pytest.fixture(scope="module")
def measurement(trial):
    return measure(trial)


def test_the_demo_stays_small():
    assert sum(file.stat().st_size for file in demo_folder().rglob("*") if file.is_file()) < 1_500_000


def test_the_demo_reads_without_a_finding(trial):
    assert trial.findings == ()
    assert [(run.name, run.compensated, len(run.laps)) for run in trial.runs] == [
        ("bare", False, 3),
        ("smoothed", True, 3),
    ]


def test_the_path_is_the_outline_that_its_script_draws(trial):
    assert trial.path.points * 1e3 == pytest.approx(harbour.tip_points(), abs=1e-9)


def test_the_outline_is_long_and_has_sharp_corners_and_slow_curves():
    points = harbour.tip_points() * 1e-3
    legs = np.linalg.norm(np.diff(points, axis=0), axis=1)
    corners = stops(points, np.radians(5.0))
    assert legs.sum() == pytest.approx(1.3, abs=0.05)
    assert len(corners) - 1 > 40
    passed = len(points) - len(corners)
    assert passed > 20  # chords of the arcs, gone through without a stop
    assert points[0] == pytest.approx(points[-1])


def test_laps_last_as_long_as_the_trapezoids_of_their_stretches(trial, truth):
    for run in trial.runs:
        for lap in run.laps:
            assert lap.time[-1] - lap.time[0] == pytest.approx(truth["lap_s"], abs=2e-3)


@pytest.mark.parametrize("kind", ["tracking", "deviation"])
@pytest.mark.parametrize("index", [0, 1])
def test_the_measured_rms_is_the_plant_s_own_within_one_percent(measurement, truth, index, kind):
    run = measurement.runs[index]
    true = truth["runs"][run.name]
    assert getattr(run, kind).rms == pytest.approx(true[f"{kind}_rms_m"], rel=0.01)
    for lap, true_lap in zip(run.laps, true["laps"], strict=True):
        assert getattr(lap, kind).rms == pytest.approx(true_lap[f"{kind}_rms_m"], rel=0.01)


def test_the_trial_file_does_not_know_what_the_plant_drew(trial):
    for drive, true in zip(trial.arm.drives, make_demo.demo_drives(), strict=True):
        assert true.coulomb_friction != pytest.approx(drive.coulomb_friction, rel=1e-3)
        assert true.index_offset != pytest.approx(drive.index_offset, abs=1e-4)


@pytest.mark.parametrize(("name", "compensated", "seed"), make_demo.RUNS)
def test_the_shipped_logs_are_what_the_plant_does_with_the_shipped_arm(trial, name, compensated, seed):
    """Two seconds of the first lap: an arm.toml or map changed without making the logs anew shows at once."""
    planned = make_demo.demo_plan()
    beginning = replace(planned, **{key: value[:2000] for key, value in vars(planned).items()})
    (lap,) = make_demo.run_laps(beginning, compensated, seed, count=1)
    logged = trial.run(name).laps[0]
    rows = len(lap.time[:: make_demo.LOG_EVERY])
    assert logged.time[:rows] == pytest.approx(lap.time[:: make_demo.LOG_EVERY])
    strayed = np.abs(logged.angle[:rows] - lap.true_angle[:: make_demo.LOG_EVERY]) / logged.resolution
    assert strayed.max() < 4.0  # counts: jitter and rounding make up to two or three


def test_the_stored_table_is_the_motor_as_it_was_on_the_bench():
    bench = make_demo.shipped.MOTORS["tern"]["turn"].harmonics
    table = make_demo.stored_table(make_demo.shipped.FOLDER / "tern" / "maps" / "turn.csv", np.nan)
    angle = 2.0 * np.pi * np.arange(len(table)) / len(table)
    wanted = sum(amplitude * np.sin(order * angle + phase) for order, amplitude, phase in bench)
    assert np.sqrt(np.mean((table - wanted) ** 2)) < 0.05 * np.sqrt(np.mean(wanted**2))
