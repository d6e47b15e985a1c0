"""Replays with some causes of tip error taken out, many at a time: the mean squared tip error of each."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from functools import cached_property
from typing import Literal, get_args

import numpy as np

from armeval.arrays import FloatArray
from armeval.errors import InputError
from armeval.evaluate.planning.path_progress import path_progress
from armeval.evaluate.replaying.members import Member, nominal_member
from armeval.evaluate.replaying.owen_value import Coalition
from armeval.evaluate.replaying.replay_input import ReplayInput, replay_input, with_members
from armeval.evaluate.threads import spread
from armeval.kernels.chain import tip_positions
from armeval.kernels.distances import distances
from armeval.kernels.lanes import WIDTH
from armeval.kernels.records import lap_records
from armeval.kernels.replay import replay_lap
from armeval.model.arm import Arm
from armeval.model.causes import Causes
from armeval.model.trajectory import Trajectory
from armeval.model.trial import Compensation
from armeval.progress import Progress, silent

Cause = Literal["cogging", "friction", "servo lag", "encoder", "torque resolution", "saturation"]
CAUSES: tuple[Cause, ...] = get_args(Cause)
_SETTLE = 0.5


@dataclass(frozen=True)
class ActingCause:
    """A cause that has something to act on.

    Attributes
    ----------
    cause
        Which.
    joints
        Places of the joints that it acts on one by one; empty where it acts on the whole arm at once.
    """

    cause: Cause
    joints: tuple[int, ...] = ()

    @property
    def size(self) -> int:
        """Number of parts that can be taken out."""
        return max(len(self.joints), 1)


@dataclass(frozen=True)
class Replayed:
    """Mean squared tracking error and path deviation [m^2]; whether any torque was cut, settling included."""

    mean_squares: tuple[float, float]
    was_cut: bool


@dataclass(frozen=True, eq=False)
class CauseReplays:
    """What is replayed again and again: an arm along a trajectory, in one state.

    Attributes
    ----------
    arm, trajectory
        As predictions take them.
    compensated, compensation, seed
        Whether compensation acts, what its table can do, and the seed of the table's noise.
    substeps
        Time steps in a servo period.
    """

    arm: Arm
    trajectory: Trajectory
    compensated: bool
    compensation: Compensation
    seed: int = 0
    substeps: int = 1

    @property
    def acting(self) -> tuple[ActingCause, ...]:
        """The causes that have something to act on, in the order of :data:`CAUSES`."""
        drives = self.arm.drives
        cogs = tuple(i for i, d in enumerate(drives) if d.cog_map is not None and d.cog_map.torque.any())
        rubs = tuple(i for i, d in enumerate(drives) if d.breakaway_friction > 0.0)
        acts = {
            "cogging": bool(cogs),
            "friction": bool(rubs),
            "servo lag": True,
            "encoder": bool(self.arm.resolution.any()),
            "torque resolution": any(d.torque_step > 0.0 or d.dead_time_torque > 0.0 for d in drives),
            "saturation": any(np.isfinite(d.torque_limit) for d in drives),
        }
        joints: dict[str, tuple[int, ...]] = {"cogging": cogs, "friction": rubs}
        return tuple(ActingCause(cause, joints.get(cause, ())) for cause in CAUSES if acts[cause])

    def worths(
        self,
        coalitions: Sequence[Coalition],
        *,
        threads: int | None = None,
        what: str = "replaying",
        progress: Progress = silent,
    ) -> dict[Coalition, FloatArray]:
        """Replay the arm with each coalition of :attr:`acting` acting and everything else taken out.

        Cogging of a joint goes together with its entry in the firmware's table: what is taken out is what compensation
        leaves of it, not the torque that the table opposes. Where no torque comes to its limit, taking the limit out
        changes nothing, and the replay is spared.

        Parameters
        ----------
        coalitions
            Some or all of those of :func:`armeval.evaluate.replaying.owen_value.coalitions`.
        threads
            How many replay at once; None: one a core. The numbers do not depend on it.
        what, progress
            Told as the blocks of replays are done.

        Returns
        -------
        Shape (2,) each [m^2]: mean squared tracking error and path deviation.

        Raises
        ------
        InputError
            If the motion grows beyond all bounds.
        """
        acting = self.acting
        limit = next((g for g, group in enumerate(acting) if group.cause == "saturation"), None)
        found: dict[Coalition, Replayed] = {}
        twin = {}
        if limit is not None:
            twin = {c: (*c[:limit], frozenset({0}), *c[limit + 1 :]) for c in coalitions if not c[limit]}
        first = list(dict.fromkeys(twin.get(c, c) for c in coalitions))
        self._replay(first, found, threads, what, progress)
        again = [c for c, limited in twin.items() if found[limited].was_cut]
        self._replay(again, found, threads, f"{what}, torque unlimited", progress)
        found.update({c: found[limited] for c, limited in twin.items() if c not in found})
        return {c: np.array(found[c].mean_squares) for c in coalitions}

    def _replay(
        self,
        coalitions: list[Coalition],
        found: dict[Coalition, Replayed],
        threads: int | None,
        what: str,
        progress: Progress,
    ) -> None:
        """Fill ``found``, in blocks of as many replays as there are lanes, which share what acts on the whole arm."""
        alike: dict[Causes, list[Coalition]] = {}
        for coalition in coalitions:
            alike.setdefault(self._causes(coalition), []).append(coalition)
        inputs = spread(self._input, list(alike), threads=threads)
        blocks = [
            (prepared, causes, own[start : start + WIDTH])
            for prepared, (causes, own) in zip(inputs, alike.items(), strict=True)
            for start in range(0, len(own), WIDTH)
        ]
        done = spread(lambda block: self._block(*block), blocks, what=what, progress=progress, threads=threads)
        for (_, _, own), replayed in zip(blocks, done, strict=True):
            found.update(zip(own, replayed, strict=True))

    def _causes(self, coalition: Coalition) -> Causes:
        """Give the switches of what acts on the whole arm; what has nothing to act on makes no difference."""
        present = {group.cause: bool(part) for group, part in zip(self.acting, coalition, strict=True)}
        return Causes(
            servo_lag=present["servo lag"],
            encoder=present.get("encoder", True),
            torque_resolution=present.get("torque resolution", True),
            saturation=present.get("saturation", True),
        )

    def _input(self, causes: Causes) -> ReplayInput:
        """Prepare replays with the whole arm's causes as given, and all joints' cogging and friction."""
        arm = self.arm
        if not causes.servo_lag:
            # A servo that does not lag carries the weight from the start, not only from when the lap begins.
            arm = replace(arm, servo=replace(arm.servo, gravity_feedforward=True))
        return replay_input(
            arm,
            self.trajectory,
            [self._as_filed],
            compensated=self.compensated,
            compensation=self.compensation,
            causes=causes,
            substeps=self.substeps,
            settle=_SETTLE,
        )

    @cached_property
    def _as_filed(self) -> Member:
        return nominal_member(self.arm, self.compensation, self.trajectory.joint[0], self.seed)

    def _block(self, prepared: ReplayInput, causes: Causes, coalitions: Sequence[Coalition]) -> list[Replayed]:
        n, plan, member = self.arm.chain.count, self.trajectory, self._as_filed
        cogging, friction = self._joint_shares(coalitions, "cogging"), self._joint_shares(coalitions, "friction")
        members = [
            replace(member, dry_friction=rubs, tables=member.tables * cogs[:, None])
            for cogs, rubs in zip(cogging.T, friction.T, strict=True)
        ]
        own = with_members(prepared, self.arm, members, causes)
        own = own._replace(lap=lap_records(len(own.targets), n, WIDTH))
        own.joints["cog_gain"] *= cogging
        if replay_lap(*own) >= 0:
            lost = np.flatnonzero(~np.isfinite(own.joints["angle"][:, : len(coalitions)]).all(axis=0))
            self._refuse(coalitions[int(lost[0]) if lost.size else 0])
        lap = own.lap
        replayed = []
        for lane in range(len(coalitions)):
            angle = np.ascontiguousarray(lap["angle"][-len(plan.time) :, :, lane])
            tip = tip_positions(self.arm.chain.arrays, angle)
            tracking, deviation = distances(tip, plan.tip), path_progress(tip, plan.arc, plan)[0]
            squares = (float(np.mean(tracking**2)), float(np.mean(deviation**2)))
            replayed.append(Replayed(squares, bool(lap["cut"][:, :, lane].any())))
        return replayed

    def _joint_shares(self, coalitions: Sequence[Coalition], cause: Cause) -> FloatArray:
        """Shape (n, lanes): 1 where the cause acts on the joint; idle lanes repeat the first."""
        shares = np.ones((self.arm.chain.count, WIDTH))
        for g, group in enumerate(self.acting):
            if group.cause == cause:
                for lane in range(WIDTH):
                    present = coalitions[lane if lane < len(coalitions) else 0][g]
                    shares[list(group.joints), lane] = [float(p in present) for p in range(len(group.joints))]
        return shares

    def _refuse(self, coalition: Coalition) -> None:
        out = [g.cause for g, part in zip(self.acting, coalition, strict=True) if len(part) < g.size]
        without = f"without {', '.join(out)} " if out else ""
        raise InputError(
            f"{without}the motion grows beyond all bounds: the servo loop is not stable",
            "lower stiffness or damping, shorten the delay, or raise the speed filter's corner",
        )
