"""Random serial arms as URDF text, and what pinocchio itself says about them.

Every arm is physically possible (each link's inertia is that of a cloud of points) and awkward on purpose: axes point
anywhere and are not of unit length, links are turned against each other, and parts that do not move hang in between.
"""

from __future__ import annotations

import tempfile
from pathlib import Path
from typing import TYPE_CHECKING, Any

import numpy as np

if TYPE_CHECKING:
    from armeval.model.chain import Chain

TIP = "tip"


def _numbers(values: Any) -> str:
    return " ".join(f"{value:.17g}" for value in values)


def _origin(rng: np.random.Generator, reach: float = 0.2) -> str:
    xyz, rpy = rng.uniform(-reach, reach, 3), rng.uniform(-np.pi, np.pi, 3)
    return f'<origin xyz="{_numbers(xyz)}" rpy="{_numbers(rpy)}"/>'


def _inertial(rng: np.random.Generator) -> str:
    share = rng.dirichlet(np.ones(8))
    mass = rng.uniform(0.05, 0.5)
    points = rng.uniform(-0.06, 0.06, (8, 3))
    points -= share @ points
    second = mass * (points.T * share) @ points
    inertia = np.trace(second) * np.eye(3) - second
    entries = zip(("ixx", "ixy", "ixz", "iyy", "iyz", "izz"), inertia[np.triu_indices(3)], strict=True)
    told = " ".join(f'{name}="{value:.17g}"' for name, value in entries)
    return f'<inertial>{_origin(rng, 0.1)}<mass value="{mass:.17g}"/><inertia {told}/></inertial>'


def random_urdf(
    rng: np.random.Generator,
    joints: int,
    *,
    prismatic: float = 0.25,
    continuous: float = 0.25,
    fixed: float = 0.4,
) -> str:
    """Write a random serial arm with the joints ``joint1`` ... and the tip frame ``tip``.

    Parameters
    ----------
    rng
        Where the chance comes from.
    joints
        How many joints move.
    prismatic, continuous
        Chance that a joint slides; that a joint which turns has no limits.
    fixed
        Chance that a further link, with mass, is fixed between two joints.
    """
    parts = [f'<link name="base">{_inertial(rng)}</link>']
    parent = "base"

    def attach(name: str, kind: str, child: str, inertial: str, inside: str) -> str:
        parts.append(f'<link name="{child}">{inertial}</link>')
        parts.append(
            f'<joint name="{name}" type="{kind}">{_origin(rng)}<parent link="{parent}"/><child link="{child}"/>'
            f"{inside}</joint>"
        )
        return child

    for number in range(1, joints + 1):
        if rng.random() < fixed:
            parent = attach(f"mount{number}", "fixed", f"bracket{number}", _inertial(rng), "")
        axis = rng.normal(size=3) if rng.random() < 0.7 else np.eye(3)[rng.integers(3)] * rng.choice([-1.0, 1.0, 2.0])
        inside = f'<axis xyz="{_numbers(axis)}"/>'
        slides = rng.random() < prismatic
        free = not slides and rng.random() < continuous
        span = 0.3 if slides else 2.5
        if not free:
            inside += f'<limit lower="{-span}" upper="{span}" effort="1" velocity="1"/>'
        kind = "prismatic" if slides else "continuous" if free else "revolute"
        parent = attach(f"joint{number}", kind, f"link{number}", _inertial(rng), inside)
    if rng.random() < fixed:
        parent = attach("tool_mount", "fixed", "tool", _inertial(rng), "")
    attach("tip_mount", "fixed", TIP, "", "")
    return '<?xml version="1.0"?>\n<robot name="random">\n' + "\n".join(parts) + "\n</robot>\n"


def chain_of(urdf: str, tip: str = TIP) -> Chain:
    """Read URDF text as armeval does."""
    from armeval.files.chains.urdf import read_urdf

    with tempfile.TemporaryDirectory() as folder:
        file = Path(folder) / "arm.urdf"
        file.write_text(urdf, encoding="utf-8")
        return read_urdf(file, tip)


def random_pose(rng: np.random.Generator, chain: Chain) -> np.ndarray:
    """Draw joint angles (n,) within the joints' ranges; a joint without limits turns up to 3 rad."""
    return rng.uniform(np.maximum(chain.lower, -3.0), np.minimum(chain.upper, 3.0))


def pinocchio_model(urdf: str) -> Any:
    """Let pinocchio read URDF text."""
    import pinocchio

    return pinocchio.buildModelFromXML(urdf)


def pinocchio_pose(model: Any, angles: np.ndarray) -> np.ndarray:
    """Turn one angle a joint into pinocchio's configuration, where a continuous joint is a cosine and a sine."""
    import pinocchio

    return pinocchio.integrate(model, pinocchio.neutral(model), np.asarray(angles, dtype=float))
