"""What the kernels of the replay know, as records: of each joint, of the servo, of each period's targets and outcome.

The equations of motion, of the servo and of friction are written once, over these records. Whatever differs between the
members of an ensemble is a field of numbers with lanes (:mod:`armeval.kernels.lanes`): for a single replay a float, for
an ensemble eight side by side. Being one block of memory whose layout the compiler knows, a record needs neither
reference counts nor checks for overlap, which at these step times cost more than the physics.
"""

from __future__ import annotations

import math

import numpy as np
import numpy.typing as npt

from armeval.arrays import FloatArray
from armeval.kernels.chain import ChainArrays
from armeval.kernels.compile import jit_inline
from armeval.kernels.lanes import MARK, WIDTH, aligned_zeros

Records = npt.NDArray[np.void]
Fields = tuple[tuple[str, tuple[int, ...]], ...]

# What members may differ in, the state, and work space. In base coordinates about the base origin where spatial.
_OF_MEMBERS: Fields = (
    ("coulomb_friction", ()),
    ("static_friction", ()),
    ("viscous_friction", ()),
    ("torque_gain", ()),  # delivered torque over commanded torque
    ("cog_gain", ()),
    ("index", ()),  # motor angle at joint angle 0
    ("table_index", ()),  # what the firmware takes for it
    # state
    ("angle", ()),
    ("speed", ()),
    ("state", ()),  # of dry friction, as in armeval.kernels.friction
    # servo
    ("seen", ()),
    ("seen_speed", ()),
    ("asked", ()),
    ("cut", ()),
    ("acts_before", ()),
    ("acts_after", ()),
    # equations of motion
    ("at", ()),
    ("rotation", (3, 3)),
    ("origin", (3,)),
    ("axis", (6,)),  # motion of the body for unit joint speed: angular, linear at the base origin
    ("velocity", (6,)),
    ("acceleration", (6,)),
    ("force", (6,)),  # moment about the base origin, force
    ("first_moment", (3,)),  # mass times centre
    ("inertia_at_base", (6,)),  # xx, xy, xz, yy, yz, zz
    ("bias", ()),
    ("weight", ()),  # joint torque that holds the arm still
    ("jacobian", (3,)),
    # friction step
    ("pushed", ()),
    ("friction", ()),
    ("slowest", ()),
    ("fastest", ()),
    ("new_speed", ()),
    ("free", ()),
    ("known", ()),
    ("inverse", ()),
)

# geometry and masses as in armeval.model.chain.Chain, drive as in armeval.model.drive.Drive
_OF_JOINTS: Fields = (
    ("slides", ()),
    ("placement", (3, 4)),
    ("mass", ()),
    ("center", (3,)),
    ("inertia", (3, 3)),
    ("lower", ()),
    ("upper", ()),
    ("gear_ratio", ()),
    ("reflected_inertia", ()),
    ("stiffness", ()),
    ("damping", ()),
    ("torque_limit", ()),
    ("torque_step", ()),
    ("dead_time_torque", ()),
    ("resolution", ()),
    ("stribeck_speed", ()),
)

_OF_SERVO: Fields = (
    ("period", ()),
    ("delay_share", ()),  # of a period, what is left of the delay after whole periods
    ("speed_gain", ()),  # share of a new speed difference that the filter lets through at once
    # 1 for yes:
    ("closes_at_tip", ()),
    ("holds_weight", ()),
    ("compensates", ()),
    ("takes_nearest", ()),  # entry of the table, instead of interpolating
    ("tip_stiffness", (3,)),
    ("tip_damping", (3,)),
    ("free_fall", (3,)),
    ("tip", (3,)),  # in the last joint's frame
)


def _zeros(shape: tuple[int, ...], plain: Fields, laned: Fields = (), lanes: int = 1) -> Records:
    """Make records; fields with lanes come first, so that each starts where a vector of eight may."""
    if lanes not in (1, WIDTH):
        raise ValueError(f"records have 1 or {WIDTH} lanes, not {lanes}")
    row = () if lanes == 1 else (lanes,)
    fields = [(name, np.float64, (*size, *row)) for name, size in laned]
    fields += [(name, np.float64, size) for name, size in plain]
    if lanes > 1:
        # the field that tells, of a size that lets the next record start right too
        fields.append((MARK, np.float64, (WIDTH - sum(math.prod(size) for _, size in plain) % WIDTH,)))
    kind = np.dtype(fields, align=True)
    records: Records = aligned_zeros(shape, kind)
    return records


def joint_records(chain: ChainArrays, lanes: int = 1) -> Records:
    """Make the records of a chain's joints, shape (n,), with drives that do nothing."""
    n = len(chain.mass)
    joints = _zeros((n,), _OF_JOINTS, (*_OF_MEMBERS, ("matrix", (n,)), ("factor", (n,))), lanes)
    joints["slides"] = chain.prismatic
    for name in ("placement", "mass", "center", "inertia", "lower", "upper"):
        joints[name] = getattr(chain, name)
    joints["gear_ratio"] = 1.0
    joints["torque_limit"] = np.inf
    joints["stribeck_speed"] = 1.0
    joints["torque_gain"] = 1.0
    joints["cog_gain"] = 1.0
    return joints


@jit_inline
def joint_count(joints: Records) -> int:
    """Give the number of joints from the records' type: to the compiler a constant, by which it unrolls loops."""
    count: int = joints[0]["matrix"].shape[0]
    return count


def servo_record() -> Records:
    """Make the record of a servo, shape (1,), all zeros."""
    return _zeros((1,), _OF_SERVO)


def target_records(
    joint: FloatArray, joint_speed: FloatArray, torque: FloatArray, tip: FloatArray, tip_speed: FloatArray
) -> Records:
    """Make the records of k periods, shape (k,): joint targets, speeds and torque fed forward (k, n); tip (k, 3)."""
    columns = {"joint": joint, "joint_speed": joint_speed, "torque": torque, "tip": tip, "tip_speed": tip_speed}
    targets = _zeros((len(joint),), tuple((name, (values.shape[1],)) for name, values in columns.items()))
    for name, values in columns.items():
        targets[name] = values
    return targets


def sent_records(periods: int, n: int, lanes: int = 1) -> Records:
    """Make the records of torques on their way to the drives, shape (periods,), field ``torque`` (n,)."""
    return _zeros((periods,), (), (("torque", (n,)),), lanes)


def lap_records(periods: int, n: int, lanes: int = 1) -> Records:
    """Make the records of a lap, shape (periods,).

    ``angle``, ``speed``: at the start of the period; ``torque``: commanded there; ``cut``: 1 where that was cut at the
    torque limit; ``rests``: 1 where the joint was at rest over the step before, (n,) each. ``tip``, (3,): the tip.
    """
    fields: Fields = tuple((name, (n,)) for name in ("angle", "speed", "torque", "cut", "rests"))
    return _zeros((periods,), (), (*fields, ("tip", (3,))), lanes)


def bin_records(bins: int, n: int, lanes: int = 1) -> Records:
    """Make the records of stretches of path, shape (bins,), for :func:`armeval.kernels.survey.survey_laps`."""
    return _zeros((bins,), (), (("square", ()), ("sticks", (n,))), lanes)
