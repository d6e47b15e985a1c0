"""The equations of motion, M(q) q'' + h(q, q') = torque, of a serial chain.

Everything is in base coordinates about the base origin, so nothing is transformed on the way: a spatial velocity is
(angular velocity, velocity of the body's point at the base origin), a spatial force is (moment about the base origin,
force), and the momentum, force and composite inertia of what a joint carries are plain sums from the tip to the base.
The recursion is Newton's and Euler's with composite bodies (Featherstone 2008, chapters 5 and 6; Lynch & Park 2017,
chapter 8).
"""

from __future__ import annotations

import numpy as np

from armeval.arrays import FloatArray, read_only
from armeval.kernels.chain import ChainArrays
from armeval.kernels.compile import jit, jit_inline
from armeval.kernels.elementary import sine_cosine
from armeval.kernels.records import Records, joint_count, joint_records, servo_record


@jit_inline
def place(joints: Records) -> None:
    """Place the joints' frames, ``rotation`` and ``origin``, and their ``axis`` for the joint angles ``at``."""
    for i in range(joint_count(joints)):
        joint = joints[i]
        at, S, R, p, P = joint["at"], joint["axis"], joint["rotation"], joint["origin"], joint["placement"]
        if i == 0:
            for r in range(3):
                p[r] = P[r, 3]
                for c in range(3):
                    R[r, c] = P[r, c]
        else:
            A, o = joints[i - 1]["rotation"], joints[i - 1]["origin"]
            for r in range(3):
                p[r] = o[r] + A[r, 0] * P[0, 3] + A[r, 1] * P[1, 3] + A[r, 2] * P[2, 3]
                for c in range(3):
                    R[r, c] = A[r, 0] * P[0, c] + A[r, 1] * P[1, c] + A[r, 2] * P[2, c]
        if joint["slides"] != 0.0:
            for r in range(3):
                p[r] += R[r, 2] * at
                S[r] = 0.0
                S[3 + r] = R[r, 2]
        else:
            sine, cosine = sine_cosine(at)
            for r in range(3):
                x, y = R[r, 0], R[r, 1]
                R[r, 0] = cosine * x + sine * y
                R[r, 1] = cosine * y - sine * x
                S[r] = R[r, 2]
            S[3] = p[1] * S[2] - p[2] * S[1]
            S[4] = p[2] * S[0] - p[0] * S[2]
            S[5] = p[0] * S[1] - p[1] * S[0]


@jit_inline
def hold_weight(joints: Records, free_fall: FloatArray) -> None:
    """Fill in ``weight``, the joint torques that hold the arm still, for the frames of :func:`place`."""
    gx, gy, gz = free_fall[0], free_fall[1], free_fall[2]
    carried = 0.0
    for i in range(joint_count(joints) - 1, -1, -1):
        joint = joints[i]
        R, p, S, C = joint["rotation"], joint["origin"], joint["axis"], joint["first_moment"]
        mass, center = joint["mass"], joint["center"]
        carried += mass
        for r in range(3):
            C[r] = mass * (p[r] + R[r, 0] * center[0] + R[r, 1] * center[1] + R[r, 2] * center[2])
        if i < joint_count(joints) - 1:
            D = joints[i + 1]["first_moment"]
            for r in range(3):
                C[r] += D[r]
        # the weight of what the joint carries: force carried * g, moment (sum of mass * centre) x g
        joint["weight"] = -(
            S[0] * (C[1] * gz - C[2] * gy)
            + S[1] * (C[2] * gx - C[0] * gz)
            + S[2] * (C[0] * gy - C[1] * gx)
            + carried * (S[3] * gx + S[4] * gy + S[5] * gz)
        )


@jit_inline
def equations_of_motion(joints: Records, free_fall: FloatArray) -> None:
    """Fill in ``matrix``, a row of M, and ``bias``, h, of every joint, for the frames of :func:`place`."""
    n = joint_count(joints)
    for i in range(n):
        _move(joints, i, free_fall)
        _weigh(joints[i])
    carried = 0.0
    for i in range(n - 1, -1, -1):
        joint = joints[i]
        S, F, U = joint["axis"], joint["force"], joint["velocity"]
        C, B = joint["first_moment"], joint["inertia_at_base"]
        carried += joint["mass"]
        if i < n - 1:
            outer = joints[i + 1]
            D, E, G = outer["first_moment"], outer["inertia_at_base"], outer["force"]
            for r in range(3):
                C[r] += D[r]
            for r in range(6):
                B[r] += E[r]
                F[r] += G[r]
        joint["bias"] = S[0] * F[0] + S[1] * F[1] + S[2] * F[2] + S[3] * F[3] + S[4] * F[4] + S[5] * F[5]
        # momentum of all that the joint carries for unit speed of the joint; the velocity is not needed any more
        a, b, c, d, e, f = S[0], S[1], S[2], S[3], S[4], S[5]
        U[0] = B[0] * a + B[1] * b + B[2] * c + C[1] * f - C[2] * e
        U[1] = B[1] * a + B[3] * b + B[4] * c + C[2] * d - C[0] * f
        U[2] = B[2] * a + B[4] * b + B[5] * c + C[0] * e - C[1] * d
        U[3] = carried * d + b * C[2] - c * C[1]
        U[4] = carried * e + c * C[0] - a * C[2]
        U[5] = carried * f + a * C[1] - b * C[0]
        for j in range(i + 1):
            T = joints[j]["axis"]
            entry = T[0] * U[0] + T[1] * U[1] + T[2] * U[2] + T[3] * U[3] + T[4] * U[4] + T[5] * U[5]
            joint["matrix"][j] = entry
            joints[j]["matrix"][i] = entry
        joint["matrix"][i] += joint["reflected_inertia"]


@jit_inline
def _move(joints: Records, i: int, free_fall: FloatArray) -> None:
    """Fill in the body's ``velocity`` V, and its ``acceleration`` A at unchanging joint speeds in a falling frame."""
    S, V, A, speed = joints[i]["axis"], joints[i]["velocity"], joints[i]["acceleration"], joints[i]["speed"]
    if i == 0:
        for r in range(3):
            V[r], V[3 + r] = S[r] * speed, S[3 + r] * speed
            A[r], A[3 + r] = 0.0 * speed, -free_fall[r]
    else:
        W, D = joints[i - 1]["velocity"], joints[i - 1]["acceleration"]
        # A = D + W x S q', the spatial cross product of motions
        A[0] = D[0] + speed * (W[1] * S[2] - W[2] * S[1])
        A[1] = D[1] + speed * (W[2] * S[0] - W[0] * S[2])
        A[2] = D[2] + speed * (W[0] * S[1] - W[1] * S[0])
        A[3] = D[3] + speed * (W[1] * S[5] - W[2] * S[4] + W[4] * S[2] - W[5] * S[1])
        A[4] = D[4] + speed * (W[2] * S[3] - W[0] * S[5] + W[5] * S[0] - W[3] * S[2])
        A[5] = D[5] + speed * (W[0] * S[4] - W[1] * S[3] + W[3] * S[1] - W[4] * S[0])
        for r in range(6):
            V[r] = W[r] + S[r] * speed


@jit_inline
def _weigh(joint: Records) -> None:
    """Fill in the body's inertia about the base origin, and the ``force`` that its motion takes."""
    R, p, V, A, F = joint["rotation"], joint["origin"], joint["velocity"], joint["acceleration"], joint["force"]
    mass, center, own = joint["mass"], joint["center"], joint["inertia"]
    C, B = joint["first_moment"], joint["inertia_at_base"]
    cx = p[0] + R[0, 0] * center[0] + R[0, 1] * center[1] + R[0, 2] * center[2]
    cy = p[1] + R[1, 0] * center[0] + R[1, 1] * center[1] + R[1, 2] * center[2]
    cz = p[2] + R[2, 0] * center[0] + R[2, 1] * center[1] + R[2, 2] * center[2]
    hx, hy, hz = mass * cx, mass * cy, mass * cz
    # R own R^T + mass (c^2 - c c^T): rows of R own first
    a0 = R[0, 0] * own[0, 0] + R[0, 1] * own[1, 0] + R[0, 2] * own[2, 0]
    a1 = R[0, 0] * own[0, 1] + R[0, 1] * own[1, 1] + R[0, 2] * own[2, 1]
    a2 = R[0, 0] * own[0, 2] + R[0, 1] * own[1, 2] + R[0, 2] * own[2, 2]
    b0 = R[1, 0] * own[0, 0] + R[1, 1] * own[1, 0] + R[1, 2] * own[2, 0]
    b1 = R[1, 0] * own[0, 1] + R[1, 1] * own[1, 1] + R[1, 2] * own[2, 1]
    b2 = R[1, 0] * own[0, 2] + R[1, 1] * own[1, 2] + R[1, 2] * own[2, 2]
    d0 = R[2, 0] * own[0, 0] + R[2, 1] * own[1, 0] + R[2, 2] * own[2, 0]
    d1 = R[2, 0] * own[0, 1] + R[2, 1] * own[1, 1] + R[2, 2] * own[2, 1]
    d2 = R[2, 0] * own[0, 2] + R[2, 1] * own[1, 2] + R[2, 2] * own[2, 2]
    xx = a0 * R[0, 0] + a1 * R[0, 1] + a2 * R[0, 2] + hy * cy + hz * cz
    xy = a0 * R[1, 0] + a1 * R[1, 1] + a2 * R[1, 2] - hx * cy
    xz = a0 * R[2, 0] + a1 * R[2, 1] + a2 * R[2, 2] - hx * cz
    yy = b0 * R[1, 0] + b1 * R[1, 1] + b2 * R[1, 2] + hx * cx + hz * cz
    yz = b0 * R[2, 0] + b1 * R[2, 1] + b2 * R[2, 2] - hy * cz
    zz = d0 * R[2, 0] + d1 * R[2, 1] + d2 * R[2, 2] + hx * cx + hy * cy
    C[0], C[1], C[2] = hx, hy, hz
    B[0], B[1], B[2], B[3], B[4], B[5] = xx, xy, xz, yy, yz, zz
    # momentum: linear P, angular L
    wx, wy, wz, vx, vy, vz = V[0], V[1], V[2], V[3], V[4], V[5]
    px = mass * vx + wy * hz - wz * hy
    py = mass * vy + wz * hx - wx * hz
    pz = mass * vz + wx * hy - wy * hx
    lx = xx * wx + xy * wy + xz * wz + hy * vz - hz * vy
    ly = xy * wx + yy * wy + yz * wz + hz * vx - hx * vz
    lz = xz * wx + yz * wy + zz * wz + hx * vy - hy * vx
    # its change: inertia times acceleration, and the spatial cross product of velocity and momentum
    ax, ay, az, ux, uy, uz = A[0], A[1], A[2], A[3], A[4], A[5]
    F[0] = xx * ax + xy * ay + xz * az + hy * uz - hz * uy + wy * lz - wz * ly + vy * pz - vz * py
    F[1] = xy * ax + yy * ay + yz * az + hz * ux - hx * uz + wz * lx - wx * lz + vz * px - vx * pz
    F[2] = xz * ax + yz * ay + zz * az + hx * uy - hy * ux + wx * ly - wy * lx + vx * py - vy * px
    F[3] = mass * ux + ay * hz - az * hy + wy * pz - wz * py
    F[4] = mass * uy + az * hx - ax * hz + wz * px - wx * pz
    F[5] = mass * uz + ax * hy - ay * hx + wx * py - wy * px


@jit
def evaluate_poses(
    joints: Records, servo_records: Records, q: FloatArray, v: FloatArray, M: FloatArray, h: FloatArray, g: FloatArray
) -> None:
    """Fill in M (k, n, n), h (k, n) and the gravity torque g (k, n) for poses q and speeds v (k, n); one lane.

    Gravity comes in the servo's record: from there the replay takes it, and the equations are compiled once.
    """
    n, free_fall = joint_count(joints), servo_records[0]["free_fall"]
    for s in range(q.shape[0]):
        for i in range(n):
            joints[i]["at"] = q[s, i]
            joints[i]["speed"] = v[s, i]
        place(joints)
        hold_weight(joints, free_fall)
        equations_of_motion(joints, free_fall)
        for i in range(n):
            h[s, i] = joints[i]["bias"]
            g[s, i] = joints[i]["weight"]
            for j in range(n):
                M[s, i, j] = joints[i]["matrix"][j]


def mass_matrix_and_bias(
    chain: ChainArrays, gravity: FloatArray, q: FloatArray, v: FloatArray
) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Evaluate the equations of motion, without rotors, in many poses.

    Parameters
    ----------
    chain
        The chain, n joints.
    gravity
        Shape (3,) [m/s^2]. Acceleration of free fall in the base frame.
    q, v
        Shape (k, n) [rad or m] and per second. Joint angles and speeds.

    Returns
    -------
    tuple[FloatArray, FloatArray, FloatArray]
        Mass matrix M (k, n, n), bias h(q, q') (k, n) with Coriolis, centrifugal and gravity torque, and the gravity
        torque alone (k, n): the joint torque that holds the arm still [N m or N].
    """
    k, n = q.shape
    M, h, g = np.empty((k, n, n)), np.empty((k, n)), np.empty((k, n))
    servo = servo_record()
    servo["free_fall"] = gravity
    evaluate_poses(joint_records(chain), servo, read_only(q), read_only(v), M, h, g)
    return M, h, g
