"""Dry friction and joint stops: the exact solve of one implicit step.

Over a step the joints' speeds change from v to x by ``A x = r + p``: A is the inertia with what acts implicitly, r the
momentum that everything but dry friction and stops would give, p their impulse. For each joint, x and the load
``y = r - A x = -p`` stand on a staircase that only rises:

====== ============================ ======================
state  speed x                      load y
====== ============================ ======================
-2     at its lower stop            at most -b
-1     sliding down, up to 0        -b
0      at rest: exactly 0           between -b and b
1      sliding up, from 0           b
2      at its upper stop            at least b
====== ============================ ======================

with b the impulse of friction over the step. In every state one of x and y is known, so a guess of all states leaves a
linear system; its answer is right if the unknown one of every joint stays on its tread. Else the first joint that left
its tread goes one state along, and the system is solved again: Murty's principal pivoting, which ends after finitely
many steps for a positive definite A, where correcting all joints at once can cycle (Murty 1974; Judice & Pires 1992 for
bounds on both sides). The states of the step before are nearly always right.

A joint at rest keeps its speed at exactly zero: no creep, no smoothed sign function.
"""

from __future__ import annotations

import math

from armeval.kernels.compile import jit_inline
from armeval.kernels.joint_record import Records

MOST_PASSES = 1000
"""After so many passes the solve is given up; only a value that is not a number gets there."""

ROUNDING = 1e-12
"""Share of the terms' size by which a load may miss its tread."""


@jit_inline
def solve_speeds(joints: Records) -> int:
    """Fill in ``new_speed`` from ``matrix``, ``pushed``, ``friction``, ``slowest`` and ``fastest``, and mend ``state``.

    Returns
    -------
    Number of solutions tried; 0 if none was found, which means that something in the system is not a number.
    """
    for passes in range(1, MOST_PASSES + 1):
        _solve_guess(joints)
        if _mend_guess(joints) == 0.0:
            return passes
    return 0


@jit_inline
def _solve_guess(joints: Records) -> None:
    """Solve for the speeds that the guessed states leave open, by L D L^T with the known ones masked out."""
    n = joints.shape[0]
    stopped = 0.0
    for i in range(n):
        joint = joints[i]
        x, state, free, known = joint["new_speed"], joint["state"], joint["free"], joint["known"]
        pushed, bound, slowest, fastest = joint["pushed"], joint["friction"], joint["slowest"], joint["fastest"]
        for m in range(x.shape[0]):
            s = state[m]
            free[m] = 1.0 if abs(s) == 1.0 else 0.0
            known[m] = fastest[m] if s == 2.0 else (slowest[m] if s == -2.0 else 0.0)
            x[m] = pushed[m] - s * bound[m] if abs(s) == 1.0 else known[m]
            stopped += abs(known[m])
    if stopped != 0.0:
        for i in range(n):
            row, x, free = joints[i]["matrix"], joints[i]["new_speed"], joints[i]["free"]
            for j in range(n):
                known = joints[j]["known"]
                for m in range(x.shape[0]):
                    x[m] -= free[m] * row[j, m] * known[m]
    for i in range(n):
        row, factor, free = joints[i]["matrix"], joints[i]["factor"], joints[i]["free"]
        for j in range(i):
            other = joints[j]["free"]
            for m in range(free.shape[0]):
                factor[j, m] = row[j, m] * (free[m] * other[m])
        for m in range(free.shape[0]):
            factor[i, m] = row[i, m] if free[m] == 1.0 else 1.0
    for k in range(n):
        pivot, y, inverse = joints[k]["factor"], joints[k]["new_speed"], joints[k]["load"]
        for m in range(inverse.shape[0]):
            inverse[m] = 1.0 / pivot[k, m]
        for i in range(n - 1, k, -1):
            factor, x, share = joints[i]["factor"], joints[i]["new_speed"], joints[i]["load"]
            for m in range(x.shape[0]):
                share[m] = factor[k, m] * inverse[m]
                x[m] -= share[m] * y[m]
            for j in range(k + 1, i + 1):
                across = joints[j]["factor"]
                for m in range(x.shape[0]):
                    factor[j, m] -= share[m] * across[k, m]
            for m in range(x.shape[0]):
                factor[k, m] = share[m]
    for i in range(n - 1, -1, -1):
        x, inverse = joints[i]["new_speed"], joints[i]["load"]
        for m in range(x.shape[0]):
            x[m] *= inverse[m]
        for j in range(i + 1, n):
            factor, y = joints[j]["factor"], joints[j]["new_speed"]
            for m in range(x.shape[0]):
                x[m] -= factor[i, m] * y[m]


@jit_inline
def _mend_guess(joints: Records) -> float:
    """Move the first joint that left its tread one state along; give the number of lanes where there was one."""
    n = joints.shape[0]
    fits_all = joints[0]["done"]
    for m in range(fits_all.shape[0]):
        fits_all[m] = 1.0
    for i in range(n):
        joint = joints[i]
        x, state, load, size, row = joint["new_speed"], joint["state"], joint["load"], joint["size"], joint["matrix"]
        pushed, bound, slowest, fastest = joint["pushed"], joint["friction"], joint["slowest"], joint["fastest"]
        for m in range(x.shape[0]):
            load[m] = pushed[m]
            size[m] = abs(pushed[m])
        for j in range(n):
            y = joints[j]["new_speed"]
            for m in range(x.shape[0]):
                part = row[j, m] * y[m]
                load[m] -= part
                size[m] += abs(part)
        for m in range(x.shape[0]):
            s, b = state[m], bound[m]
            sliding = abs(s) == 1.0
            value = x[m] if sliding else load[m]
            slack = 0.0 if sliding else ROUNDING * size[m]
            low = (0.0 if s > 0.0 else slowest[m]) if sliding else (-math.inf if s < 0.0 else (b if s > 0.0 else -b))
            high = (fastest[m] if s > 0.0 else 0.0) if sliding else (math.inf if s > 0.0 else (-b if s < 0.0 else b))
            # written so that a value that is not a number fits nowhere
            fits = value >= low - slack and value <= high + slack
            if not fits and fits_all[m] == 1.0:
                state[m] = min(max(s + (1.0 if value > high else -1.0), -2.0), 2.0)
                fits_all[m] = 0.0
    wrong = 0.0
    for m in range(fits_all.shape[0]):
        wrong += 1.0 - fits_all[m]
    return wrong
