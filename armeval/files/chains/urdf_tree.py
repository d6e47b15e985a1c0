"""Whether the links and joints of a URDF make one serial chain with sound masses, from its base to the tip."""

from __future__ import annotations

from collections.abc import Iterable

import numpy as np

from armeval.errors import Findings, near
from armeval.files.chains.urdf_text import Joint, Link, Urdf

_ROUNDING = 1e-3  # exporters write inertias with few digits: a share of the largest moment


def moving_chain(urdf: Urdf, tip: str | None, findings: Findings) -> tuple[Joint, ...]:
    """Find the joints that move, from the base to the tip; everything that is no serial chain is noted.

    Parameters
    ----------
    urdf
        The links and joints.
    tip
        Name of the link that ends the chain; None: the last link that a joint moves.
    findings
        Faults are noted here; if there are errors, what is returned means nothing.
    """
    children = _joined(urdf, findings)
    root = _root(urdf, findings)
    if findings.has_errors or root is None:
        return ()
    moving = _serial([joint for joint in urdf.joints.values() if joint.moves], children, root, findings)
    if not any(joint.moves for joint in urdf.joints.values()):
        findings.error("no joint moves", "give the arm at least one revolute, continuous or prismatic joint")
    if tip is not None:
        _reaches_tip(urdf, tip, moving, findings)
    for link in urdf.links.values():
        _sound_inertia(link, findings)
    for joint in moving:
        body = [urdf.links[name] for name in _rigid_with(joint.child, children)]
        if sum(link.mass for link in body) <= 0.0:
            names = " and ".join(f"`{link.name}`" for link in body)
            findings.error(
                "what it moves has no mass", f"give link {names} an <inertial> with mass", place=f"joint `{joint.name}`"
            )
    return moving


def _joined(urdf: Urdf, findings: Findings) -> dict[str, list[Joint]]:
    """List the joints that leave each link; joints to links that are not there, and links hung up twice, are noted."""
    children: dict[str, list[Joint]] = {name: [] for name in urdf.links}
    carried: dict[str, str] = {}
    for joint in urdf.joints.values():
        for end, link in (("parent", joint.parent), ("child", joint.child)):
            if link not in urdf.links:
                findings.error(
                    f"its {end} link `{link}` is not defined", near(link, urdf.links), place=f"joint `{joint.name}`"
                )
        if joint.child in carried:
            findings.error(
                f"it hangs on two joints, `{carried[joint.child]}` and `{joint.name}`",
                "keep one of them: armeval takes chains without loops",
                place=f"link `{joint.child}`",
            )
        carried[joint.child] = joint.name
        if joint.parent in children:
            children[joint.parent].append(joint)
    return children


def _root(urdf: Urdf, findings: Findings) -> str | None:
    """Find the link that the others hang on; several of them, and loops, are noted."""
    parent_of = {joint.child: joint.parent for joint in urdf.joints.values()}
    roots = [name for name in urdf.links if name not in parent_of]
    if len(roots) > 1:
        named = " and ".join(f"`{name}`" for name in roots)
        findings.error(f"the links {named} hang on nothing", "join all but one, the base, to the others by joints")
    looped = _loop(parent_of)
    if looped:
        findings.error(
            f"the links {' and '.join(f'`{name}`' for name in looped)} hang on each other in a loop", "open the loop"
        )
    return roots[0] if roots else None


def _loop(parent_of: dict[str, str]) -> list[str]:
    """Find the links of one loop, if there is one."""
    for start in parent_of:
        walked: list[str] = []
        link = start
        while link in parent_of and link not in walked:
            walked.append(link)
            link = parent_of[link]
        if link in walked:
            return walked[walked.index(link) :]
    return []


def _rigid_with(link: str, children: dict[str, list[Joint]]) -> list[str]:
    """List the link and all that hang on it without a joint that moves in between."""
    found = [link]
    for name in found:
        found.extend(joint.child for joint in children[name] if not joint.moves)
    return found


def _serial(
    all_moving: Iterable[Joint], children: dict[str, list[Joint]], root: str, findings: Findings
) -> tuple[Joint, ...]:
    """List the moving joints in order, up to the first fork, which is noted."""
    chain: list[Joint] = []
    link = root
    while True:
        onward = [joint for name in _rigid_with(link, children) for joint in children[name] if joint.moves]
        if len(onward) > 1:
            named = " and ".join(f"`{joint.name}`" for joint in onward)
            findings.error(
                f"the arm forks: the joints {named} stand on the same body",
                "armeval takes one serial chain; make all but one of these branches fixed",
                place=f"link `{link}`",
            )
            return tuple(all_moving)
        if not onward:
            return tuple(chain)
        chain.append(onward[0])
        link = onward[0].child


def _reaches_tip(urdf: Urdf, tip: str, moving: tuple[Joint, ...], findings: Findings) -> None:
    """Note a tip that is not there, or that some joint does not move."""
    if tip not in urdf.links:
        findings.error(f"there is no link `{tip}` to be the tip", near(tip, urdf.links), place=f"tip `{tip}`")
        return
    above = {joint.child: joint for joint in urdf.joints.values()}
    passed: set[str] = set()
    link = tip
    while link in above:
        passed.add(above[link].name)
        link = above[link].parent
    beyond = [joint.name for joint in moving if joint.name not in passed]
    if beyond and not findings.has_errors:
        named = " and ".join(f"`{name}`" for name in beyond)
        findings.error(
            f"it is not moved by the {'joints' if len(beyond) > 1 else 'joint'} {named}",
            "choose a tip beyond the last joint, or make what lies beyond it fixed",
            place=f"tip `{tip}`",
        )


def _sound_inertia(link: Link, findings: Findings) -> None:
    """Note a mass below zero and moments of inertia that no body has."""
    place = f"link `{link.name}`"
    if link.mass < 0.0:
        findings.error(f"its mass is {link.mass:g} kg", "give a mass of 0 or more", place=place)
    xx, xy, xz, yy, yz, zz = link.inertia
    moments = np.linalg.eigvalsh(np.array([[xx, xy, xz], [xy, yy, yz], [xz, yz, zz]]))
    told = ", ".join(f"{moment:.3g}" for moment in moments)
    if moments[0] < -_ROUNDING * max(abs(moments[0]), abs(moments[2])):
        findings.error(
            f"its principal moments of inertia are {told} kg m^2: one is below zero",
            "check the signs and the frame of <inertia>",
            place=place,
        )
    elif moments[2] - moments[1] - moments[0] > _ROUNDING * moments[2]:
        findings.warning(
            f"its principal moments of inertia are {told} kg m^2: no body has one larger than the other two together",
            "check <inertia>",
            place=place,
        )
