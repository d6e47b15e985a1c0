"""What a hand meets in one state of the arm, bare or compensated."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np

from armeval.arrays import FloatArray
from armeval.evaluate.document import JsonValue
from armeval.evaluate.feeling.hand_force import PARTS, HandForce, Part, hand_force
from armeval.evaluate.feeling.hand_motion import HandMotion
from armeval.evaluate.feeling.inner_motion import with_inner_motion
from armeval.evaluate.feeling.perception import Noticed, noticed
from armeval.evaluate.feeling.ripple import Ripple, RippleLine, joint_shares, ripple, rms_over_way
from armeval.evaluate.feeling.ripple_left import LeftBy, RippleSpread, left_by, ripple_spread
from armeval.evaluate.feeling.ripple_spectrum import RippleSpectrum, ripple_spectrum
from armeval.model.hand import Hand
from armeval.model.trial import Trial


@dataclass(frozen=True)
class ForcePart:
    """One kind of force on the hand, summed up over the way: RMS along and across the motion, largest, where.

    ``shares`` are the joints' in its mean square, sum 1; a joint that works against the others has a negative one.
    """

    part: str
    along_rms: float
    across_rms: float
    max: float
    max_at: float
    shares: Mapping[str, float]

    def to_row(self) -> dict[str, JsonValue]:
        """Give the row of a table."""
        return {
            "part": self.part,
            "along_rms_N": self.along_rms,
            "across_rms_N": self.across_rms,
            "max_N": self.max,
            "max_at_m": self.max_at,
            **{f"share_{joint}": share for joint, share in self.shares.items()},
        }

    def to_document(self) -> dict[str, JsonValue]:
        """Give the entry of the JSON document."""
        return {
            "part": self.part,
            "along_rms_N": self.along_rms,
            "across_rms_N": self.across_rms,
            "max_N": self.max,
            "max_at_m": self.max_at,
            "joints": [{"joint": joint, "share": share} for joint, share in self.shares.items()],
        }


@dataclass(frozen=True, eq=False)
class FeelState:
    """What a hand meets in one state of the arm.

    Attributes
    ----------
    name
        ``bare`` or ``compensated``.
    force
        Along the motion, sample by sample.
    parts
        Summed up, by kind, then all together.
    ripple
        The cogging part of it.
    per_metre, per_second
        Its spectra; None where there are none.
    noticed
        For each line of the ripple, what a hand notices at its frequency.
    left
        Why compensation leaves what it leaves; empty where it does not act.
    spread
        How the ripple left varies with errors of compensation; None likewise.
    """

    name: str
    force: HandForce
    parts: tuple[ForcePart, ...]
    ripple: Ripple
    per_metre: RippleSpectrum | None
    per_second: RippleSpectrum | None
    noticed: tuple[Noticed, ...]
    left: tuple[LeftBy, ...]
    spread: RippleSpread | None

    def ratio(self, number: int) -> float:
        """Amplitude of a line of the ripple over what is noticed at its frequency; NaN where no threshold applies."""
        return math.sqrt(2.0) * self.ripple.lines[number].rms / self.noticed[number].force

    def lines_document(self) -> list[dict[str, JsonValue]]:
        """Give the lines' entries in tables and documents."""
        return [self._line(number, line) for number, line in enumerate(self.ripple.lines)]

    def _line(self, number: int, line: RippleLine) -> dict[str, JsonValue]:
        seen = self.noticed[number]
        amplitude = math.sqrt(2.0) * line.rms
        return {
            "joint": line.joint,
            "order": line.order,
            "rms_N": line.rms,
            "along_rms_N": line.along_rms,
            "per_m": line.per_metre,
            "Hz": line.hertz,
            "noticed_by": seen.by,
            "noticed_N": seen.force,
            "over_noticed": amplitude / seen.force,
            "over_noticed_low": amplitude / seen.high,
            "over_noticed_high": amplitude / seen.low,
        }

    def to_document(self) -> dict[str, JsonValue]:
        """Give the entry of the JSON document."""
        return {
            "name": self.name,
            "compensated": self.force.compensated,
            "parts": [part.to_document() for part in self.parts],
            "friction_band_N": float(self.force.band.max()),
            "ripple": self.ripple.to_document(),
            "lines": self.lines_document(),
            "peaks_per_metre": [] if self.per_metre is None else self.per_metre.to_document(),
            "peaks_per_second": [] if self.per_second is None else self.per_second.to_document(),
            "left_by": [{"cause": part.cause, "rms_N": part.rms} for part in self.left],
            "ensemble": None if self.spread is None else self.spread.to_document(),
        }

    def columns(self) -> dict[str, FloatArray]:
        """Give the forces sample by sample [N], under names that tell the state and the part."""
        force = self.force
        named = {part: force.part(part) for part in PARTS} | {"total": force.total}
        return {
            f"{self.name}_{part}_{way}_N": values
            for part, vector in named.items()
            for way, values in (("along", force.along(vector)), ("across", force.across(vector)))
        }


def feel_state(
    trial: Trial, hand: Hand, motion: HandMotion, *, compensated: bool, members: int = 200, seed: int = 0
) -> FeelState:
    """Work out what a hand meets in one state of a trial's arm.

    Parameters
    ----------
    trial, hand
        The arm, what its table can do, and the hand.
    motion
        What the hand leads the tip through. The inner motion of a redundant arm is worked out where the motion was
        planned for the tip; a logged one, or a path of joint angles, is taken as it is.
    compensated
        Whether the drives feed their cog maps forward.
    members, seed
        Of the ensemble; of the noise on the table.
    """
    arm, law, carries = trial.arm, trial.compensation, hand.gravity_feedforward
    force = hand_force(arm, motion, compensated=compensated, compensation=law, carries_weight=carries, seed=seed)
    if arm.chain.count > force.directions.count and motion.source == "planned" and trial.path.space == "tip":
        led = with_inner_motion(
            arm,
            motion,
            compensated=compensated,
            compensation=law,
            carries_weight=force.carries_weight,
            seed=seed,
        )
        force = hand_force(arm, led, compensated=compensated, compensation=law, carries_weight=carries, seed=seed)
    found = ripple(arm, force, compensation=law, seed=seed)
    heaviness = _apparent_mass(force)
    return FeelState(
        name="compensated" if compensated else "bare",
        force=force,
        parts=tuple(_summed_up(arm.joints, force, part) for part in (*PARTS, "total")),
        ripple=found,
        per_metre=ripple_spectrum(force, found, "per_metre"),
        per_second=ripple_spectrum(force, found, "hertz"),
        noticed=tuple(_noticed(hand, line, heaviness) for line in found.lines),
        left=left_by(arm, force, law, seed=seed) if compensated else (),
        spread=ripple_spread(arm, force, law, spreads=trial.uncertainty, members=members, seed=seed)
        if compensated
        else None,
    )


def _summed_up(joints: tuple[str, ...], force: HandForce, part: str) -> ForcePart:
    vector = force.total if part == "total" else force.part(part)  # type: ignore[arg-type]
    kinds: tuple[Part, ...] = PARTS if part == "total" else (part,)  # type: ignore[assignment]
    by_joint = np.sum([force.forces(kind) for kind in kinds], axis=0)
    weights = force.motion.weights
    size = np.linalg.norm(vector, axis=1)
    known = np.isfinite(size).any()
    largest = int(np.nanargmax(size)) if known else 0
    return ForcePart(
        part,
        along_rms=rms_over_way(force.along(vector), weights),
        across_rms=rms_over_way(force.across(vector), weights),
        max=float(size[largest]) if known else math.nan,
        max_at=float(force.motion.arc[largest]) if known else math.nan,
        shares=dict(zip(joints, joint_shares(by_joint, vector, weights), strict=True)),
    )


def _noticed(hand: Hand, line: RippleLine, apparent_mass: float) -> Noticed:
    if hand.thresholds is None:
        return Noticed(math.nan, math.nan, math.nan, by="none")
    return noticed(hand.thresholds, line.hertz, rendered_force=hand.rendered_force, apparent_mass=apparent_mass)


def _apparent_mass(force: HandForce) -> float:
    """Median apparent mass [kg] in the lightest direction along the motion: what shakes most readily."""
    mobility = np.linalg.eigvalsh(force.directions.mobility)[:, -1]
    return float(np.median(1.0 / mobility))
