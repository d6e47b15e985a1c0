import json

import numpy as np
import pytest

from armeval.evaluate.compare import compare
from armeval.evaluate.run_errors import run_errors
from tests.slides import along, lap_of

TRAJECTORY = along([[0.0, 0.0, 0.0], [0.1, 0.0, 0.0], [0.1, 0.1, 0.0]], feed=0.05)
WAVE = np.column_stack(
    [0.0 * TRAJECTORY.arc, 0.0 * TRAJECTORY.arc, 1e-3 * np.sin(2.0 * np.pi * TRAJECTORY.arc / 0.007) ** 2]
)


def run(name, scale, *, noise=0.0, laps=3):
    rng = np.random.default_rng(len(name))
    tips = [TRAJECTORY.tip + scale * WAVE + noise * rng.standard_normal(WAVE.shape) for _ in range(laps)]
    return run_errors([lap_of(TRAJECTORY, tip, lap=i + 1, run=name) for i, tip in enumerate(tips)])


def test_an_error_halved_is_a_reduction_of_a_half():
    found = compare(run("bare", 1.0), run("compensated", 0.5))
    assert (found.before, found.after) == ("bare", "compensated")
    assert found.tracking_reduction == pytest.approx(0.5)
    assert (found.tracking_reduction_low, found.tracking_reduction_high) == pytest.approx((0.5, 0.5), abs=1e-6)
    assert found.deviation_reduction == pytest.approx(0.5)


def test_an_error_that_grew_is_a_negative_reduction():
    assert compare(run("bare", 0.5), run("compensated", 1.0)).tracking_reduction == pytest.approx(-1.0)


def test_the_interval_holds_the_reduction_and_noise_widens_it():
    quiet = compare(run("bare", 1.0, noise=1e-5), run("compensated", 0.5, noise=1e-5))
    noisy = compare(run("bare", 1.0, noise=3e-4), run("compensated", 0.5, noise=3e-4))
    for found in (quiet, noisy):
        assert found.tracking_reduction_low < found.tracking_reduction < found.tracking_reduction_high
    widths = [found.tracking_reduction_high - found.tracking_reduction_low for found in (quiet, noisy)]
    assert widths[0] < widths[1] < 0.1


def test_runs_may_have_different_numbers_of_laps():
    found = compare(run("bare", 1.0, noise=1e-4, laps=3), run("compensated", 0.5, noise=1e-4, laps=1))
    assert found.tracking_reduction_low < found.tracking_reduction < found.tracking_reduction_high


def test_no_error_before_leaves_nothing_to_reduce():
    found = compare(run("bare", 0.0), run("compensated", 0.5))
    assert np.isnan(found.tracking_reduction)
    assert json.dumps(found.to_document(), allow_nan=True)


def test_the_document_has_the_promised_keys():
    told = compare(run("bare", 1.0), run("compensated", 0.5)).to_document()
    assert told.keys() == {
        "before",
        "after",
        "regions_before",
        "regions_after",
        *(f"{error}_reduction{end}" for error in ("tracking", "deviation") for end in ("", "_low", "_high")),
    }


def test_the_frame_has_one_row_a_kind_of_error():
    frame = compare(run("bare", 1.0), run("compensated", 0.5)).to_frame()
    assert list(frame["error"]) == ["tracking", "deviation"]
