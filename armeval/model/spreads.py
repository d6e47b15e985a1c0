"""How uncertain what nobody measured is: the spreads that an ensemble draws from."""

from __future__ import annotations

import math
from dataclasses import dataclass

from armeval.errors import InputError


@dataclass(frozen=True)
class Spreads:
    """Standard deviations of what a trial's files cannot know exactly. Every joint is drawn by itself.

    The defaults are what careful hobby-grade assembly gives (common practice, no source); a trial says better.

    Attributes
    ----------
    rotor_index
        Motor angle [rad] by which the rotor stands off its index; None: the compensation's index error. A compensation
        table stays where the index says.
    friction
        Of the logarithm of a factor on dry friction, and of another one on viscous friction.
    torque_constant
        Share of itself by which the torque constant is off, and with it every delivered torque.
    start
        Joint angle [rad, m where a joint slides] by which the arm rests off the first target before it settles.

    The noise of the map that the firmware stores is drawn too; how large it is stands in
    :class:`armeval.model.trial.Compensation`.
    """

    rotor_index: float | None = None
    friction: float = 0.2
    torque_constant: float = 0.03
    start: float = 0.005

    def __post_init__(self) -> None:
        for name, value in vars(self).items():
            if value is not None and not 0.0 <= value < math.inf:
                raise InputError(f"`{name}` is {value}", "give a value of 0 or more", place=f"[uncertainty] {name}")
