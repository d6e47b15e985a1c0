"""The equations of motion, M(q) q'' + h(q, q') = torque, of a serial chain.

Everything is in base coordinates about the base origin, so nothing is transformed on the way: a spatial velocity is
(angular velocity, velocity of the body's point at the base origin), a spatial force is (moment about the base origin,
force), and the momentum, force and composite inertia of what a joint carries are plain sums from the tip to the base.
The recursion is Newton's and Euler's with composite bodies (Featherstone 2008, chapters 5 and 6; Lynch & Park 2017,
chapter 8).
"""

from __future__ import annotations

import math

import numpy as np

from armeval.arrays import FloatArray
from armeval.kernels.chain import ChainArrays
from armeval.kernels.compile import jit, jit_inline
from armeval.kernels.joint_record import Records, joint_records


@jit_inline
def place(joints: Records) -> None:
    """Place the joints' frames, ``rotation`` and ``origin``, and their ``axis`` for the joint angles ``at``."""
    for i in range(joints.shape[0]):
        joint = joints[i]
        at, axis = joint["at"], joint["axis"]
        R, p, P = joint["rotation"], joint["origin"], joint["placement"]
        lanes = range(at.shape[0])
        if i == 0:
            for r in range(3):
                for m in lanes:
                    p[r, m] = P[r, 3]
                    for c in range(3):
                        R[r, c, m] = P[r, c]
        else:
            A, o = joints[i - 1]["rotation"], joints[i - 1]["origin"]
            for r in range(3):
                for m in lanes:
                    for c in range(3):
                        R[r, c, m] = A[r, 0, m] * P[0, c] + A[r, 1, m] * P[1, c] + A[r, 2, m] * P[2, c]
                    p[r, m] = o[r, m] + A[r, 0, m] * P[0, 3] + A[r, 1, m] * P[1, 3] + A[r, 2, m] * P[2, 3]
        if joint["slides"] != 0.0:
            for r in range(3):
                for m in lanes:
                    p[r, m] += R[r, 2, m] * at[m]
                    axis[r, m] = 0.0
                    axis[3 + r, m] = R[r, 2, m]
        else:
            for m in lanes:
                cosine, sine = math.cos(at[m]), math.sin(at[m])
                for r in range(3):
                    x, y = R[r, 0, m], R[r, 1, m]
                    R[r, 0, m] = cosine * x + sine * y
                    R[r, 1, m] = cosine * y - sine * x
                x, y, z = R[0, 2, m], R[1, 2, m], R[2, 2, m]
                axis[0, m], axis[1, m], axis[2, m] = x, y, z
                axis[3, m] = p[1, m] * z - p[2, m] * y
                axis[4, m] = p[2, m] * x - p[0, m] * z
                axis[5, m] = p[0, m] * y - p[1, m] * x


@jit_inline
def gravity_torque(joints: Records, free_fall: FloatArray) -> None:
    """Fill in ``gravity``, the joint torques that hold the arm still, for the frames of :func:`place`."""
    n = joints.shape[0]
    gx, gy, gz = free_fall[0], free_fall[1], free_fall[2]
    carried = 0.0
    for k in range(n):
        i = n - 1 - k
        joint = joints[i]
        R, p, S, C, held = joint["rotation"], joint["origin"], joint["axis"], joint["moment"], joint["gravity"]
        mass, center = joint["mass"], joint["center"]
        carried += mass
        for m in range(held.shape[0]):
            for r in range(3):
                C[r, m] = mass * (p[r, m] + R[r, 0, m] * center[0] + R[r, 1, m] * center[1] + R[r, 2, m] * center[2])
        if k > 0:
            D = joints[i + 1]["moment"]
            for m in range(held.shape[0]):
                for r in range(3):
                    C[r, m] += D[r, m]
        for m in range(held.shape[0]):
            # the weight's force is carried * g at the common centre: moment (sum of mass * centre) x g
            held[m] = -(
                S[0, m] * (C[1, m] * gz - C[2, m] * gy)
                + S[1, m] * (C[2, m] * gx - C[0, m] * gz)
                + S[2, m] * (C[0, m] * gy - C[1, m] * gx)
                + carried * (S[3, m] * gx + S[4, m] * gy + S[5, m] * gz)
            )


@jit_inline
def equations_of_motion(joints: Records, free_fall: FloatArray) -> None:
    """Fill in ``matrix`` and ``bias``, M and h, for the frames of :func:`place`."""
    n = joints.shape[0]
    for i in range(n):
        joint = joints[i]
        R, p, S = joint["rotation"], joint["origin"], joint["axis"]
        V, A, F = joint["velocity"], joint["acceleration"], joint["force"]
        C, I = joint["moment"], joint["spin_inertia"]  # noqa: E741
        mass, center, B, speed = joint["mass"], joint["center"], joint["inertia"], joint["speed"]
        lanes = range(speed.shape[0])
        if i == 0:
            for m in lanes:
                for r in range(6):
                    V[r, m] = S[r, m] * speed[m]
                for r in range(3):
                    A[r, m] = 0.0
                    A[3 + r, m] = -free_fall[r]
        else:
            W, D = joints[i - 1]["velocity"], joints[i - 1]["acceleration"]
            for m in lanes:
                v = speed[m]
                x, y, z = W[0, m], W[1, m], W[2, m]
                a, b, c, d, e, f = S[0, m], S[1, m], S[2, m], S[3, m], S[4, m], S[5, m]
                A[0, m] = D[0, m] + v * (y * c - z * b)
                A[1, m] = D[1, m] + v * (z * a - x * c)
                A[2, m] = D[2, m] + v * (x * b - y * a)
                A[3, m] = D[3, m] + v * (y * f - z * e + W[4, m] * c - W[5, m] * b)
                A[4, m] = D[4, m] + v * (z * d - x * f + W[5, m] * a - W[3, m] * c)
                A[5, m] = D[5, m] + v * (x * e - y * d + W[3, m] * b - W[4, m] * a)
                for r in range(6):
                    V[r, m] = W[r, m] + S[r, m] * v
        for m in lanes:
            # the body's inertia about the base origin: R B R^T + mass (c^2 - c c^T)
            cx = p[0, m] + R[0, 0, m] * center[0] + R[0, 1, m] * center[1] + R[0, 2, m] * center[2]
            cy = p[1, m] + R[1, 0, m] * center[0] + R[1, 1, m] * center[1] + R[1, 2, m] * center[2]
            cz = p[2, m] + R[2, 0, m] * center[0] + R[2, 1, m] * center[1] + R[2, 2, m] * center[2]
            hx, hy, hz = mass * cx, mass * cy, mass * cz
            a0 = R[0, 0, m] * B[0, 0] + R[0, 1, m] * B[1, 0] + R[0, 2, m] * B[2, 0]
            a1 = R[0, 0, m] * B[0, 1] + R[0, 1, m] * B[1, 1] + R[0, 2, m] * B[2, 1]
            a2 = R[0, 0, m] * B[0, 2] + R[0, 1, m] * B[1, 2] + R[0, 2, m] * B[2, 2]
            b0 = R[1, 0, m] * B[0, 0] + R[1, 1, m] * B[1, 0] + R[1, 2, m] * B[2, 0]
            b1 = R[1, 0, m] * B[0, 1] + R[1, 1, m] * B[1, 1] + R[1, 2, m] * B[2, 1]
            b2 = R[1, 0, m] * B[0, 2] + R[1, 1, m] * B[1, 2] + R[1, 2, m] * B[2, 2]
            d0 = R[2, 0, m] * B[0, 0] + R[2, 1, m] * B[1, 0] + R[2, 2, m] * B[2, 0]
            d1 = R[2, 0, m] * B[0, 1] + R[2, 1, m] * B[1, 1] + R[2, 2, m] * B[2, 1]
            d2 = R[2, 0, m] * B[0, 2] + R[2, 1, m] * B[1, 2] + R[2, 2, m] * B[2, 2]
            xx = a0 * R[0, 0, m] + a1 * R[0, 1, m] + a2 * R[0, 2, m] + hy * cy + hz * cz
            xy = a0 * R[1, 0, m] + a1 * R[1, 1, m] + a2 * R[1, 2, m] - hx * cy
            xz = a0 * R[2, 0, m] + a1 * R[2, 1, m] + a2 * R[2, 2, m] - hx * cz
            yy = b0 * R[1, 0, m] + b1 * R[1, 1, m] + b2 * R[1, 2, m] + hx * cx + hz * cz
            yz = b0 * R[2, 0, m] + b1 * R[2, 1, m] + b2 * R[2, 2, m] - hy * cz
            zz = d0 * R[2, 0, m] + d1 * R[2, 1, m] + d2 * R[2, 2, m] + hx * cx + hy * cy
            C[0, m], C[1, m], C[2, m] = hx, hy, hz
            I[0, m], I[1, m], I[2, m], I[3, m], I[4, m], I[5, m] = xx, xy, xz, yy, yz, zz
            # momentum (L, P) and the force that its change takes
            wx, wy, wz, vx, vy, vz = V[0, m], V[1, m], V[2, m], V[3, m], V[4, m], V[5, m]
            px = mass * vx + wy * hz - wz * hy
            py = mass * vy + wz * hx - wx * hz
            pz = mass * vz + wx * hy - wy * hx
            lx = xx * wx + xy * wy + xz * wz + hy * vz - hz * vy
            ly = xy * wx + yy * wy + yz * wz + hz * vx - hx * vz
            lz = xz * wx + yz * wy + zz * wz + hx * vy - hy * vx
            ax, ay, az, ux, uy, uz = A[0, m], A[1, m], A[2, m], A[3, m], A[4, m], A[5, m]
            F[0, m] = xx * ax + xy * ay + xz * az + hy * uz - hz * uy + wy * lz - wz * ly + vy * pz - vz * py
            F[1, m] = xy * ax + yy * ay + yz * az + hz * ux - hx * uz + wz * lx - wx * lz + vz * px - vx * pz
            F[2, m] = xz * ax + yz * ay + zz * az + hx * uy - hy * ux + wx * ly - wy * lx + vx * py - vy * px
            F[3, m] = mass * ux + ay * hz - az * hy + wy * pz - wz * py
            F[4, m] = mass * uy + az * hx - ax * hz + wz * px - wx * pz
            F[5, m] = mass * uz + ax * hy - ay * hx + wx * py - wy * px
    carried = 0.0
    for k in range(n):
        i = n - 1 - k
        joint = joints[i]
        S, C, I, F = joint["axis"], joint["moment"], joint["spin_inertia"], joint["force"]  # noqa: E741
        U, bias, row = joint["velocity"], joint["bias"], joint["matrix"]
        carried += joint["mass"]
        lanes = range(bias.shape[0])
        if k > 0:
            child = joints[i + 1]
            D, J, G = child["moment"], child["spin_inertia"], child["force"]
            for m in lanes:
                for r in range(3):
                    C[r, m] += D[r, m]
                for r in range(6):
                    I[r, m] += J[r, m]
                    F[r, m] += G[r, m]
        for m in lanes:
            bias[m] = (
                S[0, m] * F[0, m]
                + S[1, m] * F[1, m]
                + S[2, m] * F[2, m]
                + S[3, m] * F[3, m]
                + S[4, m] * F[4, m]
                + S[5, m] * F[5, m]
            )
            # momentum of everything carried, for unit speed of this joint; stands in the place of the velocity
            wx, wy, wz, vx, vy, vz = S[0, m], S[1, m], S[2, m], S[3, m], S[4, m], S[5, m]
            hx, hy, hz = C[0, m], C[1, m], C[2, m]
            U[0, m] = I[0, m] * wx + I[1, m] * wy + I[2, m] * wz + hy * vz - hz * vy
            U[1, m] = I[1, m] * wx + I[3, m] * wy + I[4, m] * wz + hz * vx - hx * vz
            U[2, m] = I[2, m] * wx + I[4, m] * wy + I[5, m] * wz + hx * vy - hy * vx
            U[3, m] = carried * vx + wy * hz - wz * hy
            U[4, m] = carried * vy + wz * hx - wx * hz
            U[5, m] = carried * vz + wx * hy - wy * hx
        for j in range(i + 1):
            T, mirrored = joints[j]["axis"], joints[j]["matrix"]
            for m in lanes:
                entry = (
                    T[0, m] * U[0, m]
                    + T[1, m] * U[1, m]
                    + T[2, m] * U[2, m]
                    + T[3, m] * U[3, m]
                    + T[4, m] * U[4, m]
                    + T[5, m] * U[5, m]
                )
                row[j, m] = entry
                mirrored[i, m] = entry
        for m in lanes:
            row[i, m] += joint["reflected_inertia"]


@jit
def evaluate_poses(
    joints: Records, free_fall: FloatArray, q: FloatArray, v: FloatArray, M: FloatArray, h: FloatArray, g: FloatArray
) -> None:
    """Fill in M (k, n, n), h (k, n) and the gravity torque g (k, n) for poses q and speeds v (k, n); one lane."""
    n = joints.shape[0]
    for s in range(q.shape[0]):
        for i in range(n):
            joints[i]["at"][0] = q[s, i]
            joints[i]["speed"][0] = v[s, i]
        place(joints)
        gravity_torque(joints, free_fall)
        equations_of_motion(joints, free_fall)
        for i in range(n):
            h[s, i] = joints[i]["bias"][0]
            g[s, i] = joints[i]["gravity"][0]
            for j in range(n):
                M[s, i, j] = joints[i]["matrix"][j, 0]


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
    evaluate_poses(joint_records(chain), gravity, q, v, M, h, g)
    return M, h, g
