"""The three invented arms as solids; run it to write their URDF files anew.

python -m tests.plant.robots
"""

from __future__ import annotations

from pathlib import Path

from tests.plant.solids import Link, box, cylinder, tube, urdf

FOLDER = Path(__file__).parents[2] / "robots"
CARBON = 1600.0  # kg/m^3, fibre tube
DOWN = (0.0, -1.0, 0.0)  # a pitch joint's axis: a positive angle lifts


def tern() -> str:
    base = Link(
        "base",
        (
            box((0.16, 0.16, 0.012), 0.83, (0.0, 0.0, 0.006)),
            cylinder(0.030, 0.032, 0.21, (0.0, 0.0, 0.036), "z"),
        ),
    )
    shoulder = Link(
        "shoulder",
        (
            box((0.05, 0.006, 0.09), 0.07, (0.0, 0.024, 0.035)),
            cylinder(0.030, 0.032, 0.21, (0.0, 0.044, 0.050), "y"),
        ),
        joint="turn",
        origin=(0.0, 0.0, 0.060),
        range_deg=(-100.0, 100.0),
        effort=0.45,
    )
    upper_arm = Link(
        "upper_arm",
        (
            tube(0.006, 0.005, 0.19, CARBON, (0.105, 0.0, 0.0)),
            cylinder(0.012, 0.020, 0.018, (0.0, 0.0, 0.0), "y"),
            cylinder(0.022, 0.026, 0.11, (0.200, 0.025, 0.0), "y"),
            box((0.03, 0.012, 0.02), 0.014, (0.190, 0.006, 0.0)),
            tube(0.005, 0.0, 0.075, CARBON, (-0.0475, 0.0, 0.0)),
            cylinder(0.022, 0.024, 0.30, (-0.085, -0.010, 0.0), "y"),
        ),
        joint="lift",
        origin=(0.0, 0.0, 0.050),
        axis=DOWN,
        range_deg=(-30.0, 110.0),
        effort=0.45,
    )
    forearm = Link(
        "forearm",
        (
            tube(0.005, 0.004, 0.18, CARBON, (0.095, 0.0, 0.0)),
            cylinder(0.010, 0.018, 0.012, (0.0, 0.0, 0.0), "y"),
            cylinder(0.013, 0.022, 0.022, (0.190, 0.0, 0.0), "x"),
        ),
        joint="reach",
        origin=(0.200, 0.0, 0.0),
        axis=DOWN,
        range_deg=(-160.0, 0.0),
        effort=0.25,
    )
    return urdf("tern", (base, shoulder, upper_arm, forearm), "stylus_tip", (0.200, 0.0, 0.0))


def plover() -> str:
    base = Link(
        "base",
        (
            box((0.12, 0.12, 0.010), 0.39, (0.0, 0.0, 0.005)),
            box((0.042, 0.042, 0.040), 0.28, (0.0, 0.0, 0.030)),
        ),
    )
    inner = Link(
        "inner_arm",
        (
            box((0.220, 0.030, 0.006), 0.107, (0.100, 0.0, 0.003)),
            box((0.035, 0.035, 0.028), 0.18, (0.200, 0.0, 0.020)),
        ),
        joint="shoulder",
        origin=(0.0, 0.0, 0.060),
        range_deg=(-120.0, 120.0),
        effort=0.40,
    )
    outer = Link(
        "outer_arm",
        (
            box((0.170, 0.024, 0.005), 0.055, (0.080, 0.0, -0.0025)),
            cylinder(0.006, 0.070, 0.020, (0.160, 0.0, -0.025), "z"),
        ),
        joint="elbow",
        origin=(0.200, 0.0, -0.004),
        range_deg=(-150.0, 150.0),
        effort=0.26,
    )
    return urdf("plover", (base, inner, outer), "pen_tip", (0.160, 0.0, -0.056))


def heron() -> str:
    base = Link(
        "base",
        (
            box((0.18, 0.18, 0.010), 0.87, (0.0, 0.0, 0.005)),
            cylinder(0.020, 0.050, 0.16, (0.0, 0.0, 0.035), "z"),
        ),
    )
    column = Link(
        "column",
        (
            box((0.04, 0.006, 0.10), 0.065, (0.0, 0.020, 0.040)),
            cylinder(0.018, 0.045, 0.12, (0.0, 0.045, 0.060), "y"),
        ),
        joint="turn",
        origin=(0.0, 0.0, 0.065),
        range_deg=(-130.0, 130.0),
        effort=0.60,
    )
    upper_arm = Link(
        "upper_arm",
        (
            tube(0.007, 0.006, 0.18, CARBON, (0.100, 0.0, 0.0)),
            cylinder(0.012, 0.020, 0.020, (0.0, 0.0, 0.0), "y"),
            cylinder(0.016, 0.040, 0.085, (0.190, 0.026, 0.0), "y"),
            cylinder(0.005, 0.085, 0.018, (-0.0525, 0.0, 0.0), "x"),
            cylinder(0.022, 0.026, 0.32, (-0.095, -0.008, 0.0), "y"),
        ),
        joint="lift",
        origin=(0.0, 0.0, 0.060),
        axis=DOWN,
        range_deg=(-40.0, 120.0),
        effort=0.60,
    )
    forearm = Link(
        "forearm",
        (
            tube(0.006, 0.005, 0.15, CARBON, (0.085, 0.0, 0.0)),
            cylinder(0.010, 0.018, 0.012, (0.0, 0.0, 0.0), "y"),
            cylinder(0.012, 0.034, 0.045, (0.160, 0.022, 0.0), "y"),
        ),
        joint="reach",
        origin=(0.190, 0.0, 0.0),
        axis=DOWN,
        range_deg=(-150.0, 0.0),
        effort=0.42,
    )
    hand = Link(
        "hand",
        (
            box((0.07, 0.016, 0.016), 0.018, (0.035, 0.0, 0.0)),
            cylinder(0.008, 0.020, 0.010, (0.075, 0.0, 0.0), "x"),
        ),
        joint="tilt",
        origin=(0.160, 0.0, 0.0),
        axis=DOWN,
        range_deg=(-100.0, 60.0),
        effort=0.18,
    )
    return urdf("heron", (base, column, upper_arm, forearm, hand), "probe_tip", (0.085, 0.0, 0.0))


ARMS = {"tern": tern, "plover": plover, "heron": heron}


def main() -> None:
    for name, arm in ARMS.items():
        folder = FOLDER / name
        folder.mkdir(parents=True, exist_ok=True)
        (folder / f"{name}.urdf").write_text(arm(), encoding="utf-8")


if __name__ == "__main__":
    main()
