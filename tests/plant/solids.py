"""Mass, centre and inertia of links put together from simple solids, and their URDF text."""

from __future__ import annotations

import itertools
import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

FloatArray = npt.NDArray[np.float64]

# Rotation that carries a cylinder's own axis (z) onto the named one, as fixed-axis roll, pitch, yaw.
_TURN = {"x": (0.0, math.pi / 2, 0.0), "y": (-math.pi / 2, 0.0, 0.0), "z": (0.0, 0.0, 0.0)}


@dataclass(frozen=True)
class Solid:
    """A homogeneous box or (hollow) cylinder in the frame of its link; lengths in m, mass in kg.

    ``size`` is (x, y, z) of a box, (outer radius, inner radius, length) of a cylinder along ``axis``.
    """

    shape: str
    size: tuple[float, float, float]
    mass: float
    centre: tuple[float, float, float]
    axis: str = "z"

    def inertia(self) -> FloatArray:
        """Shape (3, 3) [kg m^2], about the solid's own centre."""
        a, b, c = self.size
        if self.shape == "box":
            return self.mass / 12.0 * np.diag([b * b + c * c, a * a + c * c, a * a + b * b])
        along = self.mass / 2.0 * (a * a + b * b)
        across = self.mass / 12.0 * (3.0 * (a * a + b * b) + c * c)
        return np.diag([along if self.axis == name else across for name in "xyz"])

    def visual(self) -> str:
        roll, pitch, yaw = _TURN[self.axis]
        x, y, z = self.centre
        if self.shape == "box":
            geometry = '<box size="{:.6g} {:.6g} {:.6g}"/>'.format(*self.size)
        else:
            geometry = f'<cylinder radius="{self.size[0]:.6g}" length="{self.size[2]:.6g}"/>'
        return (
            f'    <visual>\n      <origin xyz="{x:.6g} {y:.6g} {z:.6g}" rpy="{roll:.8g} {pitch:.8g} {yaw:.8g}"/>\n'
            f"      <geometry>{geometry}</geometry>\n    </visual>\n"
        )


def box(size: tuple[float, float, float], mass: float, centre: tuple[float, float, float]) -> Solid:
    return Solid("box", size, mass, centre)


def cylinder(radius: float, length: float, mass: float, centre: tuple[float, float, float], axis: str) -> Solid:
    return Solid("cylinder", (radius, 0.0, length), mass, centre, axis)


def tube(outer: float, inner: float, length: float, density: float, centre: tuple[float, float, float]) -> Solid:
    """A tube along x; radii and length in m, density in kg/m^3."""
    mass = math.pi * (outer**2 - inner**2) * length * density
    return Solid("cylinder", (outer, inner, length), mass, centre, "x")


def lumped(solids: Sequence[Solid]) -> tuple[float, FloatArray, FloatArray]:
    """Mass, centre of mass (3,) and inertia about it (3, 3), by the parallel-axis theorem."""
    mass = sum(solid.mass for solid in solids)
    centre = sum((solid.mass * np.array(solid.centre) for solid in solids), np.zeros(3)) / mass
    inertia = np.zeros((3, 3))
    for solid in solids:
        d = np.array(solid.centre) - centre
        inertia += solid.inertia() + solid.mass * (d @ d * np.eye(3) - np.outer(d, d))
    return mass, centre, inertia


@dataclass(frozen=True)
class Link:
    """A link, and the joint that moves it against the link before it; angles in degrees."""

    name: str
    solids: tuple[Solid, ...]
    joint: str = ""
    origin: tuple[float, float, float] = (0.0, 0.0, 0.0)
    axis: tuple[float, float, float] = (0.0, 0.0, 1.0)
    range_deg: tuple[float, float] = (-180.0, 180.0)
    effort: float = 0.0

    def text(self) -> str:
        mass, centre, inertia = lumped(self.solids)
        terms = {
            "ixx": inertia[0, 0],
            "ixy": inertia[0, 1],
            "ixz": inertia[0, 2],
            "iyy": inertia[1, 1],
            "iyz": inertia[1, 2],
            "izz": inertia[2, 2],
        }
        written = " ".join(f'{name}="{0.0 if abs(value) < 1e-15 else value:.6e}"' for name, value in terms.items())
        x, y, z = np.round(centre, 12) + 0.0
        return (
            f'  <link name="{self.name}">\n    <inertial>\n      <origin xyz="{x:.6g} {y:.6g} {z:.6g}" rpy="0 0 0"/>\n'
            f'      <mass value="{mass:.6g}"/>\n      <inertia {written}/>\n    </inertial>\n'
            + "".join(solid.visual() for solid in self.solids)
            + "  </link>\n"
        )


def urdf(name: str, links: Sequence[Link], tip: str, tip_origin: tuple[float, float, float]) -> str:
    """URDF of a serial chain: the first link is the base; the tip is fixed to the last one."""
    parts = [
        '<?xml version="1.0"?>\n<!-- An invented arm; NOTES.md says how masses and inertias were chosen. -->\n',
        f'<robot name="{name}">\n',
        links[0].text(),
    ]
    for before, link in itertools.pairwise(links):
        lower, upper = (math.radians(angle) for angle in link.range_deg)
        parts.append(
            f'  <joint name="{link.joint}" type="revolute">\n    <parent link="{before.name}"/>\n'
            f'    <child link="{link.name}"/>\n'
            '    <origin xyz="{:.6g} {:.6g} {:.6g}" rpy="0 0 0"/>\n'.format(*link.origin)
            + '    <axis xyz="{:g} {:g} {:g}"/>\n'.format(*link.axis)
            + f'    <limit lower="{lower:.8g}" upper="{upper:.8g}" effort="{link.effort:g}" velocity="10"/>\n'
            + "  </joint>\n"
        )
        parts.append(link.text())
    parts.append(
        f'  <link name="{tip}"/>\n  <joint name="{tip}_fixed" type="fixed">\n    <parent link="{links[-1].name}"/>\n'
        f'    <child link="{tip}"/>\n' + '    <origin xyz="{:.6g} {:.6g} {:.6g}" rpy="0 0 0"/>\n'.format(*tip_origin)
    )
    parts.append("  </joint>\n</robot>\n")
    return "".join(parts)
