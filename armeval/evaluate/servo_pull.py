"""The stiffness part of the servo's torque: what pulls a resting joint towards its target, reconstructed from angles.

It needs no logged torque and holds neither gravity feed-forward nor compensation, so that over a rest it is exactly the
torque that builds up because the target moves away.
"""

from __future__ import annotations

import numpy as np

from armeval.arrays import FloatArray, IntArray
from armeval.evaluate.lap_track import LapTrack
from armeval.model.arm import Arm


def servo_pull(arm: Arm, track: LapTrack, samples: IntArray) -> FloatArray:
    """Pull at some samples of a lap.

    Parameters
    ----------
    arm
        The arm, n joints.
    track
        The lap.
    samples
        Shape (s,). Which samples.

    Returns
    -------
    Shape (s, n) [N m]. ``K (target - angle)`` for ``joint_pd``, ``J^T K_x (tip target - tip)`` for ``tip_impedance``.
    """
    if arm.servo.law == "joint_pd":
        stiffness = np.array([drive.stiffness for drive in arm.drives])
        return np.asarray(stiffness * (track.target[samples] - track.angle[samples]))
    from armeval.kernels.chain import tip_jacobians

    jacobian = tip_jacobians(arm.chain.arrays, np.ascontiguousarray(track.angle[samples]))
    force = np.asarray(arm.servo.tip_stiffness) * (track.target_tip[samples] - track.tip[samples])
    return np.asarray(np.einsum("sci,sc->si", jacobian, force))


def joint_stiffness(arm: Arm, angles: FloatArray) -> FloatArray:
    """Torque per angle of each joint while the others stay where they are.

    Parameters
    ----------
    angles
        Shape (s, n) [rad or m]. Poses.

    Returns
    -------
    Shape (s, n) [N m/rad]: the servo's gains, or the diagonal of ``J^T K_x J``.
    """
    if arm.servo.law == "joint_pd":
        return np.tile([drive.stiffness for drive in arm.drives], (len(angles), 1))
    from armeval.kernels.chain import tip_jacobians

    jacobian = tip_jacobians(arm.chain.arrays, np.ascontiguousarray(angles))
    return np.asarray(np.einsum("sci,c,sci->si", jacobian, np.asarray(arm.servo.tip_stiffness), jacobian))
