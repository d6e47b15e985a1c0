"""Make the log of the demo in which a hand leads the arm, and keep the force that MuJoCo measured on the hand.

    python -m tests.plant.make_feel_demo

The arm is that of the other demo, on the same day (its cogging, index and friction differ from its files as there). Its
drives only carry the weight. The invented hand goes round the outline once, cuts corners and trembles.
"""

from __future__ import annotations

import json
import math
from dataclasses import replace
from pathlib import Path

import numpy as np
import numpy.typing as npt
from scipy.ndimage import gaussian_filter1d

from tests.plant import harbour, led_plant, shipped
from tests.plant.make_demo import INDEX_SIGMA, JOINTS, demo_drives, demo_plant
from tests.plant.planner import arc_lengths, inverse_kinematics
from tests.plant.plant_drive import PlantDrive

FloatArray = npt.NDArray[np.float64]

DEMO = Path(__file__).parents[2] / "armeval" / "demo_feel"
TRUTH = Path(__file__).parent / "feel_demo_truth.json"

PERIOD = 1e-3
SPEED = 0.08
CORNERS = 0.12  # s over which the hand rounds a corner, one sigma of a bell
TREMBLE = 0.8e-3  # m, one sigma in each direction, slower than about 2 Hz
LOG_EVERY = 2
WITHIN = 0.02  # s over which the measured force is averaged for the truth


def hand_path(seed: int = 77) -> FloatArray:
    """Tip points (k, 3) [m], one a millisecond."""
    rng = np.random.default_rng(seed)
    outline = harbour.tip_points() * 1e-3
    along = arc_lengths(outline)
    count = round(along[-1] / SPEED / PERIOD)

    def slow(sigma_s: float) -> FloatArray:
        made = gaussian_filter1d(rng.standard_normal(count), sigma_s / PERIOD, mode="nearest")
        return made / made.std()

    pace = np.maximum(1.0 + 0.25 * slow(0.6), 0.3)
    pace *= np.minimum(1.0, np.minimum(np.arange(count), np.arange(count)[::-1]) / 400.0)  # starts and ends at rest
    arc = np.cumsum(pace) / pace.sum() * along[-1]
    points = np.column_stack([np.interp(arc, along, column) for column in outline.T])
    rounded = gaussian_filter1d(points, CORNERS / PERIOD, axis=0, mode="nearest")
    still = np.minimum(1.0, np.minimum(np.arange(count), np.arange(count)[::-1]) / 800.0)
    return rounded + TREMBLE * still[:, None] * np.column_stack([slow(0.1) for _ in range(3)])


def led(drives: list[PlantDrive], points: FloatArray, *, compensated: bool) -> led_plant.LedMotion:
    start = inverse_kinematics(demo_plant(drives), points[:1], np.array(shipped.rest_angles("tern")))[0]
    return led_plant.lead(
        shipped.urdf_text("tern"),
        "stylus_tip",
        drives,
        points,
        PERIOD,
        start,
        np.zeros(3),
        carries_weight=True,
        compensated=compensated,
    )


def write_log(file: Path, motion: led_plant.LedMotion, drives: list[PlantDrive], seed: int = 78) -> None:
    """Whole numbers only: milliseconds and encoder counts."""
    import pyarrow as pa
    import pyarrow.parquet as pq

    rng = np.random.default_rng(seed)
    counts = motion.angle / [drive.resolution for drive in drives]
    counts += np.array([drive.encoder_jitter for drive in drives]) * rng.standard_normal(counts.shape)
    columns = {"time [ms]": np.arange(len(counts)) * 1e3 * PERIOD}
    columns |= {f"{joint}.angle [count]": counts[:, j] for j, joint in enumerate(JOINTS)}
    table = pa.table(
        {name: pa.array(np.rint(values[::LOG_EVERY]).astype(np.int32)) for name, values in columns.items()}
    )
    file.parent.mkdir(parents=True, exist_ok=True)
    pq.write_table(
        table,
        file,
        compression="zstd",
        compression_level=19,
        use_dictionary=False,
        column_encoding=dict.fromkeys(columns, "DELTA_BINARY_PACKED"),
    )


def force_truth(motion: led_plant.LedMotion, without: led_plant.LedMotion) -> dict[str, float]:
    """RMS forces over time [N]: all, and what cogging adds: the difference from an arm without."""
    window = np.full(round(WITHIN / PERIOD), PERIOD / WITHIN)

    def rms(force: FloatArray) -> float:
        smooth = np.column_stack([np.convolve(column, window, "same") for column in force.T])[200:-200]
        return float(np.sqrt(np.mean((smooth**2).sum(axis=1))))

    return {"total_rms_N": rms(motion.force), "cogging_rms_N": rms(motion.force - without.force)}


def main() -> None:
    drives = demo_drives()
    points = hand_path()
    smooth = [replace(drive, harmonics=(), table=None) for drive in drives]
    without = led(smooth, points, compensated=False)
    bare, compensated = (led(drives, points, compensated=acts) for acts in (False, True))
    write_log(DEMO / "logs" / "led-1.parquet", bare, drives)
    truth = {
        "duration_s": len(points) * PERIOD,
        "length_m": float(np.linalg.norm(np.diff(points, axis=0), axis=1).sum()),
        "index_sigma_deg": math.degrees(INDEX_SIGMA),
        "bare": force_truth(bare, without),
        "compensated": force_truth(compensated, without),
    }
    TRUTH.write_text(json.dumps(truth, indent=1) + "\n", encoding="utf-8")


if __name__ == "__main__":
    main()
