"""What a compensation table loses, against values recomputed apart from the program.

Sources: the residuals of interpolation, of misalignment and of delay follow from the sampling of a sine (derived and
confirmed numerically); gains sinc(1/k) and sinc^2(1/k) are those of zero- and first-order interpolation of any
signal-processing text.
"""

import math

import numpy as np
import pytest

from armeval.evaluate.cogging.cog_loss import lookup, order_residual, residual, table_gain, table_noise
from armeval.model.cogmap import CogMap
from armeval.model.trial import Compensation

ANGLE = 2.0 * np.pi * np.arange(4096) / 4096


@pytest.mark.parametrize(
    ("bins_a_period", "worst", "gain", "left"),
    [(10, 0.048943, 0.967531, 0.035729), (20, 0.012312, 0.991802, 0.0089903)],
)
def test_linear_interpolation(bins_a_period: int, worst: float, gain: float, left: float) -> None:
    assert table_gain(1, bins_a_period, "linear") == pytest.approx(gain, abs=5e-7)
    assert order_residual(1, bins=bins_a_period) == pytest.approx(left, rel=2e-5)
    crest = np.cos(
        2.0 * np.pi * (np.arange(bins_a_period) + 0.5) / bins_a_period
    )  # crest between the last and the first
    middle = lookup(crest, np.array([-np.pi / bins_a_period]), "linear")[0]
    assert 1.0 - middle == pytest.approx(worst, abs=5e-7)


@pytest.mark.parametrize(("bins_a_period", "left"), [(10, 0.180933), (20, 0.0906340)])
def test_the_nearest_entry(bins_a_period: int, left: float) -> None:
    assert order_residual(1, bins=bins_a_period, interpolation="nearest") == pytest.approx(left, abs=5e-7)


def test_interpolation_averages_noise_to_0_816() -> None:
    assert table_noise(1.0, "linear") == pytest.approx(0.816497, abs=5e-7)


@pytest.mark.parametrize(("order", "error_deg", "left"), [(84, 0.1, 0.146476), (36, 0.5, 0.312869)])
def test_a_table_out_of_step(order: int, error_deg: float, left: float) -> None:
    assert order_residual(order, angle_error=math.radians(error_deg)) == pytest.approx(left, abs=5e-7)


@pytest.mark.parametrize(("order", "degrees"), [(84, 0.714286), (36, 1.66667)])
def test_a_table_breaks_even_60_degrees_of_its_order_out_of_step(order: int, degrees: float) -> None:
    found = residual(CogMap(torque=np.sin(order * ANGLE)), Compensation(table_bins=1_000_000))
    assert math.degrees(found.break_even_angle) == pytest.approx(degrees, rel=1e-5)


def test_a_table_out_of_step_and_too_large() -> None:
    assert order_residual(84, angle_error=math.radians(0.1), gain_error=0.05) == pytest.approx(0.158203, abs=5e-7)


def test_delay_at_speed() -> None:
    speed = 10.0 * 2.0 * math.pi / 60.0
    cog_map = CogMap(torque=np.sin(84 * ANGLE))
    perfect = Compensation(table_bins=1_000_000)
    assert 84 * speed * 1e-3 == pytest.approx(0.0879646, abs=5e-8)
    assert residual(cog_map, perfect, speed=speed, delay=1e-3).share == pytest.approx(0.0879362, abs=5e-7)
    at_break_even = 119.048 * 2.0 * math.pi / 60.0
    assert residual(cog_map, perfect, speed=at_break_even, delay=1e-3).share == pytest.approx(1.0, abs=1e-5)
