"""URDF to chain: structure checked here, numbers by pinocchio."""

from __future__ import annotations

import os
from typing import Any

import numpy as np

from armeval.arrays import FloatArray
from armeval.errors import Findings
from armeval.files.chains import urdf_text
from armeval.files.chains.urdf_tree import moving_chain
from armeval.files.tables.reading import Reading
from armeval.files.text_file import read_text
from armeval.model.chain import Chain


def read_urdf(path: str | os.PathLike[str], tip: str, *, findings: Findings | None = None) -> Chain:
    """Read a URDF as a serial chain from its base link to the tip.

    Links that do not move against each other are lumped; meshes are not needed. Placements, axes and inertias are what
    pinocchio makes of the file; each joint's frame is then turned so that its z axis is the joint's axis.

    Parameters
    ----------
    path
        The file.
    tip
        Name of the link whose origin is the tip.
    findings
        Gathers warnings; without it they become :class:`armeval.errors.InputWarning`.

    Raises
    ------
    InputError
        If the file cannot be read, is no serial chain that ends in the tip, or a moving body has no mass; with every
        fault that was found.
    """
    with Reading(path, findings) as found:
        urdf = urdf_text.parse(read_text(path), found)
        moving = moving_chain(urdf, tip, found)
        found.raise_errors()
        return _chain(urdf, tuple(moving), tip)


def _chain(urdf: urdf_text.Urdf, moving: tuple[urdf_text.Joint, ...], tip: str) -> Chain:
    import pinocchio

    model = pinocchio.buildModelFromXML(urdf_text.written(urdf))
    numbers = {name: index for index, name in enumerate(urdf.joints)}
    if list(model.names)[1:] != [f"joint{numbers[joint.name]}" for joint in moving]:
        raise RuntimeError(f"pinocchio orders the joints {list(model.names)[1:]} in another way than the chain")
    frame = model.frames[model.getFrameId(f"link{list(urdf.links).index(tip)}", pinocchio.FrameType.BODY)]
    turned = [pinocchio.SE3(_turned_to(_axis(model, index)), np.zeros(3)) for index in range(1, model.njoints)]
    before = [pinocchio.SE3.Identity(), *turned[:-1]]
    placements = [
        (above.inverse() * model.jointPlacements[index + 1] * here).homogeneous[:3]
        for index, (above, here) in enumerate(zip(before, turned, strict=True))
    ]
    bodies = [here.actInv(model.inertias[index + 1]) for index, here in enumerate(turned)]
    return Chain(
        joints=tuple(joint.name for joint in moving),
        prismatic=np.array([joint.kind == "prismatic" for joint in moving]),
        placement=np.array(placements),
        mass=np.array([body.mass for body in bodies]),
        center=np.array([body.lever for body in bodies]),
        inertia=np.array([body.inertia for body in bodies]),
        tip=turned[-1].actInv(frame.placement.translation),
        lower=np.array([joint.lower for joint in moving]),
        upper=np.array([joint.upper for joint in moving]),
        tip_name=tip,
    )


def _axis(model: Any, index: int) -> FloatArray:
    """Give the unit vector of a joint's axis in its own frame, from pinocchio's motion subspace (6 x 1)."""
    import pinocchio

    data = model.joints[index].createData()
    model.joints[index].calc(data, pinocchio.neutral(model))
    subspace = np.asarray(data.S, dtype=np.float64).reshape(6)
    axis: FloatArray = subspace[:3] + subspace[3:]  # a joint either slides or turns: one half is zero
    return axis


def _turned_to(axis: FloatArray) -> FloatArray:
    """Rotation (3, 3) whose third column is the axis; where the axis lies along x, y or z it is exact."""
    across = np.eye(3)[np.argmin(np.abs(axis))]
    across = across - axis * (axis @ across)
    across = across / np.linalg.norm(across)
    return np.column_stack([across, np.cross(axis, across), axis])
