"""One joint that turns an arm of one link: laps, logs and truth for the tests of sticking, simulated in here.

The simulation shares nothing with the package: 8 steps a servo period, friction as a bounded impulse, firmware that
sees rounded angles and differences and filters them.
"""

import math
from dataclasses import dataclass

import numpy as np

from armeval.evaluate.lap_track import LapTrack
from armeval.model.arm import Arm
from armeval.model.chain import Chain
from armeval.model.cogmap import CogMap
from armeval.model.drive import Drive
from armeval.model.servo import Servo

PERIOD, REACH = 1e-3, 0.2


@dataclass(frozen=True)
class Case:
    """A joint: inertia, gains, cogging amplitude and order, friction; all SI."""

    J: float = 1e-3
    K: float = 1.5
    D: float = 0.04
    T: float = 0.0
    N: int = 84
    Fc: float = 0.004
    Fs: float = 0.005
    vs: float = 0.05
    counts: int = 16384
    lower: float = -math.inf
    upper: float = math.inf
    limit: float = math.inf

    def arm(self, *, with_map: bool = True, slots: int | None = None, poles: int | None = None) -> Arm:
        angle = 2.0 * np.pi * np.arange(4096) / 4096
        chain = Chain(
            joints=("turn",),
            prismatic=np.array([False]),
            placement=np.eye(4)[None, :3, :],
            mass=np.zeros(1),
            center=np.zeros((1, 3)),
            inertia=np.zeros((1, 3, 3)),
            tip=np.array([REACH, 0.0, 0.0]),
            lower=np.array([self.lower]),
            upper=np.array([self.upper]),
        )
        drive = Drive(
            joint="turn",
            stiffness=self.K,
            damping=self.D,
            rotor_inertia=self.J,
            coulomb_friction=self.Fc,
            static_friction=self.Fs,
            stribeck_speed=self.vs,
            torque_limit=self.limit,
            encoder_counts=float(self.counts),
            slots=slots,
            poles=poles,
            cog_map=CogMap(self.T * np.sin(self.N * angle)) if with_map else None,
        )
        return Arm(
            "one joint", chain, (drive,), Servo("joint_pd", PERIOD, PERIOD, 120.0), np.array([0.0, 0.0, -9.80665])
        )


def moved(case: Case, target, told):
    """True angle and speed (k,) of the joint."""
    return moved_and_read(case, target, told)[:2]


def moved_and_read(case: Case, target, told, *, jitter: float = 0.0, seed: int = 0):
    """True angle, true speed and what the encoder read (k,) each, with jitter in counts that the firmware meets too."""
    noise = jitter * np.random.default_rng(seed).standard_normal(len(target))
    step, count = PERIOD / 8, 2.0 * math.pi / case.counts
    blend = 1.0 - math.exp(-2.0 * math.pi * 120.0 * PERIOD)
    q, v, filtered, waiting = float(target[0]), 0.0, 0.0, 0.0
    seen = round(q / count) * count
    angle, speed, read = np.empty(len(target)), np.empty(len(target)), np.empty(len(target))
    for i in range(len(target)):
        angle[i], speed[i] = q, v
        before, seen = seen, round(q / count + noise[i]) * count
        read[i] = seen
        filtered += blend * ((seen - before) / PERIOD - filtered)
        sent = case.K * (target[i] - seen) + case.D * (told[i] - filtered)
        acting, waiting = waiting, min(max(sent, -case.limit), case.limit)
        for _ in range(8):
            bound = case.Fs if v == 0.0 else case.Fc + (case.Fs - case.Fc) * math.exp(-((v / case.vs) ** 2))
            free = v + step * (acting + case.T * math.sin(case.N * q)) / case.J
            held = step * bound / case.J
            v = max(free - held, 0.0) if free > 0.0 else min(free + held, 0.0)
            q += step * v
    return angle, speed, read


def lap(
    arm: Arm, target, angle, *, speed=None, torque=None, lap=1, run="bare", compensated=False, every=1, period=PERIOD
):
    """A lap as the package sees it; a log, with angles rounded to counts, where no true speed is given."""
    rows = slice(None, None, every)
    count = 2.0 * math.pi / arm.drives[0].encoder_counts
    seen = (np.rint(angle / count) * count if speed is None else angle)[rows]
    wanted = np.asarray(target)[rows]
    way = np.sign(np.gradient(wanted)) if len(wanted) > 1 else np.zeros(len(wanted))
    return LapTrack(
        run=run,
        compensated=compensated,
        source="log" if speed is None else "prediction",
        lap=lap,
        file=None,
        time=period * every * np.arange(len(wanted)),
        arc=REACH * np.concatenate([[0.0], np.cumsum(np.abs(np.diff(wanted)))]),
        angle=seen[:, None],
        target=wanted[:, None],
        tip=REACH * np.column_stack([np.cos(seen), np.sin(seen), 0.0 * seen]),
        target_tip=REACH * np.column_stack([np.cos(wanted), np.sin(wanted), 0.0 * wanted]),
        deviation=np.zeros(len(wanted)),
        lag=REACH * way * (wanted - seen),
        resolution=np.array([count if speed is None else 0.0]),
        speed=None if speed is None else speed[rows][:, None],
        torque=None if torque is None else torque[rows][:, None],
    )


def ramp(speed: float, duration: float, start: float = 0.3):
    """Targets (k,) and their speed that grows to its value in 0.1 s and stays."""
    told = speed * np.clip(np.arange(round(duration / PERIOD)) * PERIOD / 0.1, 0.0, 1.0)
    return start + np.cumsum(told) * PERIOD, told


def to_and_fro(speed: float, turns: int, half: float = 1.0, start: float = 0.3):
    """Targets (k,) and their speed, turning back every ``half`` seconds, slowing down to it over 0.1 s."""
    t = np.arange(round(turns * half / PERIOD)) * PERIOD
    within = np.minimum(t % half, half - t % half)
    told = speed * np.where((t // half) % 2 == 0, 1.0, -1.0) * np.clip(within / 0.1, 0.0, 1.0)
    return start + np.cumsum(told) * PERIOD, told
