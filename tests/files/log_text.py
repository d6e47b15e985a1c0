"""A sound joint log of the `gantry` arm as text, for tests to break."""

from __future__ import annotations

import numpy as np

from armeval.arrays import FloatArray

HEADER = "time [s],turn.angle [rad],lift.angle [deg],reach.angle [mm]"


def motion(rows: int) -> tuple[FloatArray, FloatArray]:
    """Times, shape (rows,) [s], and angles, shape (rows, 3) [rad, rad, m], of a motion that nobody made."""
    time = 0.01 * np.arange(rows)
    return time, np.stack([np.sin(time), 0.5 * np.cos(2.0 * time), 0.1 + 0.05 * np.sin(3.0 * time)], axis=1)


def rows_of(*columns: FloatArray, delimiter: str = ",") -> list[str]:
    """Write columns as lines of text at full precision."""
    return [delimiter.join(repr(float(number)) for number in row) for row in zip(*columns, strict=True)]


def log_lines(rows: int) -> list[str]:
    """Give the lines of a sound log, the header first."""
    time, angle = motion(rows)
    return [HEADER, *rows_of(time, angle[:, 0], np.degrees(angle[:, 1]), 1e3 * angle[:, 2])]


def log_text(rows: int = 60) -> str:
    """Give a sound log as text."""
    return "\n".join(log_lines(rows)) + "\n"
