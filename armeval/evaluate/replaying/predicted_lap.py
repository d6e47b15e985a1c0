"""The predicted lap of one run: as a lap track, with a cause taken out, and how much the time step does to it."""

from __future__ import annotations

import math
from dataclasses import dataclass, replace

from armeval.evaluate.lap_track import LapTrack
from armeval.evaluate.measuring.tracks import track
from armeval.evaluate.replaying.replay import Replay, replay
from armeval.evaluate.replaying.step_error import StepError, step_error
from armeval.evaluate.sticking.cause import Removable
from armeval.model.arm import Arm
from armeval.model.causes import Causes
from armeval.model.drive import Drive
from armeval.model.trajectory import Trajectory
from armeval.model.trial import Compensation, Run


@dataclass(frozen=True, eq=False)
class PredictedLap:
    """How the lap of one run is replayed.

    Attributes
    ----------
    arm, trajectory
        As predictions take them.
    run
        Its logs are not looked at.
    compensation, seed
        What the compensation table can do, and the seed of its noise.
    substeps
        Time steps in a servo period.
    """

    arm: Arm
    trajectory: Trajectory
    run: Run
    compensation: Compensation
    seed: int = 0
    substeps: int = 1

    def replay(self, causes: Causes | None = None) -> Replay:
        """Replay the lap; everything acts unless ``causes`` says otherwise."""
        return replay(
            self.arm,
            self.trajectory,
            compensated=self.run.compensated,
            compensation=self.compensation,
            substeps=self.substeps,
            seed=self.seed,
            causes=causes or Causes(),
        )

    def track(self, replayed: Replay) -> LapTrack:
        """Hold a replay against the plan."""
        return track(
            self.arm,
            self.trajectory,
            run=self.run.name,
            compensated=self.run.compensated,
            source="prediction",
            lap=1,
            file=None,
            time=replayed.time,
            angle=replayed.angle,
            target=self.trajectory.joint,
            arc=self.trajectory.arc,
            speed=replayed.speed,
            torque=replayed.torque,
        )

    def step_error(self, replayed: Replay) -> StepError:
        """Estimate what the time step does to the replay with everything acting."""
        return step_error(
            self.arm,
            self.trajectory,
            replayed,
            compensated=self.run.compensated,
            compensation=self.compensation,
            substeps=self.substeps,
            seed=self.seed,
        )

    def without(self, joint: str, without: Removable) -> LapTrack:
        """Replay the lap with one cause out of one joint (:class:`armeval.evaluate.sticking.cause.Counterfactual`)."""
        i = self.arm.chain.index(joint)
        drive, chain = self.arm.drives[i], self.arm.chain
        if without == "friction":
            others = tuple(0.0 if name == joint else 1.0 for name in self.arm.joints)
            return self.track(self.replay(Causes(friction=others)))
        if without == "cogging":
            # The map goes, not the torque alone: the firmware's table would else push where nothing pulls.
            arm = _with_drive(self.arm, i, replace(drive, cog_map=None))
        elif without == "torque limit":
            arm = _with_drive(self.arm, i, replace(drive, torque_limit=math.inf))
        else:
            lower, upper = chain.lower.copy(), chain.upper.copy()
            lower[i], upper[i] = -math.inf, math.inf
            arm = replace(self.arm, chain=replace(chain, lower=lower, upper=upper))
        other = replace(self, arm=arm)
        return other.track(other.replay())


def _with_drive(arm: Arm, joint: int, drive: Drive) -> Arm:
    return replace(arm, drives=(*arm.drives[:joint], drive, *arm.drives[joint + 1 :]))
