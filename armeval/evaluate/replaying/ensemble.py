"""How sure a prediction is: many replays that differ in what nobody knows exactly."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from armeval.arrays import FloatArray, IntArray
from armeval.errors import InputError
from armeval.evaluate.document import JsonValue, plain
from armeval.evaluate.planning.path_progress import path_progress
from armeval.evaluate.replaying.members import Member, clean_tables, drawn_member
from armeval.evaluate.replaying.replay import lost_servo
from armeval.evaluate.replaying.replay_input import ReplayInput, replay_input, with_members
from armeval.evaluate.threads import spread
from armeval.kernels.lanes import WIDTH
from armeval.kernels.records import bin_records
from armeval.kernels.replay import replay_lap
from armeval.kernels.survey import survey_laps
from armeval.model.arm import Arm
from armeval.model.causes import Causes
from armeval.model.spreads import Spreads
from armeval.model.trajectory import Trajectory
from armeval.model.trial import Compensation, StickingRule
from armeval.progress import Progress, silent

if TYPE_CHECKING:
    import pandas as pd

PERCENTILES = (5.0, 25.0, 50.0, 75.0, 95.0)
_INTERVAL = (2.5, 97.5)
_EVERY = 8
"""Path deviation, which costs more than the replay, is looked at in every so manieth period."""


@dataclass(frozen=True, eq=False)
class Ensemble:
    """What many possible arms would do: N members, n joints, b stretches of path of equal length.

    Attributes
    ----------
    joints
        Names of the joints.
    compensated
        Whether the firmware's table was fed forward.
    seed
        What the members were drawn from.
    spreads
        How far they differ.
    arc
        Shape (b,) [m]. Middle of each stretch.
    tracking, deviation
        Shape (N,) [m]. RMS tracking error and RMS path deviation of each member.
    error
        Shape (N, b) [m]. RMS tracking error of each member in each stretch; NaN where the targets pass over it.
    sticking
        Shape (n, b). Share of the members in which the joint sticks in the stretch.
    """

    joints: tuple[str, ...]
    compensated: bool
    seed: int
    spreads: Spreads
    arc: FloatArray
    tracking: FloatArray
    deviation: FloatArray
    error: FloatArray
    sticking: FloatArray

    @property
    def members(self) -> int:
        """Number of members, N."""
        return len(self.tracking)

    @property
    def band(self) -> FloatArray:
        """Shape (5, b) [m]. Tracking error in each stretch that 5, 25, 50, 75 and 95 % of the members stay below."""
        return np.asarray(np.percentile(self.error, PERCENTILES, axis=0))

    @property
    def tracking_interval(self) -> tuple[float, float]:
        """Between these [m] lies the RMS tracking error of 95 % of the members."""
        return _interval(self.tracking)

    @property
    def deviation_interval(self) -> tuple[float, float]:
        """Between these [m] lies the RMS path deviation of 95 % of the members."""
        return _interval(self.deviation)

    def to_frame(self) -> pd.DataFrame:
        """One row a stretch of path: the band of the tracking error [m] and each joint's probability of sticking."""
        import pandas as pd

        columns = {"arc_m": self.arc}
        columns |= {f"p{share:g}_m": row for share, row in zip(PERCENTILES, self.band, strict=True)}
        columns |= {f"{joint}_sticks": row for joint, row in zip(self.joints, self.sticking, strict=True)}
        return pd.DataFrame(columns)

    def to_document(self) -> dict[str, JsonValue]:
        """Give the entry in the JSON document."""
        low, high = self.tracking_interval
        deviation_low, deviation_high = self.deviation_interval
        return {
            "members": self.members,
            "seed": self.seed,
            "spreads": plain(self.spreads),
            "tracking_rms_m": {"median": float(np.median(self.tracking)), "low": low, "high": high},
            "deviation_rms_m": {
                "median": float(np.median(self.deviation)),
                "low": deviation_low,
                "high": deviation_high,
            },
            "arc_m": plain(self.arc),
            "tracking_percentiles": list(PERCENTILES),
            "tracking_m": plain(self.band),
            "sticking": [
                {"joint": joint, "probability": plain(row)}
                for joint, row in zip(self.joints, self.sticking, strict=True)
            ],
        }


def ensemble(
    arm: Arm,
    trajectory: Trajectory,
    *,
    compensated: bool,
    members: int = 200,
    seed: int = 0,
    compensation: Compensation | None = None,
    spreads: Spreads | None = None,
    causes: Causes | None = None,
    rule: StickingRule | None = None,
    substeps: int = 1,
    settle: float = 0.5,
    bins: int = 200,
    threads: int | None = None,
    progress: Progress = silent,
) -> Ensemble:
    """Replay a lap with many possible arms.

    Parameters
    ----------
    arm, trajectory, compensated, compensation, causes, substeps, settle
        As for :func:`armeval.evaluate.replaying.replay.replay`; but no member's table is out of step by just the index
        error, each is by what was drawn for it.
    members
        How many.
    seed
        What is drawn depends on the seed and the member's number only: not on threads, not on the run. So the members
        of a bare and of a compensated run are the same arms.
    spreads
        How far members differ.
    rule
        When a joint counts as sticking.
    bins
        Number of stretches of path.
    threads
        How many blocks of members at a time; None: one a core.
    progress
        Told after each block.

    Raises
    ------
    InputError
        If there is no member, the trajectory does not fit the arm, or the motion of a member grows beyond all bounds.
    """
    if members < 1:
        raise InputError(f"the ensemble has {members} members", "give at least 1", place="--members")
    compensation, spreads = compensation or Compensation(), spreads or Spreads()
    causes, rule = causes or Causes(), rule or StickingRule()
    tables = clean_tables(arm, compensation)

    def member(number: int) -> Member:
        rng = np.random.default_rng([seed, number])
        return drawn_member(arm, compensation, spreads, trajectory.joint[0], tables, rng)

    prepared = replay_input(
        arm,
        trajectory,
        [member(0)],
        compensated=compensated,
        compensation=compensation,
        causes=causes,
        substeps=substeps,
        settle=settle,
    )
    bin_of = np.minimum((trajectory.arc * (bins / trajectory.length)).astype(np.int64), bins - 1)
    periods = max(rule.least_dwell / arm.servo.period - 1e-9, 1.0)
    survey = _Survey(trajectory, bin_of, bins, rule.least_target_speed, rule.speed_share, periods)

    def block(first: int) -> _Found:
        # a whole block always, so that no member's numbers depend on how many there are
        filled = with_members(prepared, arm, [member(first + lane) for lane in range(WIDTH)], causes)
        lost = replay_lap(*filled)
        if lost >= 0:
            raise lost_servo(filled, lost)
        return survey.of(filled)

    found = spread(block, range(0, members, WIDTH), threads=threads, what="ensemble", progress=progress)
    error = np.concatenate([part.error for part in found])[:members]
    sticks = np.concatenate([part.sticks for part in found])[:members]
    return Ensemble(
        joints=arm.joints,
        compensated=compensated,
        seed=seed,
        spreads=spreads,
        arc=np.asarray((np.arange(bins) + 0.5) * (trajectory.length / bins), dtype=np.float64),
        tracking=np.concatenate([part.tracking for part in found])[:members],
        deviation=np.concatenate([part.deviation for part in found])[:members],
        error=error,
        sticking=sticks.mean(axis=0),
    )


@dataclass(frozen=True, eq=False)
class _Found:
    """Of one block: RMS tracking error and deviation (8,), error (8, b) [m], sticking (8, n, b)."""

    tracking: FloatArray
    deviation: FloatArray
    error: FloatArray
    sticks: FloatArray


@dataclass(frozen=True, eq=False)
class _Survey:
    """How a block's laps are summed up."""

    trajectory: Trajectory
    bin_of: IntArray
    bins: int
    least_target_speed: float
    speed_share: float
    least_periods: float

    def of(self, filled: ReplayInput) -> _Found:
        found = bin_records(self.bins, len(filled.joints), WIDTH)
        targets = filled.targets[len(filled.targets) - len(filled.lap) :]
        survey_laps(
            filled.joints,
            filled.servo,
            targets,
            filled.lap,
            self.bin_of,
            self.least_target_speed,
            self.speed_share,
            self.least_periods,
            found,
        )
        samples = np.bincount(self.bin_of, minlength=self.bins)
        squares = found["square"].T
        deviation = np.empty(WIDTH)
        for lane in range(WIDTH):
            tip = np.ascontiguousarray(filled.lap["tip"][::_EVERY, :, lane])
            off, _ = path_progress(tip, self.trajectory.arc[::_EVERY], self.trajectory)
            deviation[lane] = np.sqrt(np.mean(off**2))
        return _Found(
            tracking=np.sqrt(squares.sum(axis=1) / len(filled.lap)),
            deviation=deviation,
            error=np.sqrt(squares / np.where(samples > 0, samples, np.nan)),
            sticks=found["sticks"].transpose(2, 1, 0).copy(),
        )


def _interval(values: FloatArray) -> tuple[float, float]:
    low, high = np.percentile(values, _INTERVAL)
    return float(low), float(high)
