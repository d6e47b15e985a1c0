"""The errors that are left when one rigid offset of the arm's base is taken out."""

from __future__ import annotations

import warnings
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from scipy.spatial.transform import Rotation

from armeval.arrays import FloatArray
from armeval.errors import Finding
from armeval.evaluate.document import JsonValue
from armeval.evaluate.lap_track import LapTrack
from armeval.evaluate.measuring.tracks import progress_along
from armeval.evaluate.run_errors import RunErrors
from armeval.evaluate.summary import ErrorSummary, summarise
from armeval.model.trajectory import Trajectory

_SAMPLES = 200_000
_STRAIGHT = 1e-3


@dataclass(frozen=True)
class RigidErrors:
    """Tracking error and path deviation of one run without the offset."""

    name: str
    tracking: ErrorSummary
    deviation: ErrorSummary


@dataclass(frozen=True, eq=False)
class RigidAlignment:
    """One rigid offset, the same for all laps of all runs, and what is left without it.

    Attributes
    ----------
    rotation, translation
        Rotation vector (3,) [rad] and shift (3,) [m] that carry the measured tip, ``R tip + t``, onto its target best.
    runs
        The runs without the offset.
    findings
        What is doubtful about it.
    """

    rotation: FloatArray
    translation: FloatArray
    runs: tuple[RigidErrors, ...]
    findings: tuple[Finding, ...] = ()

    def to_document(self) -> dict[str, JsonValue]:
        """Give the `rigid` entry of the JSON document."""
        return {
            "rotation_rad": self.rotation,
            "translation_m": self.translation,
            "runs": [
                {
                    "name": run.name,
                    "tracking": run.tracking.to_document(),
                    "deviation": run.deviation.to_document(),
                }
                for run in self.runs
            ],
        }


def without_rigid_offset(runs: Sequence[RunErrors], trajectory: Trajectory) -> RigidAlignment:
    """Take one rigid offset of the base out of all runs.

    One offset serves all laps of all runs: a base stands where it stands, and an offset for each run would hide part of
    what compensation changed.
    """
    laps = [lap for run in runs for lap in run.tracks]
    stride = max(1, sum(len(lap.time) for lap in laps) // _SAMPLES)
    tip = np.concatenate([lap.tip[::stride] for lap in laps])
    target = np.concatenate([lap.target_tip[::stride] for lap in laps])
    rotation, translation = rigid_offset(tip, target)
    spread = np.linalg.svd(target - target.mean(axis=0), full_matrices=False, compute_uv=False)
    findings = []
    if spread[1] < _STRAIGHT * spread[0]:
        findings.append(
            Finding(
                "warning",
                "the path is straight, so the base's turn about it cannot be told",
                "take the rigid offset from a path that bends",
            )
        )
    return RigidAlignment(
        rotation=rotation.as_rotvec(),
        translation=translation,
        runs=tuple(_errors(run, rotation, translation, trajectory) for run in runs),
        findings=tuple(findings),
    )


def rigid_offset(tip: FloatArray, target: FloatArray) -> tuple[Rotation, FloatArray]:
    """Rotation and shift (3,) [m] that bring tips onto targets, both (k, 3), with the least sum of squares.

    The orthogonal Procrustes problem, restricted to rotations, as scipy's ``Rotation.align_vectors`` solves it.
    """
    middle, wanted = tip.mean(axis=0), target.mean(axis=0)
    with warnings.catch_warnings():
        # A straight path leaves the turn about it open; any turn is as good, and the caller says so.
        warnings.simplefilter("ignore", UserWarning)
        rotation, _ = Rotation.align_vectors(target - wanted, tip - middle)
    return rotation, wanted - rotation.apply(middle)


def _errors(run: RunErrors, rotation: Rotation, translation: FloatArray, trajectory: Trajectory) -> RigidErrors:
    tracking, deviation = zip(*(_lap(lap, rotation, translation, trajectory) for lap in run.tracks), strict=True)
    return RigidErrors(run.name, summarise(tracking), summarise(deviation))


def _lap(
    lap: LapTrack, rotation: Rotation, translation: FloatArray, trajectory: Trajectory
) -> tuple[FloatArray, FloatArray]:
    """Tracking error and path deviation of one lap whose tip is moved by the offset."""
    tip = lap.tip @ rotation.as_matrix().T + translation
    deviation, _ = progress_along(tip, lap.arc, trajectory)
    return np.asarray(np.linalg.norm(tip - lap.target_tip, axis=1)), deviation
