"""Write the cog maps of the three invented arms, each in another legal form; run it to write them anew.

    python -m tests.plant.make_maps

A drive that holds the rotor while it creeps in direction d applies -cogging + d * friction; a torque sensor on the
rotor reads cogging - d * friction; a rotor that coasts turns with acceleration (cogging - friction) / inertia.
"""

from __future__ import annotations

from pathlib import Path

import numpy as np
import numpy.typing as npt

from tests.plant.motors import HERON, PLOVER, TERN, BenchMotor

FOLDER = Path(__file__).parents[2] / "robots"
FloatArray = npt.NDArray[np.float64]


def cogging(motor: BenchMotor, angle: FloatArray) -> FloatArray:
    return sum((a * np.sin(n * angle + phase) for n, a, phase in motor.harmonics), np.zeros_like(angle))


def table(header: str, formats: tuple[str, ...], *columns: FloatArray) -> str:
    written = [[form.format(value) for value in column] for form, column in zip(formats, columns, strict=True)]
    return "\n".join([header, *(",".join(row) for row in zip(*written, strict=True))]) + "\n"


def there_and_back(degrees: FloatArray) -> tuple[FloatArray, FloatArray]:
    """The same angles once rising and once falling, with the direction of each."""
    return np.concatenate([degrees, degrees[::-1]]), np.repeat([1.0, -1.0], len(degrees))


def tern_turn(rng: np.random.Generator) -> str:
    """Holding torque, both directions, even steps."""
    motor = TERN["turn"]
    degrees, direction = there_and_back(np.arange(900) * 0.4)
    hold = -cogging(motor, np.radians(degrees)) + direction * motor.friction + motor.noise * rng.standard_normal(1800)
    return table(
        "angle [deg],direction,hold_torque [mN*m]", ("{:.1f}", "{:+.0f}", "{:.2f}"), degrees, direction, 1e3 * hold
    )


def tern_lift(rng: np.random.Generator) -> str:
    """Torque sensor, both directions, uneven steps."""
    motor = TERN["lift"]
    rising = np.sort((np.arange(900) * 0.4 + rng.uniform(-0.12, 0.12, 900)) % 360.0)
    falling = np.sort((np.arange(900) * 0.4 + rng.uniform(-0.12, 0.12, 900)) % 360.0)[::-1]
    degrees, direction = np.concatenate([rising, falling]), np.repeat([1.0, -1.0], 900)
    torque = cogging(motor, np.radians(degrees)) - direction * motor.friction + motor.noise * rng.standard_normal(1800)
    return table(
        "angle [deg],cog_torque [mN*m],direction", ("{:.3f}", "{:.2f}", "{:+.0f}"), degrees, 1e3 * torque, direction
    )


def tern_reach(rng: np.random.Generator) -> str:
    """Holding current, both directions, each angle visited in two turns."""
    motor = TERN["reach"]
    degrees, direction = there_and_back(np.concatenate([np.arange(720) * 0.5, 360.0 + np.arange(720) * 0.5]))
    hold = -cogging(motor, np.radians(degrees)) + direction * motor.friction + motor.noise * rng.standard_normal(2880)
    return table(
        "angle [deg],hold_current [A],direction",
        ("{:.1f}", "{:.5f}", "{:+.0f}"),
        degrees,
        hold / motor.torque_constant,
        direction,
    )


def plover_shoulder(rng: np.random.Generator) -> str:
    """Holding current in milliampere, both directions, two turns whose angles interleave."""
    motor = PLOVER["shoulder"]
    degrees, direction = there_and_back(np.arange(1800) * 0.4 + np.repeat([0.0, 0.2], 900))
    hold = -cogging(motor, np.radians(degrees)) + direction * motor.friction + motor.noise * rng.standard_normal(3600)
    return table(
        "direction,angle [deg],hold_current [mA]",
        ("{:+.0f}", "{:.1f}", "{:.2f}"),
        direction,
        degrees,
        1e3 * hold / motor.torque_constant,
    )


def plover_elbow(rng: np.random.Generator) -> str:
    """Holding voltage, one direction, angles in turns and in shuffled order."""
    motor = PLOVER["elbow"]
    turns = rng.permutation(2000) / 2000.0
    hold = -cogging(motor, 2 * np.pi * turns) + motor.friction + motor.noise * rng.standard_normal(2000)
    voltage = hold / motor.torque_constant * motor.winding_resistance
    return table("angle [turn],hold_voltage [V]", ("{:.4f}", "{:.5f}"), turns, voltage)


def heron_turn(rng: np.random.Generator) -> str:
    """Acceleration of a coasting rotor over three turns, sampled as the samples came."""
    motor = HERON["turn"]
    angle = np.sort(rng.uniform(0.0, 6.0 * np.pi, 2400))
    torque = cogging(motor, angle) - motor.friction + motor.noise * rng.standard_normal(2400)
    return table("angle [rad],spin_acceleration [rad/s^2]", ("{:.5f}", "{:.1f}"), angle, torque / motor.rotor_inertia)


def heron_lift(rng: np.random.Generator) -> str:
    """Torque sensor in newton millimetre, both directions, angles from -180 deg."""
    motor = HERON["lift"]
    degrees, direction = there_and_back(np.arange(-360, 360) * 0.5)
    torque = cogging(motor, np.radians(degrees)) - direction * motor.friction + motor.noise * rng.standard_normal(1440)
    return table(
        "angle [deg],direction,cog_torque [N*mm]", ("{:.1f}", "{:+.0f}", "{:.3f}"), degrees, direction, 1e3 * torque
    )


def heron_reach(rng: np.random.Generator) -> str:
    """Holding torque in newton metre, both directions, angles in radians."""
    motor = HERON["reach"]
    angle, direction = there_and_back(np.arange(640) * np.pi / 320)
    hold = -cogging(motor, angle) + direction * motor.friction + motor.noise * rng.standard_normal(1280)
    return table("angle [rad],hold_torque [N*m],direction", ("{:.6f}", "{:.6f}", "{:+.0f}"), angle, hold, direction)


def heron_tilt(rng: np.random.Generator) -> str:
    """Torque sensor in micronewton metre, one direction, each angle read three times."""
    motor = HERON["tilt"]
    degrees = np.repeat(np.arange(600) * 0.6, 3)
    torque = cogging(motor, np.radians(degrees)) - motor.friction + motor.noise * rng.standard_normal(1800)
    return table("angle [deg],cog_torque [uN*m]", ("{:.1f}", "{:.0f}"), degrees, 1e6 * torque)


MAPS = {
    "tern/maps/turn.csv": tern_turn,
    "tern/maps/lift.csv": tern_lift,
    "tern/maps/reach.csv": tern_reach,
    "plover/maps/shoulder.csv": plover_shoulder,
    "plover/maps/elbow.csv": plover_elbow,
    "heron/maps/turn.csv": heron_turn,
    "heron/maps/lift.csv": heron_lift,
    "heron/maps/reach.csv": heron_reach,
    "heron/maps/tilt.csv": heron_tilt,
}


def text(place: str) -> str:
    """The text of one map, the same at every call."""
    return MAPS[place](np.random.default_rng([20, sorted(MAPS).index(place)]))


def main() -> None:
    for place in MAPS:
        file = FOLDER / place
        file.parent.mkdir(parents=True, exist_ok=True)
        file.write_text(text(place), encoding="utf-8")


if __name__ == "__main__":
    main()
