"""How much of the tip error each joint carries.

To first order the tip error is the sum over joints of J_i (q_i - q_target,i). The product of each term with the whole
error, summed over samples, adds up to the squared error: a joint's share is the part of it that goes through the joint.
A share is negative where a joint makes good what others do. The Jacobian is taken halfway between pose and target,
which makes the sum exact to second order. Where an arm has more joints than the tip has directions, what moves no tip
is taken out of the joint errors first: of all joint errors that put the tip where it is, the smallest counts.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from armeval.arrays import FloatArray
from armeval.evaluate.lap_track import LapTrack
from armeval.model.arm import Arm

_MOST_SAMPLES = 4000  # of a lap; shares are averages, and neighbouring samples say the same


@dataclass(frozen=True)
class JointShare:
    """One joint's part in the tip error of a run.

    Attributes
    ----------
    joint
        Its name.
    error_rms
        RMS of joint angle minus target [rad or m].
    tip_rms
        RMS of the tip error that this joint alone would make [m].
    share
        Part of the squared tip error that goes through the joint; over all joints they add up to 1.
    """

    joint: str
    error_rms: float
    tip_rms: float
    share: float


def joint_shares(arm: Arm, tracks: Sequence[LapTrack]) -> tuple[JointShare, ...]:
    """Share the tip error of some laps out among the joints.

    Parameters
    ----------
    arm
        The arm, n joints.
    tracks
        Laps of one run, at least one.

    Returns
    -------
    One entry a joint, from the base to the tip; shares are NaN where there is no tip error.
    """
    from armeval.kernels.chain import tip_jacobians

    samples = 0
    error_square, tip_square = np.zeros(arm.chain.count), np.zeros(arm.chain.count)
    along, whole = np.zeros(arm.chain.count), 0.0
    for track in tracks:
        some = slice(None, None, max(1, len(track.time) // _MOST_SAMPLES))
        angle, target = track.angle[some], track.target[some]
        error = angle - target
        J = tip_jacobians(arm.chain.arrays, np.ascontiguousarray(0.5 * (angle + target)))
        through = J * _moving_the_tip(J, error)[:, None, :]
        tip_error = through.sum(axis=2)
        samples += len(error)
        error_square += (error**2).sum(axis=0)
        tip_square += (through**2).sum(axis=(0, 1))
        along += np.einsum("krn,kr->n", through, tip_error)
        whole += float((tip_error**2).sum())
    return tuple(
        JointShare(
            joint=joint,
            error_rms=float(np.sqrt(error_square[i] / samples)),
            tip_rms=float(np.sqrt(tip_square[i] / samples)),
            share=float(along[i]) / whole if whole > 0.0 else float("nan"),
        )
        for i, joint in enumerate(arm.joints)
    )


def _moving_the_tip(J: FloatArray, error: FloatArray) -> FloatArray:
    """Take out of joint errors of shape (k, n) what moves no tip; J of shape (k, 3, n)."""
    rank = int(np.linalg.matrix_rank(J[len(J) // 2], rtol=1e-6))
    if J.shape[2] <= rank:
        return error
    return np.asarray(np.einsum("knr,krm,km->kn", np.linalg.pinv(J, rcond=1e-6), J, error))
