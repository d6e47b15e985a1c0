"""Make the demo's path and logs with the MuJoCo plant, and keep the plant's truth; takes about half a minute.

    python -m tests.plant.make_demo

The arm that made the logs is not quite the one in robots/tern: its motors are warmer than on the bench, its encoders'
index is found again with some error at every start of the workshop's day, its friction is that of the day and differs
a little from lap to lap, and its encoders are noisy. All these are drawn from the spreads below, with a fixed seed.
"""

from __future__ import annotations

import csv
import json
import math
from dataclasses import replace
from pathlib import Path

import numpy as np
import numpy.typing as npt

from tests.plant import harbour, shipped
from tests.plant.mujoco_plant import Plant, PlantDrive, PlantLap
from tests.plant.planner import Plan, arc_lengths, plan
from tests.plant.truth import distance_to_path, rests, rms

FloatArray = npt.NDArray[np.float64]

DEMO = Path(__file__).parents[2] / "armeval" / "demo"
TRUTH = Path(__file__).parent / "demo_truth.json"

JOINTS = ("turn", "lift", "reach")
FEED, ACCELERATION = 0.060, 0.5
LAPS, LOG_EVERY, TABLE_BINS = 3, 2, 1024
RUNS = (("bare", False, 11), ("smoothed", True, 12))
DEVIATION_WINDOW = 0.025

# Remanence of the usual magnets falls by 0.11 % a kelvin, cogging by twice that; the motors are 25 K warmer than on
# the bench.
WARM = 1.0 - 2.0 * 0.0011 * 25.0
LAP_FRICTION = 0.08
INDEX_SIGMA = math.radians(0.2)  # of the motor's angle; the trial file says so too, but not the values drawn


def as_on_the_day(drive: PlantDrive, stored: FloatArray, rng: np.random.Generator) -> PlantDrive:
    """The drive as it was when the logs were made."""
    harmonics = tuple(
        (order, amplitude * WARM * (1.0 + 0.03 * rng.standard_normal()), phase + 0.03 * rng.standard_normal())
        for order, amplitude, phase in drive.harmonics
    )
    coulomb = drive.coulomb_friction * rng.uniform(0.85, 1.3)
    return replace(
        drive,
        harmonics=harmonics,
        table=stored,
        table_offset=drive.index_offset,
        index_offset=drive.index_offset + INDEX_SIGMA * rng.standard_normal(),
        coulomb_friction=coulomb,
        static_friction=coulomb * rng.uniform(1.15, 1.4),
        stribeck_speed=rng.uniform(0.03, 0.07),
        viscous_friction=drive.viscous_friction * rng.uniform(0.7, 1.5),
        encoder_jitter=0.5,
    )


def stored_table(file: Path, torque_constant: float) -> FloatArray:
    """What the firmware stores of a map, motor side: mean of both directions, linear between the angles, even bins."""
    with file.open(encoding="utf-8") as lines:
        rows = list(csv.DictReader(lines))
    factor = {
        "cog_torque [mN*m]": 1e-3,
        "hold_torque [mN*m]": -1e-3,
        "hold_current [A]": -torque_constant,
    }
    (column,) = set(rows[0]) & set(factor)
    angle = np.radians([float(row["angle [deg]"]) for row in rows])
    torque = factor[column] * np.array([float(row[column]) for row in rows])
    direction = np.array([float(row["direction"]) for row in rows])
    bins = 2.0 * math.pi * np.arange(TABLE_BINS) / TABLE_BINS
    ways = []
    for way in (1.0, -1.0):
        places, number = np.unique(np.round(angle[direction == way] % (2.0 * math.pi), 9), return_inverse=True)
        means = np.bincount(number, torque[direction == way]) / np.bincount(number)
        ways.append(np.interp(bins, places, means, period=2.0 * math.pi))
    both = (ways[0] + ways[1]) / 2.0
    return both - both.mean()


def demo_drives() -> list[PlantDrive]:
    """The drives on the day."""
    rng = np.random.default_rng(1300)
    drives = []
    for joint, drive in shipped.drives("tern").items():
        keys = shipped.table("tern")["joint"][joint]
        named = keys["cog_map"]
        file = shipped.FOLDER / "tern" / (named["file"] if isinstance(named, dict) else named)
        drives.append(as_on_the_day(drive, stored_table(file, shipped.si(keys["torque_constant"])), rng))
    return drives


def demo_plant(drives: list[PlantDrive]) -> Plant:
    return Plant(shipped.urdf_text("tern"), "stylus_tip", drives, shipped.servo("tern"))


def in_this_lap(drive: PlantDrive, rng: np.random.Generator) -> PlantDrive:
    """The drive with a lap's friction: bearings and grease warm up, and dust moves about."""
    factor = 1.0 + LAP_FRICTION * rng.standard_normal()
    return replace(
        drive, coulomb_friction=factor * drive.coulomb_friction, static_friction=factor * drive.static_friction
    )


def demo_plan() -> Plan:
    return plan(
        demo_plant(demo_drives()),
        harbour.tip_points() * 1e-3,
        np.array(shipped.rest_angles("tern")),
        feed=FEED,
        acceleration=ACCELERATION,
    )


def run_laps(planned: Plan, compensated: bool, seed: int, count: int = LAPS) -> list[PlantLap]:
    """The laps of one run, one after the other on one clock."""
    rng = np.random.default_rng(seed)
    laps: list[PlantLap] = []
    start, clock = planned.angle[0], 0.0
    for _ in range(count):
        plant = demo_plant([in_this_lap(drive, rng) for drive in demo_drives()])
        (lap,) = plant.run(
            planned.angle,
            planned.speed,
            planned.acceleration,
            compensated=compensated,
            start=start,
            seed=int(rng.integers(2**31)),
        )
        laps.append(replace(lap, time=clock + lap.time))
        start, clock = lap.true_angle[-1], laps[-1].time[-1] + plant.servo.period
    return laps


def write_path(points: FloatArray) -> None:
    rows = (",".join(f"{value:.3f}" for value in point) for point in points)
    (DEMO / "harbour.csv").write_text("\n".join(["x [mm],y [mm],z [mm]", *rows]) + "\n", encoding="utf-8")


def write_log(file: Path, lap: PlantLap, target: FloatArray) -> None:
    """Whole numbers only, packed: milliseconds, counts, microradians, micronewton metres."""
    import pyarrow as pa
    import pyarrow.parquet as pq

    columns = {"time [ms]": 1e3 * lap.time[::LOG_EVERY]}
    for name, values in (
        ("angle [count]", lap.counts),
        ("target [urad]", 1e6 * target),
        ("torque [uN*m]", 1e6 * lap.torque),
    ):
        columns |= {f"{joint}.{name}": values[::LOG_EVERY, j] for j, joint in enumerate(JOINTS)}
    table = pa.table({name: pa.array(np.rint(values).astype(np.int32)) for name, values in columns.items()})
    file.parent.mkdir(parents=True, exist_ok=True)
    torques = [name for name in columns if "torque" in name]
    pq.write_table(
        table,
        file,
        compression="zstd",
        compression_level=19,
        use_dictionary=torques,
        column_encoding={name: "DELTA_BINARY_PACKED" for name in columns if name not in torques},
    )


def lap_truth(plant: Plant, planned: Plan, points: FloatArray, lap: PlantLap) -> dict:
    rows = slice(None, None, LOG_EVERY)
    tip = plant.tip(lap.true_angle[rows])
    found = [
        {
            "joint": JOINTS[rest.joint],
            "start_s": round(float(lap.time[rest.first]), 4),
            "end_s": round(float(lap.time[rest.last]), 4),
            "start_m": round(float(planned.arc[rest.first]), 6),
            "end_m": round(float(planned.arc[rest.last]), 6),
            "angle_rad": round(rest.angle, 6),
            "target_moved_rad": round(float(np.ptp(planned.angle[rest.first : rest.last + 1, rest.joint])), 6),
        }
        for rest in rests(lap.true_angle, lap.true_speed, planned.speed, plant.servo.period)
    ]
    return {
        "tracking_rms_m": rms(np.linalg.norm(tip - planned.tip[rows], axis=1)),
        "deviation_rms_m": rms(distance_to_path(tip, planned.arc[rows], points, DEVIATION_WINDOW)),
        "rests": found,
    }


def main() -> None:
    (DEMO / "logs").mkdir(parents=True, exist_ok=True)
    millimetres = harbour.tip_points()
    points = millimetres * 1e-3
    write_path(millimetres)
    plant = demo_plant(demo_drives())
    planned = demo_plan()
    truth = {
        "path_m": float(arc_lengths(points)[-1]),
        "lap_s": float(planned.time[-1]),
        "deviation_window_m": DEVIATION_WINDOW,
        "runs": {},
    }
    for name, compensated, seed in RUNS:
        laps = run_laps(planned, compensated, seed)
        told = [lap_truth(plant, planned, points, lap) for lap in laps]
        for number, lap in enumerate(laps, start=1):
            write_log(DEMO / "logs" / f"{name}-{number}.parquet", lap, planned.angle)
        truth["runs"][name] = {
            "tracking_rms_m": rms(np.array([lap["tracking_rms_m"] for lap in told])),
            "deviation_rms_m": rms(np.array([lap["deviation_rms_m"] for lap in told])),
            "laps": told,
        }
    TRUTH.write_text(json.dumps(truth, indent=1) + "\n", encoding="utf-8")


if __name__ == "__main__":
    main()
