"""What the replay knows of one joint: one record, in which whatever differs between members of an ensemble has lanes.

The equations of motion, of the servo and of friction are written once, over records. A record's shape carries the number
of joints and of lanes as constants of the compiled code: with one lane the loops over lanes vanish and a single replay
runs as scalar code, with sixteen they become vector instructions. The members of one lane group move in step.
"""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

from armeval.arrays import FloatArray
from armeval.kernels.chain import ChainArrays

Records = npt.NDArray[np.void]

_KNOWN = (
    # geometry and masses, as in armeval.model.chain.Chain
    ("slides", ()),
    ("placement", (3, 4)),
    ("mass", ()),
    ("center", (3,)),
    ("inertia", (3, 3)),
    ("lower", ()),
    ("upper", ()),
    # drive, as in armeval.model.drive.Drive
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

_LANES = (
    # what members may differ in
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
    ("seen", ()),
    ("seen_speed", ()),
    ("ask", ()),
    ("cut", ()),
    ("act_before", ()),
    ("act_after", ()),
    ("state", ()),  # of dry friction, as in armeval.kernels.friction
    # work of the equations of motion, in base coordinates about the base origin
    ("at", ()),
    ("cosine", ()),
    ("sine", ()),
    ("rotation", (3, 3)),
    ("origin", (3,)),
    ("axis", (6,)),  # motion of the body for unit joint speed: angular, linear at the base origin
    ("velocity", (6,)),
    ("acceleration", (6,)),
    ("force", (6,)),  # angular about the base origin, linear
    ("moment", (3,)),  # mass times centre
    ("spin_inertia", (6,)),  # xx, xy, xz, yy, yz, zz about the base origin
    ("bias", ()),
    ("gravity", ()),
    ("jacobian", (3,)),
    ("tip_at", (3,)),
    ("tip_force", (3,)),
    # work of the friction step
    ("pushed", ()),
    ("friction", ()),
    ("slowest", ()),
    ("fastest", ()),
    ("new_speed", ()),
    ("free", ()),
    ("known", ()),
    ("load", ()),
    ("size", ()),
    ("done", ()),
)


def joint_type(count: int, lanes: int) -> np.dtype[np.void]:
    """Give the record's type for an arm of ``count`` joints and ``lanes`` members side by side."""
    fields: list[tuple[str, type, tuple[int, ...]]] = [(name, np.float64, shape) for name, shape in _KNOWN]
    fields += [(name, np.float64, (*shape, lanes)) for name, shape in _LANES]
    fields += [(name, np.float64, (count, lanes)) for name in ("matrix", "factor")]
    return np.dtype(fields)


def joint_records(chain: ChainArrays, lanes: int = 1) -> Records:
    """Make the records of a chain's joints, shape (n,), with drives that do nothing."""
    n = len(chain.mass)
    joints = np.zeros(n, joint_type(n, lanes))
    joints["slides"] = chain.prismatic
    for name in ("placement", "mass", "center", "inertia", "lower", "upper"):
        joints[name] = getattr(chain, name)
    joints["gear_ratio"] = 1.0
    joints["torque_limit"] = np.inf
    joints["stribeck_speed"] = 1.0
    joints["torque_gain"] = 1.0
    joints["cog_gain"] = 1.0
    return joints


def spread(values: FloatArray | float, lanes: int) -> FloatArray:
    """Give every lane the joints' values: (n,) or one number becomes something that fits (n, lanes)."""
    return np.asarray(values, dtype=np.float64)[..., None] * np.ones(lanes)
