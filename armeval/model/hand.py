"""The hand that moves the arm: what it is to feel, and how it moves."""

from __future__ import annotations

import math
from dataclasses import dataclass

from armeval.errors import InputError
from armeval.model.thresholds import Thresholds


@dataclass(frozen=True)
class Hand:
    """What a trial says about the hand.

    Attributes
    ----------
    rendered_force
        Force [N] that the arm is meant to render; what a hand notices depends on it. None: not told.
    gravity_feedforward
        Whether the drives carry the arm's weight while the hand leads it; None: as the servo does.
    bandwidth
        The hand itself does not move faster than this [Hz]: the motion is smoothed there, so that corners of a drawn
        path and counts of an encoder do not pass for blows. Infinite: the motion is taken as it is. 10 Hz is about the
        most that voluntary motions of the hand hold (common practice, no source).
    run
        Run whose logged joint angles are the motion; None: the planned trajectory.
    thresholds
        What a hand notices; None: ripple is not judged by it.
    """

    rendered_force: float | None = None
    gravity_feedforward: bool | None = None
    bandwidth: float = 10.0
    run: str | None = None
    thresholds: Thresholds | None = None

    def __post_init__(self) -> None:
        if self.rendered_force is not None and not 0.0 < self.rendered_force < math.inf:
            raise InputError(
                f"`rendered_force` is {self.rendered_force} N", "give a force above 0 N", place="[hand] rendered_force"
            )
        if not self.bandwidth > 0.0:
            raise InputError(f"`bandwidth` is {self.bandwidth} Hz", "give more than 0 Hz", place="[hand] bandwidth")
