"""The invented harbour's outline: where land meets water, as the stylus leads a hand along it.

Drawn as seen from the arm's base, in mm to the right and forward of it: the south quay with its piers, the east quay
with a slipway, the east breakwater, the entrance, the west mole, and the west quay with the lock back to the start.
"""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

FloatArray = npt.NDArray[np.float64]

HEIGHT = 30.0  # of the map's surface over the base plate

SOUTH_QUAY = [
    (-118, 182), (-96, 182), (-96, 219), (-86, 219), (-86, 182), (-64, 182), (-64, 232), (-52, 232), (-52, 182),
    (-28, 182), (-28, 219), (-18, 219), (-18, 182), (2, 182), (2, 172), (30, 172), (30, 182), (50, 182), (50, 225),
    (82, 225), (82, 213), (62, 213), (62, 182), (100, 182),
]  # fmt: skip
EAST_QUAY = [
    (118, 200),
    (118, 224),
    (102, 224),
    (102, 236),
    (118, 236),
    (118, 254),
    (96, 262),
    (100, 274),
    (122, 266),
    (122, 280),
]
ENTRANCE = [(32, 328), (32, 318), (24, 318), (24, 328), (-12, 328), (-12, 316), (-21, 316), (-21, 326)]
WEST_QUAY = [
    (-104, 288), (-120, 288), (-120, 270), (-92, 270), (-92, 258), (-120, 258), (-120, 242), (-106, 242), (-106, 236),
    (-134, 236), (-134, 214), (-118, 214), (-118, 182),
]  # fmt: skip


def arc(start: tuple[float, float], end: tuple[float, float], sagitta: float, turn: float) -> FloatArray:
    """Points strictly between the ends of an arc that bulges to the left by ``sagitta``; a chord spans ``turn``."""
    a, b = np.array(start, dtype=float), np.array(end, dtype=float)
    half = np.linalg.norm(b - a) / 2.0
    radius = (half**2 + sagitta**2) / (2.0 * sagitta)
    along, left = (b - a) / (2.0 * half), np.array([-(b - a)[1], (b - a)[0]]) / (2.0 * half)
    centre = (a + b) / 2.0 + (sagitta - radius) * left
    sweep = 2.0 * np.arcsin(half / radius)
    angle = np.linspace(-sweep / 2.0, sweep / 2.0, int(np.ceil(sweep / turn)) + 1)[1:-1]
    return centre + radius * (np.outer(np.sin(angle), along) + np.outer(np.cos(angle), left))


def outline() -> FloatArray:
    """The closed outline: shape (k, 2), mm to the right and forward of the base."""
    turn = np.radians(2.5)
    breakwater = arc(ENTRANCE[0], EAST_QUAY[-1], 14.0, turn)[::-1]
    mole = arc(WEST_QUAY[0], ENTRANCE[-1], 12.0, turn)[::-1]
    parts = [SOUTH_QUAY, EAST_QUAY, breakwater, ENTRANCE, mole, WEST_QUAY]
    return np.concatenate([np.array(part, dtype=float) for part in parts])


def tip_points() -> FloatArray:
    """The outline as tip points in the base frame, shape (k, 3) [mm]: x forward, y to the left, z up."""
    right, forward = outline().T
    return np.round(np.column_stack([forward, -right, np.full(len(right), HEIGHT)]), 3)
