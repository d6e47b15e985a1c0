"""Whether an arm can follow its path: stretches out of reach, beyond a joint's range or near a singular pose."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, replace

import numpy as np

from armeval.arrays import BoolArray, FloatArray
from armeval.errors import Findings
from armeval.kernels.chain import tip_jacobians
from armeval.kernels.inverse import first_pose, poses_along, reach_of
from armeval.model.chain import Chain
from armeval.units import angle_text, length_text, significant

REACH_TOLERANCE = 1e-5
"""A path counts as reached when the tip comes this near to it [m]: more than the rounding of a path file in mm."""

LEAST_LEVER = 0.01
"""A pose is near-singular where a joint must turn so fast that the tip moves less than this share of the arm's reach
for each radian: the arm then moves the tip with almost no lever, and small torque errors become large tip errors."""

_JOIN = 2e-3
"""Bad stretches nearer to each other than this along the path [m] are told as one."""


@dataclass(frozen=True)
class RowPlaces:
    """Tells a person which points of the path file a stretch of arc length lies between.

    Attributes
    ----------
    arc
        Shape (r,) [m]. Arc length of each point of the file, in its order.
    """

    arc: FloatArray

    def text(self, start: float, end: float) -> str:
        """Name a stretch: ``points 3 to 5, s = 120 mm to 133 mm``."""
        first = max(int(np.searchsorted(self.arc, start + 1e-9, side="right")), 1)
        last = min(int(np.searchsorted(self.arc, end - 1e-9, side="left")) + 1, len(self.arc))
        points = f"points {first} to {last}" if last > first else f"point {first}"
        if end - start < 1e-6:
            return f"{points}, s = {length_text(start, 4)}"
        return f"{points}, s = {length_text(start, 4)} to {length_text(end, 4)}"


def stretches(bad: BoolArray, arc: FloatArray) -> Iterator[slice]:
    """Give the runs of samples that are bad; those nearer than 2 mm along the path count as one."""
    index = np.flatnonzero(bad)
    if len(index) == 0:
        return
    breaks = np.flatnonzero((np.diff(index) > 1) & (arc[index[1:]] - arc[index[:-1]] > _JOIN))
    for first, last in zip(np.r_[0, breaks + 1], np.r_[breaks, len(index) - 1], strict=True):
        yield slice(int(index[first]), int(index[last]) + 1)


def poses(chain: Chain, tip: FloatArray, rest: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Inverse kinematics along a path: poses (k, n) within the joint ranges, and what is left of the way to it (k,)."""
    arrays = chain.arrays
    start = first_pose(arrays, tip[0], rest, REACH_TOLERANCE)
    return poses_along(arrays, tip, rest, start)


def find_unreached(
    chain: Chain, tip: FloatArray, q: FloatArray, left: FloatArray, rest: FloatArray, arc: FloatArray, rows: RowPlaces
) -> Findings:
    """Tell each stretch of a path that :func:`poses` did not reach, and whether a joint's range is the reason.

    Parameters
    ----------
    chain
        The arm's chain, n joints.
    tip, arc
        Shape (k, 3) and (k,) [m]. The path's samples and their arc lengths.
    q, left
        What :func:`poses` gave.
    rest
        Shape (n,). The rest angles.
    rows
        Names the places in the file.
    """
    findings = Findings()
    bad = left > REACH_TOLERANCE
    if not bad.any():
        return findings
    free = replace(chain, lower=np.full(chain.count, -np.inf), upper=np.full(chain.count, np.inf)).arrays
    free_q, free_left = poses_along(free, tip, rest, first_pose(free, tip[0], q[0], REACH_TOLERANCE))
    beyond_reach = bad & (free_left > REACH_TOLERANCE)
    for part in stretches(beyond_reach, arc):
        findings.error(
            f"the path is out of reach: the tip stays up to {length_text(float(free_left[part].max()))} short of it",
            "move the path, or move or turn the arm's base in the URDF",
            place=rows.text(arc[part.start], arc[part.stop - 1]),
        )
    over = np.maximum(free_q - chain.upper, chain.lower - free_q)
    for part in stretches(bad & ~beyond_reach, arc):
        place = rows.text(arc[part.start], arc[part.stop - 1])
        held = bad[part] & ~beyond_reach[part]
        worst = np.where(held[:, None], over[part], -np.inf).max(axis=0)
        for i in np.flatnonzero(worst > 0.0):
            text = length_text if chain.prismatic[i] else angle_text
            findings.error(
                f"joint `{chain.joints[i]}` would have to go up to {text(float(worst[i]))} beyond its range "
                f"({text(float(chain.lower[i]))} to {text(float(chain.upper[i]))})",
                "move the path or the base, give a `rest_angle` on the other side of the arm, or widen the range",
                place=place,
            )
        if not (worst > 0.0).any():
            findings.error(
                f"the arm cannot follow the path there within its joint ranges: "
                f"the tip stays up to {length_text(float(left[part].max()))} short of it",
                "give `rest_angle`s near the pose that you want there, or widen the ranges",
                place=place,
            )
    return findings


def find_beyond_range(chain: Chain, q: FloatArray) -> Findings:
    """Tell each point of a joint path, shape (r, n), and joint that lies beyond the joint's range."""
    findings = Findings()
    over = np.maximum(q - chain.upper, chain.lower - q)
    for i in range(chain.count):
        for part in stretches(over[:, i] > 0.0, np.zeros(len(q))):
            text = length_text if chain.prismatic[i] else angle_text
            points = f"points {part.start + 1} to {part.stop}" if part.stop - part.start > 1 else f"point {part.stop}"
            findings.error(
                f"joint `{chain.joints[i]}` goes up to {text(float(over[part, i].max()))} beyond its range "
                f"({text(float(chain.lower[i]))} to {text(float(chain.upper[i]))})",
                "keep the targets within the range that the URDF gives, or widen it there",
                place=points,
            )
    return findings


def find_singular(
    chain: Chain, q: FloatArray, reached: BoolArray, arc: FloatArray, period: float, rows: RowPlaces
) -> Findings:
    """Tell each stretch where a joint has almost no lever on the tip (see :data:`LEAST_LEVER`).

    Parameters
    ----------
    chain
        The arm's chain, n joints.
    q, reached, arc
        Shape (k, n), (k,), (k,) [m]. Poses along the path, whether they reach it, arc lengths; one a servo period.
    period
        Servo period [s].
    rows
        Names the places in the file.
    """
    findings = Findings()
    reach = reach_of(chain.arrays)
    step = np.diff(arc)
    moving = (step > 1e-9) & reached[1:] & reached[:-1]
    rate = np.abs(np.diff(q, axis=0)) / np.where(moving, step, np.inf)[:, None]
    share = rate * np.where(chain.prismatic, 1.0, reach)
    near_unreached = np.zeros(len(step), dtype=np.bool_)
    for part in stretches(~reached, arc):
        near_unreached |= (arc[1:] > arc[part.start] - _JOIN) & (arc[:-1] < arc[part.stop - 1] + _JOIN)
    for part in stretches((share > 1.0 / LEAST_LEVER).any(axis=1) & ~near_unreached, arc[:-1]):
        at, joint = np.unravel_index(int(np.argmax(share[part])), share[part].shape)
        k = part.start + int(at)
        singular = np.linalg.svd(tip_jacobians(chain.arrays, np.ascontiguousarray(q[k : k + 1]))[0], compute_uv=False)
        effective = singular[singular > 1e-9 * singular[0]]
        place = rows.text(float(arc[part.start]), float(arc[part.stop]))
        if effective[-1] > LEAST_LEVER * reach:
            text = length_text if chain.prismatic[joint] else angle_text
            findings.error(
                f"the pose nearest to the rest angles changes at once: joint `{chain.joints[joint]}` would have to "
                f"jump by {text(float(rate[k, joint] * step[k]))}",
                "give `rest_angle`s nearer to the poses that you want along the path",
                place=place,
            )
            continue
        speed = float(rate[k, joint] * step[k] / period)
        unit = "m/s" if chain.prismatic[joint] else "rad/s"
        findings.error(
            f"the arm is near a singular pose: joint `{chain.joints[joint]}` would have to move at "
            f"{significant(speed)} {unit} to move the tip at {length_text(float(step[k] / period))}/s "
            f"(smallest singular value of the Jacobian {length_text(float(effective[-1]))}/rad)",
            "move the path away from where the arm is stretched, folded or turns about the tip",
            place=place,
        )
    return findings
