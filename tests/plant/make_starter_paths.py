"""Write each arm's starter path: a rounded figure some 0.3 m long in comfortable reach; run it to write them anew.

python -m tests.plant.make_starter_paths
"""

from __future__ import annotations

from pathlib import Path

import numpy as np
import numpy.typing as npt

FOLDER = Path(__file__).parents[2] / "robots"
FloatArray = npt.NDArray[np.float64]


def rounded_box(length: float, width: float, radius: float, chords: int) -> FloatArray:
    """Points of a rectangle with round corners about the origin, closed, from the middle of a short side; (k, 2)."""
    sweep = np.linspace(0.0, np.pi / 2, chords + 1)
    points = [np.array([[length / 2, 0.0]])]
    for quarter in range(4):
        side_x, side_y = (1, -1, -1, 1)[quarter], (1, 1, -1, -1)[quarter]
        centre = np.array([side_x * (length / 2 - radius), side_y * (width / 2 - radius)])
        angle = sweep + quarter * np.pi / 2
        points.append(centre + radius * np.column_stack([np.cos(angle), np.sin(angle)]))
    return np.concatenate([*points, points[0]])


def flat(points: FloatArray, centre: tuple[float, float, float]) -> FloatArray:
    return np.column_stack([points, np.zeros(len(points))]) + centre


def tilted_ring(radius: float, chords: int, tilt: float, centre: tuple[float, float, float]) -> FloatArray:
    """A circle turned about y by ``tilt`` [rad], closed; (k, 3)."""
    angle = np.linspace(0.0, 2 * np.pi, chords + 1)
    x, y = radius * np.cos(angle), radius * np.sin(angle)
    return np.column_stack([x * np.cos(tilt), y, x * np.sin(tilt)]) + centre


PATHS = {
    "tern": lambda: flat(rounded_box(0.06, 0.10, 0.015, 20), (0.25, 0.0, 0.03)),
    "plover": lambda: flat(rounded_box(0.06, 0.10, 0.015, 20), (0.25, 0.02, 0.0)),
    "heron": lambda: tilted_ring(0.048, 90, np.radians(20.0), (0.27, 0.0, 0.12)),
}


def text(name: str) -> str:
    rows = (",".join(f"{1e3 * value + 0.0:.3f}" for value in point) for point in np.round(PATHS[name](), 7))
    return "\n".join(["x [mm],y [mm],z [mm]", *rows]) + "\n"


def main() -> None:
    for name in PATHS:
        (FOLDER / name / "starter_path.csv").write_text(text(name), encoding="utf-8")


if __name__ == "__main__":
    main()
