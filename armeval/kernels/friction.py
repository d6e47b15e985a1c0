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

from armeval.kernels.compile import jit_inline
from armeval.kernels.lanes import anywhere, where
from armeval.kernels.records import Records, joint_count

MOST_PASSES = 100_000
"""After so many passes the solve is given up; only a value that is not a number gets there."""

ROUNDING = 1e-12
"""Share of the terms' size by which a load may miss its tread."""


LARGEST = 1e300
"""A speed that no joint reaches: the bound of a joint without stop."""


@jit_inline
def solve_speeds(joints: Records) -> int:
    """Fill in ``new_speed`` from ``matrix``, ``pushed``, ``friction``, ``slowest`` and ``fastest``, and mend ``state``.

    Returns
    -------
    Number of solutions tried; 0 if none was found, which means that something in the system is not a number.
    """
    for passes in range(1, MOST_PASSES + 1):
        _solve_guess(joints)
        if _guess_holds(joints):
            return passes
    return 0


@jit_inline
def _solve_guess(joints: Records) -> None:
    """Solve for the speeds that the guessed states leave open, by L D L^T with the known ones masked out."""
    n = joint_count(joints)
    stopped = False
    for i in range(n):
        joint = joints[i]
        state = joint["state"]
        slides = abs(state) == 1.0
        known = where(state == 2.0, joint["fastest"], where(state == -2.0, joint["slowest"], 0.0))
        joint["free"] = where(slides, 1.0, 0.0)
        joint["known"] = known
        joint["new_speed"] = where(slides, joint["pushed"] - state * joint["friction"], known)
        stopped = stopped or anywhere(known != 0.0)
    if stopped:
        for i in range(n):
            x = joints[i]["new_speed"]
            for j in range(n):
                x = x - joints[i]["free"] * joints[i]["matrix"][j] * joints[j]["known"]
            joints[i]["new_speed"] = x
    for i in range(n):
        matrix, factor, free = joints[i]["matrix"], joints[i]["factor"], joints[i]["free"]
        for j in range(i):
            factor[j] = matrix[j] * (free * joints[j]["free"])
        factor[i] = where(free == 1.0, matrix[i], 1.0)
    for k in range(n):
        inverse, y = 1.0 / joints[k]["factor"][k], joints[k]["new_speed"]
        joints[k]["inverse"] = inverse
        for i in range(n - 1, k, -1):
            factor = joints[i]["factor"]
            share = factor[k] * inverse
            for j in range(k + 1, i + 1):
                factor[j] -= share * joints[j]["factor"][k]  # of the row j as yet undivided, for j goes before i
            factor[k] = share
            joints[i]["new_speed"] = joints[i]["new_speed"] - share * y
    for i in range(n - 1, -1, -1):
        x = joints[i]["new_speed"] * joints[i]["inverse"]
        for j in range(i + 1, n):
            x = x - joints[j]["factor"][i] * joints[j]["new_speed"]
        joints[i]["new_speed"] = x


@jit_inline
def _guess_holds(joints: Records) -> bool:
    """Whether every joint stays on its tread; in each lane, move the first one that does not one state along."""
    n = joint_count(joints)
    untouched = abs(joints[0]["state"]) <= 2.0
    for i in range(n):
        joint = joints[i]
        matrix, x, state, bound = joint["matrix"], joint["new_speed"], joint["state"], joint["friction"]
        load, size = joint["pushed"], abs(joint["pushed"])
        for j in range(n):
            part = matrix[j] * joints[j]["new_speed"]
            load = load - part
            size = size + abs(part)
        slides = abs(state) == 1.0
        low = where(slides, where(state > 0.0, 0.0, joint["slowest"]), where(state > 0.0, bound, -bound))
        high = where(slides, where(state > 0.0, joint["fastest"], 0.0), where(state < 0.0, -bound, bound))
        low = where(state == -2.0, -LARGEST, low)
        high = where(state == 2.0, LARGEST, high)
        value = where(slides, x, load)
        slack = where(slides, 0.0, ROUNDING * size)
        # asked so that a value that is not a number, or that runs away, fits nowhere
        fits = (value >= low - slack) & (value <= high + slack) & (abs(x) < LARGEST)
        moved = where(value > high, state + 1.0, state - 1.0)
        moved = where(moved > 2.0, 2.0, where(moved < -2.0, -2.0, moved))
        joint["state"] = where(fits, state, where(untouched, moved, state))
        untouched = untouched & fits
    return not anywhere(where(untouched, 0.0, 1.0) == 1.0)
