"""What stands in a URDF file: its links and joints, read strictly, and written again without what is not needed.

Only geometry and mass matter here. Meshes, colours and transmissions are passed over, and the text that goes on to
pinocchio holds none of them.
"""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import dataclass, field
from xml.etree import ElementTree

from armeval.errors import Findings, InputError, near

#: Joint types that armeval understands.
MOVING = ("revolute", "continuous", "prismatic")
KNOWN = (*MOVING, "fixed")
_ELSEWHERE = ("planar", "floating", "spherical")
_INERTIA = ("ixx", "ixy", "ixz", "iyy", "iyz", "izz")

Triple = tuple[float, float, float]


@dataclass(frozen=True)
class Origin:
    """A pose in the parent's frame: translation [m], roll, pitch and yaw [rad]."""

    xyz: Triple = (0.0, 0.0, 0.0)
    rpy: Triple = (0.0, 0.0, 0.0)


@dataclass(frozen=True)
class Link:
    """A link; ``inertia`` [kg m^2] is ixx, ixy, ixz, iyy, iyz, izz about its centre of mass."""

    name: str
    mass: float = 0.0
    center: Origin = Origin()
    inertia: tuple[float, ...] = (0.0,) * 6


@dataclass(frozen=True)
class Joint:
    """A joint; ``lower`` and ``upper`` [rad or m] are infinite where it has no limits."""

    name: str
    kind: str
    parent: str
    child: str
    origin: Origin = Origin()
    axis: Triple = (1.0, 0.0, 0.0)
    lower: float = -math.inf
    upper: float = math.inf

    @property
    def moves(self) -> bool:
        """Whether it is not fixed."""
        return self.kind in MOVING


@dataclass(frozen=True)
class Urdf:
    """All links and joints of a file, by name, in the file's order."""

    links: dict[str, Link] = field(default_factory=dict)
    joints: dict[str, Joint] = field(default_factory=dict)


def parse(text: str, findings: Findings) -> Urdf:
    """Read URDF text; everything that cannot stand in a link or joint is noted.

    Raises
    ------
    InputError
        If it is not XML (with line and column), or not URDF.
    """
    try:
        root = ElementTree.fromstring(text)
    except ElementTree.ParseError as fault:
        line, column = fault.position
        raise InputError(
            f"this is not XML: {str(fault).rsplit(': ', 1)[0]}",
            "mend the text there",
            place=f"line {line}, column {column + 1}",
        ) from fault
    if root.tag != "robot":
        raise InputError(f"the outermost element is <{root.tag}>", "give a URDF file, which begins with <robot>")
    if any(isinstance(element.tag, str) and "xacro" in element.tag for element in root.iter()):
        raise InputError("the file holds xacro macros", "expand them with xacro and give the resulting URDF")
    urdf = Urdf()
    for name, element in _named(root, "link", findings):
        urdf.links[name] = _link(name, element, findings)
    for name, element in _named(root, "joint", findings):
        joint = _joint(name, element, findings)
        if joint is not None:
            urdf.joints[name] = joint
    if not urdf.links:
        findings.error("the file has no link", "give a URDF with links and joints")
    return urdf


def written(urdf: Urdf) -> str:
    """Write links and joints as URDF text again, with geometry and mass and nothing else.

    They are called ``link0``, ``joint0`` and so on, in the order of ``urdf``: names that users give may mean something
    to the reader of the text.
    """
    number = {name: index for index, name in enumerate(urdf.links)}
    lines = ['<?xml version="1.0"?>', '<robot name="arm">']
    for index, link in enumerate(urdf.links.values()):
        entries = " ".join(f'{key}="{value!r}"' for key, value in zip(_INERTIA, link.inertia, strict=True))
        inertial = f'<inertial>{_written(link.center)}<mass value="{link.mass!r}"/><inertia {entries}/></inertial>'
        lines.append(f'<link name="link{index}">{inertial if link.mass or any(link.inertia) else ""}</link>')
    for index, joint in enumerate(urdf.joints.values()):
        moving = ""
        if joint.moves:
            bounds = "" if math.isinf(joint.upper) else f'lower="{joint.lower!r}" upper="{joint.upper!r}" '
            moving = f'<axis xyz="{_spaced(joint.axis)}"/><limit {bounds}effort="0" velocity="0"/>'
        lines.append(
            f'<joint name="joint{index}" type="{joint.kind}">{_written(joint.origin)}'
            f'<parent link="link{number[joint.parent]}"/><child link="link{number[joint.child]}"/>{moving}</joint>'
        )
    return "\n".join([*lines, "</robot>"])


def _spaced(values: Triple) -> str:
    return " ".join(repr(value) for value in values)


def _written(origin: Origin) -> str:
    return f'<origin xyz="{_spaced(origin.xyz)}" rpy="{_spaced(origin.rpy)}"/>'


def _named(root: ElementTree.Element, tag: str, findings: Findings) -> Iterator[tuple[str, ElementTree.Element]]:
    """Go through the elements of one kind with their names; those without one, or with one that is taken, are noted."""
    taken: set[str] = set()
    for number, element in enumerate(root.findall(tag), start=1):
        name = element.get("name", "").strip()
        if not name:
            findings.error("it has no name", f'give it one: <{tag} name="...">', place=f"{tag} number {number}")
        elif name in taken:
            findings.error(f"there are two {tag}s of this name", "give each its own", place=f"{tag} `{name}`")
        else:
            taken.add(name)
            yield name, element


def _numbers(element: ElementTree.Element | None, key: str, default: str, place: str, findings: Findings) -> Triple:
    """Three numbers in one attribute."""
    text = default if element is None else element.get(key, default)
    try:
        return _three(text)
    except ValueError:
        findings.error(f'{key}="{text}" is not three numbers', f'write it such as {key}="0 0 1"', place=place)
        return _three(default)


def _three(text: str) -> Triple:
    first, second, third = (float(part) for part in text.split())
    if not math.isfinite(first + second + third):
        raise ValueError(text)
    return first, second, third


def _number(element: ElementTree.Element, key: str, default: str | None, place: str, findings: Findings) -> float:
    """One number in one attribute; the attribute is due where there is no default."""
    text = element.get(key, default)
    if text is None:
        findings.error(f"<{element.tag}> has no `{key}`", f'add {key}="..."', place=place)
        return 0.0
    try:
        value = float(text)
        if not math.isfinite(value):
            raise ValueError(text)
    except ValueError:
        findings.error(f'{key}="{text}" is not a number', "write a number with a decimal point", place=place)
        return 0.0
    return value


def _origin(element: ElementTree.Element | None, place: str, findings: Findings) -> Origin:
    return Origin(
        _numbers(element, "xyz", "0 0 0", place, findings), _numbers(element, "rpy", "0 0 0", place, findings)
    )


def _link(name: str, element: ElementTree.Element, findings: Findings) -> Link:
    place = f"link `{name}`"
    inertial = element.find("inertial")
    if inertial is None:
        return Link(name)
    mass, inertia = inertial.find("mass"), inertial.find("inertia")
    for tag, found in (("mass", mass), ("inertia", inertia)):
        if found is None:
            findings.error(f"its <inertial> has no <{tag}>", f"add <{tag}>, or take <inertial> out", place=place)
    center = _origin(inertial.find("origin"), place, findings)
    if mass is None or inertia is None:
        return Link(name, center=center)
    entries = tuple(_number(inertia, key, None, place, findings) for key in _INERTIA)
    return Link(name, _number(mass, "value", None, place, findings), center, entries)


def _joint(name: str, element: ElementTree.Element, findings: Findings) -> Joint | None:
    """Read a joint; None where its type or its links are not told."""
    place = f"joint `{name}`"
    kind = element.get("type", "")
    parent, child = (_end(element, end, place, findings) for end in ("parent", "child"))
    if kind not in KNOWN:
        told = f"a joint of type `{kind}` cannot be used here" if kind in _ELSEWHERE else f"`{kind}` is no joint type"
        findings.error(told, near(kind, KNOWN), place=place)
    elif kind != "fixed" and element.find("mimic") is not None:
        findings.error("the joint mimics another one", "model the arm without the coupling", place=place)
    if not (parent and child):
        return None
    origin = _origin(element.find("origin"), place, findings)
    if kind not in MOVING:
        return Joint(name, kind, parent, child, origin)
    axis = _numbers(element.find("axis"), "xyz", "1 0 0", place, findings)
    if math.hypot(*axis) < 1e-9:
        findings.error("the axis has no length", 'give it a direction, such as <axis xyz="0 0 1"/>', place=place)
    return Joint(name, kind, parent, child, origin, axis, *_limits(kind, element.find("limit"), place, findings))


def _end(joint: ElementTree.Element, end: str, place: str, findings: Findings) -> str:
    """Read the name of the link at one end of a joint; empty where it is not told."""
    element = joint.find(end)
    link = "" if element is None else element.get("link", "").strip()
    if not link:
        findings.error(f"it names no {end} link", f'add <{end} link="..."/>', place=place)
    return link


def _limits(kind: str, limit: ElementTree.Element | None, place: str, findings: Findings) -> tuple[float, float]:
    """Read the joint's range, infinite where it has none."""
    free = (-math.inf, math.inf)
    if kind == "continuous":
        return free
    if limit is None:
        findings.error(
            f"a {kind} joint needs its range",
            'add <limit lower="..." upper="..." effort="..." velocity="..."/>'
            + (", or make it continuous" if kind == "revolute" else ""),
            place=place,
        )
        return free
    lower = _number(limit, "lower", "0", place, findings)
    upper = _number(limit, "upper", "0", place, findings)
    if lower > upper:
        findings.error(f"its lower limit {lower:g} is above its upper limit {upper:g}", "exchange them", place=place)
    elif lower == upper:
        findings.warning(
            f"its range is {lower:g} to {upper:g}, taken as no limit", "write its true range in <limit>", place=place
        )
    return (lower, upper) if lower < upper else free
