"""What the servo's stiffness and damping send, reconstructed from encoder angles and targets.

It needs no logged torque. It holds neither gravity feed-forward nor compensation: while a joint rests these do not
change, so over a rest this is exactly the torque that builds up because the target moves away.
"""

from __future__ import annotations

import numpy as np

from armeval.arrays import FloatArray
from armeval.model.arm import Arm


def servo_pull(arm: Arm, angle: FloatArray, target: FloatArray) -> FloatArray:
    """Stiffness part of the servo's torque.

    Parameters
    ----------
    arm
        The arm, n joints.
    angle, target
        Shape (k, n) [rad or m]. Joint angles and joint targets.

    Returns
    -------
    Shape (k, n) [N m or N]. ``K (target - angle)`` for ``joint_pd``, ``J^T K_x (tip target - tip)`` for
    ``tip_impedance``.
    """
    if arm.servo.law == "joint_pd":
        return np.asarray(np.array([drive.stiffness for drive in arm.drives]) * (target - angle))
    from armeval.kernels.chain import tip_jacobians, tip_positions

    chain = arm.chain.arrays
    angle, target = np.ascontiguousarray(angle), np.ascontiguousarray(target)
    force = np.asarray(arm.servo.tip_stiffness) * (tip_positions(chain, target) - tip_positions(chain, angle))
    return np.asarray(np.einsum("kci,kc->ki", tip_jacobians(chain, angle), force))


def servo_torque(arm: Arm, period: float, angle: FloatArray, target: FloatArray, told: FloatArray) -> FloatArray:
    """Stiffness and damping part of the servo's torque as it acts, after filter and delay.

    Parameters
    ----------
    arm
        The arm, n joints.
    period
        Time between samples [s]; from the servo's period upwards the firmware's own steps can be repeated.
    angle, target, told
        Shape (k, n) [rad], [rad], [rad/s]. Encoder angles, targets and the targets' speed.

    Returns
    -------
    Shape (k, n) [N m or N].
    """
    from scipy.signal import lfilter

    blend = -np.expm1(-2.0 * np.pi * arm.servo.speed_cutoff * period)
    differenced = np.diff(angle, axis=0, prepend=angle[:1]) / period
    speed = np.asarray(lfilter([blend], [1.0, blend - 1.0], differenced, axis=0))
    pull = servo_pull(arm, angle, target)
    if arm.servo.law == "joint_pd":
        sent = pull + np.array([drive.damping for drive in arm.drives]) * (told - speed)
    else:
        from armeval.kernels.chain import tip_jacobians

        J = tip_jacobians(arm.chain.arrays, np.ascontiguousarray(angle))
        damped = np.asarray(arm.servo.tip_damping) * np.einsum("kci,ki->kc", J, told - speed)
        sent = pull + np.einsum("kci,kc->ki", J, damped)
    late = round(arm.servo.delay / period)
    return np.concatenate([np.repeat(sent[:1], late, axis=0), sent[: len(sent) - late]]) if late else sent
