"""Is the time step fine enough? What half the step changes tells."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from armeval.arrays import FloatArray
from armeval.evaluate.replaying.replay import Replay, replay
from armeval.kernels.chain import tip_positions
from armeval.model.arm import Arm
from armeval.model.causes import Causes
from armeval.model.trajectory import Trajectory
from armeval.model.trial import Compensation

_ENOUGH = 0.05


@dataclass(frozen=True)
class StepError:
    """Estimate of what the time step does to a replayed lap.

    Attributes
    ----------
    substeps
        Time steps in a servo period that were judged.
    rms
        RMS of the tip's displacement [m] due to the step, estimated as twice that between this step and half of it
        (the scheme is of first order where joints come to rest).
    tracking_change
        How much half the step changes the RMS tracking error, as a share of it.
    tracking_rms
        RMS tracking error [m] of the lap.
    """

    substeps: int
    rms: float
    tracking_change: float
    tracking_rms: float

    @property
    def warning(self) -> str:
        """What to tell the user; empty where the step is fine enough: 5 % of the tracking error or less."""
        if self.rms <= _ENOUGH * self.tracking_rms:
            return ""
        return (
            f"the time step moves the tip by about {self.rms * 1e3:.2g} mm RMS, beside a tracking error of "
            f"{self.tracking_rms * 1e3:.2g} mm RMS that it changes by {100.0 * abs(self.tracking_change):.1f} %: "
            f"predict with --substeps {2 * self.substeps} or more"
        )


def step_error(
    arm: Arm,
    trajectory: Trajectory,
    replayed: Replay,
    *,
    compensated: bool,
    compensation: Compensation | None = None,
    substeps: int = 1,
    seed: int = 0,
    settle: float = 0.5,
    causes: Causes | None = None,
) -> StepError:
    """Estimate the error of a replay by replaying with half its step.

    Parameters
    ----------
    arm, trajectory, compensated, compensation, substeps, seed, settle, causes
        As they were for ``replayed``.
    replayed
        The replay to be judged.
    """
    finer = replay(
        arm,
        trajectory,
        compensated=compensated,
        compensation=compensation or Compensation(),
        substeps=2 * substeps,
        seed=seed,
        settle=settle,
        causes=causes or Causes(),
    )
    chain = arm.chain.arrays
    coarse_tip, fine_tip = tip_positions(chain, replayed.angle), tip_positions(chain, finer.angle)
    coarse, fine = (_rms(tip - trajectory.tip) for tip in (coarse_tip, fine_tip))
    return StepError(
        substeps=substeps,
        rms=2.0 * _rms(coarse_tip - fine_tip),
        tracking_change=(fine - coarse) / coarse if coarse > 0.0 else 0.0,
        tracking_rms=coarse,
    )


def _rms(vectors: FloatArray) -> float:
    return float(np.sqrt(np.mean(np.sum(vectors**2, axis=1))))
