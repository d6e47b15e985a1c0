"""The trial: one question about an arm, a trajectory and its runs."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass, field
from typing import Literal, Protocol, TypeVar

from armeval.errors import Finding, InputError
from armeval.model.arm import Arm
from armeval.model.hand import Hand
from armeval.model.joint_log import JointLog
from armeval.model.planned_path import PlannedPath
from armeval.model.spreads import Spreads


@dataclass(frozen=True)
class Compensation:
    """What the firmware's compensation table can do.

    Attributes
    ----------
    table_bins
        Entries of the table over one motor turn.
    interpolation
        Between entries ``linear``, or the ``nearest`` entry.
    index_error
        Motor angle [rad], one sigma, by which table and rotor are out of step.
    map_noise
        Torque [N m, motor side], one sigma of an entry; None: what each map itself shows.
    """

    table_bins: int = 1024
    interpolation: Literal["linear", "nearest"] = "linear"
    index_error: float = 0.0
    map_noise: float | None = None

    def __post_init__(self) -> None:
        if self.table_bins < 4:
            raise InputError(f"`table_bins` is {self.table_bins}", "give at least 4", place="[compensation] table_bins")
        for name in ("index_error", "map_noise"):
            value = getattr(self, name)
            if value is not None and not 0.0 <= value < math.inf:
                raise InputError(f"`{name}` is {value}", "give a value of 0 or more", place=f"[compensation] {name}")


@dataclass(frozen=True)
class StickingRule:
    """When a joint counts as resting while it is told to move.

    Attributes
    ----------
    least_target_speed
        Below it the joint is not told to move [rad/s].
    speed_share
        A joint slower than this share of its target speed rests.
    least_dwell
        Shortest rest that counts [s].
    """

    least_target_speed: float = 0.02
    speed_share: float = 0.02
    least_dwell: float = 0.020

    def __post_init__(self) -> None:
        if not (self.least_target_speed > 0.0 and 0.0 < self.speed_share < 1.0 and self.least_dwell > 0.0):
            raise InputError(
                "a sticking threshold is out of range", "give values above 0, and a share below 1", place="[sticking]"
            )


@dataclass(frozen=True, eq=False)
class Run:
    """Laps in one state of the arm; no laps: the run is predicted only."""

    name: str
    compensated: bool
    laps: tuple[JointLog, ...] = ()


class Named(Protocol):
    """What bears a run's name."""

    @property
    def name(self) -> str:
        """The run's name."""
        ...


AnyRun = TypeVar("AnyRun", bound=Named)


def find_run(runs: Sequence[AnyRun], name: str, *, what: str = "run", file: str = "") -> AnyRun:
    """Find a run, or what was worked out for it, by the run's name.

    Raises
    ------
    InputError
        If there is none of that name; with the names that there are.
    """
    for run in runs:
        if run.name == name:
            return run
    have = ", ".join(f"`{run.name}`" for run in runs)
    raise InputError(f"there is no {what} `{name}`", f"{what}s here: {have}", file=file)


@dataclass(frozen=True, eq=False)
class Trial:
    """One question: an arm, a path with time on it, and the runs over it.

    Attributes
    ----------
    title
        As people call it.
    arm, path
        What moves, and along what.
    runs
        In the order of the file; names differ.
    feed, acceleration
        Speed [m/s] and acceleration [m/s^2] along the path; None where the path has its own time.
    corner_angle
        Where the path's direction turns by more than this [rad], it stops.
    compensation, sticking
        What the firmware's table can do; when a joint counts as resting.
    uncertainty
        How far the arm may be from what the files say.
    hand
        The hand that moves the arm; None where the trial says nothing about it.
    findings
        Warnings met while reading the files.
    files
        Every file that was read, as the user named it.
    """

    title: str
    arm: Arm
    path: PlannedPath
    runs: tuple[Run, ...]
    feed: float | None = None
    acceleration: float | None = None
    corner_angle: float = math.radians(5.0)
    compensation: Compensation = field(default_factory=Compensation)
    sticking: StickingRule = field(default_factory=StickingRule)
    uncertainty: Spreads = field(default_factory=Spreads)
    hand: Hand | None = None
    findings: tuple[Finding, ...] = ()
    files: tuple[str, ...] = ()
    source: str = ""

    def __post_init__(self) -> None:
        if not self.runs:
            raise InputError("the trial has no run", "add a [[run]] table", file=self.source)
        names = [run.name for run in self.runs]
        for name in {name for name in names if names.count(name) > 1}:
            raise InputError(f"two runs are called `{name}`", "give each run its own name", file=self.source)
        if self.path.time is None and (self.feed is None or self.acceleration is None):
            raise InputError(
                "the path has no time and the trial no feed or acceleration",
                'add `feed = "60 mm/s"` and `acceleration = "1 m/s^2"`, or a `time [s]` column to the path',
                file=self.source,
            )
        for name in ("feed", "acceleration"):
            value = getattr(self, name)
            if value is not None and not 0.0 < value < math.inf:
                raise InputError(f"`{name}` is {value}", "give a value above 0", file=self.source, place=name)
        if self.hand is not None and self.hand.run is not None and self.hand.run not in names:
            have = ", ".join(f"`{name}`" for name in names)
            raise InputError(
                f"there is no run `{self.hand.run}`", f"runs here: {have}", file=self.source, place="[hand] run"
            )

    @property
    def driven(self) -> tuple[Run, ...]:
        """Runs with logs in which the servo led the arm: those whose tip error can be measured.

        A run that a hand led has no target to stray from.
        """
        led = self.hand.run if self.hand is not None else None
        return tuple(run for run in self.runs if run.laps and run.name != led)

    def run(self, name: str) -> Run:
        """Find a run by its name.

        Raises
        ------
        InputError
            If there is none of that name.
        """
        return find_run(self.runs, name, file=self.source)
