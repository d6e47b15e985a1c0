"""From measured angles and torques, in whatever order and spacing, to a cog map on the circle.

The two turning directions are fitted each for itself (:mod:`armeval.evaluate.cogging.cog_fit`) and separated by their
mean and half difference, order by order, so that they need not share any angle.
"""

from __future__ import annotations

import math
from typing import Literal

import numpy as np

from armeval.arrays import FloatArray
from armeval.errors import Finding, InputError
from armeval.evaluate.cogging.cog_doubts import (
    doubt_one_way,
    doubt_strays,
    doubt_the_bandwidth,
    doubt_the_lag,
    doubt_the_mean,
    doubt_the_sign_of_friction,
    refuse_a_hidden_order,
    refuse_a_part_of_a_turn,
)
from armeval.evaluate.cogging.cog_fit import Samples, entry_variance, fit, merged, on_even_angles, supported_bandwidth
from armeval.evaluate.cogging.cog_orders import significant_orders
from armeval.kernels.harmonics import ComplexArray
from armeval.model.cogmap import CogMap, CogQuantity

_ROUNDING = 1e-9
"""Noise below this share of the torque is rounding."""


def resample(
    angle: FloatArray,
    torque: FloatArray,
    direction: FloatArray | None,
    *,
    quantity: CogQuantity,
    source: str = "",
    size: int = 4096,
    slots: int | None = None,
    poles: int | None = None,
) -> tuple[CogMap, list[Finding]]:
    """Make a cog map of measured angles and torques.

    Parameters
    ----------
    angle
        Shape (k,) [rad]. Motor angles in any order and spacing, over one or more turns, wrapped or not.
    torque
        Shape (k,) [N m]. Torque on the rotor, positive pushing the angle up: what a drive applied to hold the rotor
        counts with the opposite sign.
    direction
        Shape (k,), above 0 where the rotor was turned upwards to the angle, below 0 where downwards; or None.
    quantity, source
        What the file held, and the file as the user named it.
    size
        Entries of the map.
    slots, poles
        The motor's make, where known: says whether the samples suffice for the order to expect.

    Returns
    -------
    cog_map
        The map. With two directions its torque is their mean (friction cancels) and its friction half their
        difference: dry friction holds back the rotor, so that the torque on it is smaller on the way up.
    findings
        Warnings.

    Raises
    ------
    InputError
        If a value is not finite, there are too few angles, they leave out part of the turn, or a gap hides an order
        that the data show.
    """
    angle = np.asarray(angle, dtype=np.float64)
    torque = np.asarray(torque, dtype=np.float64)
    _refuse_what_is_no_number(angle, torque, direction, source)
    sides = _by_direction(angle, torque, direction, source)
    findings = doubt_one_way(angle, source) if direction is None else []
    bandwidth = min(supported_bandwidth(samples, size) for _, samples in sides)
    fits = []
    for place, samples in sides:
        refuse_a_part_of_a_turn(samples, source, place)
        coefficients = fit(samples, min(supported_bandwidth(samples, size), size // 2))
        refuse_a_hidden_order(samples, coefficients, size, source, place)
        findings += doubt_strays(samples, coefficients, source, place)
        fits.append(coefficients[: bandwidth + 1])
    mean = fits[0] if len(fits) == 1 else 0.5 * (fits[0] + fits[1])
    repeats = [entry_variance(samples, bandwidth) for _, samples in sides]
    noise, noise_from = _noise(mean, repeats)
    sparsest = min((samples for _, samples in sides), key=lambda samples: samples.angle.size)
    findings += doubt_the_bandwidth(mean, sparsest, bandwidth, slots, poles, source)

    friction = ripple = lag = None
    if len(fits) == 2:
        half = 0.5 * (fits[1] - fits[0])
        friction, lag = float(half[0].real), _direction_lag(fits[0], fits[1], mean, noise)
        ripple = on_even_angles(half, size)
        if friction < 0.0:
            findings += doubt_the_sign_of_friction(friction, noise, source)
            friction, ripple = abs(friction), -ripple
        findings += doubt_the_lag(mean, lag, source)
    else:
        findings += doubt_the_mean(mean, noise, len(sparsest.angle), source)

    removed = float(mean[0].real)
    mean[0] = 0.0
    cog_map = CogMap(
        torque=on_even_angles(mean, size),
        friction=friction,
        friction_ripple=ripple,
        noise=noise,
        noise_from=noise_from,
        removed_mean=removed,
        widest_gap=max(float(samples.gap.max()) for _, samples in sides),
        bandwidth=bandwidth,
        direction_lag=lag,
        directions=len(sides),
        samples=angle.size,
        distinct=sparsest.angle.size,
        quantity=quantity,
        source=source,
    )
    return cog_map, findings


def _refuse_what_is_no_number(angle: FloatArray, torque: FloatArray, direction: FloatArray | None, source: str) -> None:
    """Raise where the columns differ in length or hold something that is not a finite number."""
    columns = {"angle": angle, "torque": torque} | ({} if direction is None else {"direction": direction})
    for name, column in columns.items():
        if np.shape(column) != (angle.size,):
            what = f"there are {angle.size} angles and the {name} has the shape {np.shape(column)}"
            raise InputError(what, "give one value of each for every sample", file=source)
        if not np.isfinite(column).all():
            row = int(np.flatnonzero(~np.isfinite(column))[0])
            raise InputError(f"the {name} of sample {row + 1} is not a finite number", "remove or mend it", file=source)


def _by_direction(
    angle: FloatArray, torque: FloatArray, direction: FloatArray | None, source: str
) -> list[tuple[str, Samples]]:
    """Split the rows by turning direction, upwards first, and merge repeats in each."""
    if direction is None:
        rows = {"": np.ones(angle.size, dtype=np.bool_)}
    else:
        direction = np.asarray(direction, dtype=np.float64)
        if (direction == 0.0).any():
            row = int(np.flatnonzero(direction == 0.0)[0])
            raise InputError(
                f"the direction of sample {row + 1} is 0", "write 1 or -1", file=source, place="column `direction`"
            )
        rows = {"direction 1": direction > 0.0, "direction -1": direction < 0.0}
    sides = []
    for place, chosen in rows.items():
        if chosen.any():
            samples = merged(angle[chosen], torque[chosen])
            if samples.angle.size < 8:
                raise InputError(
                    f"there are only {samples.angle.size} different angles",
                    "measure at least 8 angles a turn, and more than twice the highest order",
                    file=source,
                    place=place,
                )
            sides.append((place, samples))
    if not sides:
        raise InputError("there is no sample", "give at least 8 angles a turn", file=source)
    return sides


def _noise(mean: ComplexArray, repeats: list[float | None]) -> tuple[float, Literal["repeats", "residual", "none"]]:
    """Give the standard deviation of one entry, from repeats in every direction, else from what the orders leave."""
    known = [variance for variance in repeats if variance is not None]
    if len(known) == len(repeats):
        return math.sqrt(sum(known)) / len(known), "repeats"
    significant, floor = significant_orders(mean)
    noise = math.sqrt(2.0 * (mean.size - 1) * floor)
    if significant[1:].all() or noise <= _ROUNDING * float(np.sqrt(np.sum(np.abs(mean) ** 2))):
        return 0.0, "none"
    return noise, "residual"


def _direction_lag(up: ComplexArray, down: ComplexArray, mean: ComplexArray, noise: float) -> float:
    """Angle by which each direction is ahead of the mean, from the phases between them; strong orders count more."""
    significant, _ = significant_orders(mean, noise_power=noise**2 / (2.0 * max(mean.size - 1, 1)))
    order = np.flatnonzero(significant)
    if order.size == 0:
        return 0.0
    weight = np.abs(mean[order]) ** 2
    turned = np.angle(down[order] * np.conj(up[order]))
    return float(np.sum(weight * order * turned) / (2.0 * np.sum(weight * order.astype(np.float64) ** 2)))
