"""What to bear in mind of what a hand meets: what cannot be had and why, what the rest leans on."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from armeval.arrays import BoolArray, FloatArray
from armeval.evaluate.feeling.feel_state import FeelState
from armeval.evaluate.feeling.hand_motion import HandMotion
from armeval.evaluate.feeling.perception import GUIDANCE
from armeval.evaluate.feeling.tip_abilities import TipAbilities, ability_notes
from armeval.evaluate.planning.reach import stretches
from armeval.model.hand import Hand
from armeval.model.trial import Trial
from armeval.units import length_text

CAUTION = (
    "this is no safety assessment: forces on people are judged by the machine's own risk assessment and the applicable "
    "standards, and no limit is given here"
)
_MOST_PLACES = 3

_TOLD = 1e-4
"""Smoothing that moves the tip by less [m] is not worth a word."""


def feel_notes(
    trial: Trial, hand: Hand, motion: HandMotion, states: Sequence[FeelState], abilities: TipAbilities
) -> list[str]:
    """Say which figures cannot be had, and why, and what the others rest on."""
    notes, directions = list(ability_notes(trial.arm)), states[0].force.directions
    if hand.run is not None and any(log.target is not None for log in trial.run(hand.run).laps):
        notes.append(
            f"the log of run {hand.run} holds targets: did its drives push? what is shown holds for idle drives"
        )
    if directions.count < 3:
        blind = directions.blind
        which = "" if blind is None else f" along {tuple(round(float(value), 3) for value in blind)}"
        notes.append(
            f"the tip moves in {directions.count} directions only: across them{which} the structure carries the force, "
            "and there is no figure"
        )
    if trial.arm.chain.count > directions.count:
        how = "as logged" if motion.source != "planned" else "as the equations of motion have it, with friction"
        notes.append(f"the arm is redundant: its inner motion is free and taken {how}")
    if directions.singular.any():
        where = _places(directions.singular, motion.arc)
        notes.append(f"the arm is near a singular pose {where}: no figure is given there, and no spectrum at all")
    if motion.jolts.any():
        where = _places(motion.jolts, motion.arc)
        notes.append(f"the trajectory steps {where}: inertia and the whole force are withheld there")
    if motion.moved > _TOLD:
        notes.append(
            f"smoothing the motion at {motion.bandwidth:g} Hz, faster than which no hand moves, moved the tip by up to "
            f"{length_text(motion.moved)}"
        )
    if motion.is_still:
        notes.append(
            "the hand does not move the tip: there is no direction along the motion, no spectrum, and friction is "
            "anything up to its bound"
        )
    if hand.rendered_force is None:
        notes.append("no `rendered_force` in [hand]: slow ripple is not judged by what a hand notices")
    elif hand.thresholds is not None:
        low, high = hand.thresholds.force_range
        if not low <= hand.rendered_force <= high:
            less = hand.rendered_force < low
            notes.append(
                f"what is noticed was studied for forces of {low:g} to {high:g} N; for {hand.rendered_force:g} N it is "
                "extrapolated" + (", and lies higher: a larger share is needed at small forces" if less else "")
            )
        weakest = abilities.continuous_force[np.isfinite(abilities.continuous_force)]
        if len(weakest) and hand.rendered_force > weakest.min():
            notes.append(
                f"the arm cannot render {hand.rendered_force:g} N in every direction: its torque limits hold "
                f"{weakest.min():.3g} N in the worst one"
            )
    if hand.thresholds is not None:
        notes.append(GUIDANCE)
    return notes


def _places(marked: BoolArray, arc: FloatArray) -> str:
    """Say where along the path samples are marked: the first stretches, and how many more there are."""
    found = [(float(arc[part.start]), float(arc[part.stop - 1])) for part in stretches(marked, arc)]
    told = ", ".join(f"from s = {length_text(a, 4)} to {length_text(b, 4)}" for a, b in found[:_MOST_PLACES])
    return told if len(found) <= _MOST_PLACES else f"{told} and in {len(found) - _MOST_PLACES} more places"
