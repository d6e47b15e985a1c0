"""One joint as a log and the arm's model show it: counts, targets, servo torque, inertia, friction, cogging slope."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from armeval.arrays import FloatArray, IntArray
from armeval.evaluate.lap_track import LapTrack
from armeval.evaluate.sticking.rest import sample_period
from armeval.evaluate.sticking.servo_torque import servo_torque
from armeval.kernels.periodic import hermite_table
from armeval.model.arm import Arm
from armeval.model.drive import Drive

_SPEED_WINDOW = 0.010  # s: over this time a logged target's speed is taken, so that its own steps do not matter
_POSES = 200  # of a lap at which inertia and stiffness are worked out
_SLOPE_DOUBT = 0.15  # share of a map's steepest slope by which the slope at one angle may be off


@dataclass(frozen=True, eq=False)
class JointInLog:
    """What a log and an arm say about one joint, k samples at the servo's rate or slower.

    Attributes
    ----------
    time, counts, target, told
        Shape (k,) [s], [counts], [rad], [rad/s]: ``told`` is the speed of the target.
    torque
        Shape (k,) [N m]. What the servo's stiffness and damping sent, as it acted.
    count
        Joint angle of one count [rad].
    inertia, stiffness, cog_slope
        Shape (k,) [kg m^2], [N m/rad], [N m/rad], or numbers: of the joint, at its angle.
    cog_slope_spread
        How far the true slope may be off [N m/rad].
    coulomb, static, stribeck_speed
        Friction [N m], [N m], [rad/s].
    """

    time: FloatArray
    counts: FloatArray
    target: FloatArray
    told: FloatArray
    torque: FloatArray
    count: float
    inertia: FloatArray
    stiffness: FloatArray
    cog_slope: FloatArray
    cog_slope_spread: float
    coulomb: float
    static: float
    stribeck_speed: float


def target_speed(track: LapTrack) -> FloatArray:
    """Shape (k, n) [rad/s]. How fast each joint is told to move, by central differences of its target."""
    time, target = track.time, track.target
    if track.source == "prediction":
        return np.asarray(np.gradient(target, time, axis=0))
    half = max(1, round(0.5 * _SPEED_WINDOW / sample_period(time)))
    index = np.arange(len(time))
    before, after = np.maximum(index - half, 0), np.minimum(index + half, len(time) - 1)
    return np.asarray((target[after] - target[before]) / (time[after] - time[before])[:, None])


def joints_in_log(arm: Arm, track: LapTrack, told: FloatArray) -> tuple[JointInLog, ...]:
    """Bring a measured lap and the arm's model together, joint by joint.

    A log faster than the servo is thinned to the servo's rate: between two runs of the servo nothing is decided. The
    speeds of the targets, ``told`` of shape (k, n) [rad/s], are those of :func:`target_speed`.
    """
    stride = max(1, round(arm.servo.period / sample_period(track.time)))
    time, angle, target = track.time[::stride], track.angle[::stride], track.target[::stride]
    told = told[::stride]
    period = sample_period(time)
    torque = servo_torque(arm, period, angle, target, told)
    if arm.servo.inertia_feedforward:
        torque = torque + _inertia_torque(arm, angle, np.gradient(told, time, axis=0))
    inertia, stiffness = inertia_along(arm, angle), joint_stiffness_along(arm, angle)
    return tuple(
        _joint(track, j, drive, time, angle, target, told, torque, inertia, stiffness)
        for j, drive in enumerate(arm.drives)
    )


def _joint(
    track: LapTrack,
    j: int,
    drive: Drive,
    time: FloatArray,
    angle: FloatArray,
    target: FloatArray,
    told: FloatArray,
    torque: FloatArray,
    inertia: FloatArray,
    stiffness: FloatArray,
) -> JointInLog:
    count = float(track.resolution[j]) or _smallest_step(angle[:, j])
    coulomb, static = drive.coulomb_friction, drive.breakaway_friction
    if static == 0.0:
        # Without friction nothing can rest: take what the log itself says.
        coulomb = static = max(_friction_in_log(torque[:, j], told[:, j]), float(stiffness[:, j].mean()) * count)
    slope = np.zeros(len(time))
    doubt = float(stiffness[:, j].mean())
    if drive.cog_map is not None:
        table = drive.gear_ratio**2 * hermite_table(drive.cog_map.torque)[:, 1]
        doubt = _SLOPE_DOUBT * float(np.abs(table).max())
        if not track.compensated:
            motor = np.mod(drive.gear_ratio * angle[:, j] + drive.index_offset, 2.0 * np.pi)
            slope = np.interp(motor, np.linspace(0.0, 2.0 * np.pi, len(table) + 1), np.append(table, table[0]))
    return JointInLog(
        time=np.ascontiguousarray(time),
        counts=np.rint(angle[:, j] / count),
        target=np.ascontiguousarray(target[:, j]),
        told=np.ascontiguousarray(told[:, j]),
        torque=np.ascontiguousarray(torque[:, j]),
        count=count,
        inertia=inertia[:, j],
        stiffness=stiffness[:, j],
        cog_slope=slope,
        cog_slope_spread=doubt,
        coulomb=coulomb,
        static=static,
        stribeck_speed=drive.stribeck_speed,
    )


def joint_stiffness_along(arm: Arm, angle: FloatArray) -> FloatArray:
    """Stiffness of each joint with the others held, along a lap: angle of shape (k, n) gives (k, n) [N m/rad]."""
    from armeval.evaluate.replaying.sticking_ratio import joint_stiffness

    at, poses = _some_poses(angle)
    K = np.einsum("pjj->pj", joint_stiffness(arm, poses, np.zeros_like(poses)))
    return np.maximum(_between(at, K, len(angle)), 1e-9)


def friction_alone(arm: Arm, track: LapTrack, stiffness: FloatArray) -> FloatArray:
    """Where each joint would rest if only friction opposed its servo, along a lap.

    Parameters
    ----------
    arm, track
        The arm and the lap; of the lap only the targets count, and the poses.
    stiffness
        Shape (k, n) [N m/rad], from :func:`joint_stiffness_along`.

    Returns
    -------
    Shape (k, n) [rad or m]. The angle at which it rests; nan where it moves.
    """
    from armeval.kernels.friction_alone import rests_by_friction

    told, inertia, damping = target_speed(track), inertia_along(arm, track.angle), _damping_along(arm, track.angle)
    alone = [
        rests_by_friction(
            track.time,
            np.ascontiguousarray(track.target[:, j]),
            np.ascontiguousarray(told[:, j]),
            np.ascontiguousarray(inertia[:, j]),
            np.ascontiguousarray(stiffness[:, j]),
            np.ascontiguousarray(damping[:, j]),
            drive.coulomb_friction,
            drive.breakaway_friction,
            drive.stribeck_speed,
        )
        for j, drive in enumerate(arm.drives)
    ]
    return np.stack([np.where(rests, angle, np.nan) for rests, angle in alone], axis=1)


def _damping_along(arm: Arm, angle: FloatArray) -> FloatArray:
    if arm.servo.law == "joint_pd":
        return np.tile([drive.damping + drive.viscous_friction for drive in arm.drives], (len(angle), 1))
    from armeval.kernels.chain import tip_jacobians

    at, poses = _some_poses(angle)
    J = tip_jacobians(arm.chain.arrays, poses)
    return _between(at, np.einsum("pcj,c,pcj->pj", J, np.asarray(arm.servo.tip_damping), J), len(angle))


def inertia_along(arm: Arm, angle: FloatArray) -> FloatArray:
    """Inertia of each joint with the others held, rotors included, along a lap: shape (k, n) [kg m^2]."""
    at, M = _mass_matrices(arm, angle)
    return np.maximum(_between(at, np.einsum("pjj->pj", M), len(angle)), 1e-9)


def _inertia_torque(arm: Arm, angle: FloatArray, acceleration: FloatArray) -> FloatArray:
    """Torque M(q) times acceleration along a lap, shape (k, n) [N m]."""
    at, M = _mass_matrices(arm, angle)
    rows = [_between(at, M[:, j, :], len(angle)) for j in range(angle.shape[1])]
    return np.stack([np.einsum("kj,kj->k", row, acceleration) for row in rows], axis=1)


def _mass_matrices(arm: Arm, angle: FloatArray) -> tuple[IntArray, FloatArray]:
    """Mass matrices with rotors in some poses of a lap: which samples, and shape (p, n, n) [kg m^2]."""
    from armeval.kernels.dynamics import mass_matrix_and_bias

    at, poses = _some_poses(angle)
    M, _, _ = mass_matrix_and_bias(arm.chain.arrays, np.array(arm.gravity), poses, np.zeros_like(poses))
    return at, M + np.diag([drive.gear_ratio**2 * drive.rotor_inertia for drive in arm.drives])


def _some_poses(angle: FloatArray) -> tuple[IntArray, FloatArray]:
    at = np.unique(np.linspace(0, len(angle) - 1, _POSES).astype(np.int64))
    return at, np.ascontiguousarray(angle[at])


def _between(at: IntArray, values: FloatArray, k: int) -> FloatArray:
    where = np.arange(k)
    return np.stack([np.interp(where, at, column) for column in values.T], axis=1)


def _smallest_step(angle: FloatArray) -> float:
    steps = np.abs(np.diff(angle))
    moved = steps[steps > 0.0]
    return float(moved.min()) if len(moved) else 1e-6


def _friction_in_log(torque: FloatArray, told: FloatArray) -> float:
    """Half the difference of the servo's torque between the two ways of moving [N m]; one way only: all of it."""
    up, down = told > 0.02, told < -0.02
    if up.any() and down.any():
        return max(0.5 * float(torque[up].mean() - torque[down].mean()), 0.0)
    return float(np.abs(torque[up | down]).mean()) if (up | down).any() else 0.0
