"""What a hand meets that leads the arm: how much rattle, from where, what compensation takes off and what is left."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from armeval.arrays import BoolArray, FloatArray
from armeval.errors import InputError
from armeval.evaluate.document import JsonValue, as_text, document
from armeval.evaluate.feeling.feel_notes import CAUTION, feel_notes
from armeval.evaluate.feeling.feel_state import FeelState, feel_state
from armeval.evaluate.feeling.hand_motion import HandMotion, logged_motion, planned_motion
from armeval.evaluate.feeling.tip_abilities import TipAbilities, tip_abilities
from armeval.evaluate.feeling.wall_stiffness import DAMPING_BOUND, FRICTION_BOUND
from armeval.evaluate.feeling.workspace import FIGURES, WorkspaceMap, has_grid, spread_over, workspace_map
from armeval.evaluate.plan import plan_trial
from armeval.evaluate.planning.reach import stretches
from armeval.model.hand import Hand
from armeval.model.trajectory import Trajectory
from armeval.model.trial import Trial
from armeval.progress import Progress, silent

if TYPE_CHECKING:
    import pandas as pd

_POSES_ALONG = 400


@dataclass(frozen=True, eq=False)
class Feel:
    """What a hand meets.

    Attributes
    ----------
    trial
        The trial's title.
    hand
        What the trial says about the hand.
    motion
        What the hand leads the tip through, as given.
    states
        The arm bare and compensated.
    arc, abilities
        Shape (p,) [m], and what the arm can render there, compensated where any run of the trial is.
    workspace
        Maps over the reachable workspace; None where they were not asked for.
    warnings
        What to bear in mind.
    """

    trial: str
    hand: Hand
    motion: HandMotion
    states: tuple[FeelState, ...]
    arc: FloatArray
    abilities: TipAbilities
    workspace: WorkspaceMap | None
    warnings: tuple[str, ...]

    @property
    def bare(self) -> FeelState:
        """The arm as it is."""
        return self.states[0]

    @property
    def compensated(self) -> FeelState:
        """The arm with its cog maps fed forward."""
        return self.states[1]

    @property
    def reduction(self) -> float:
        """Share of the RMS ripple that compensation takes off."""
        before = self.bare.ripple.rms
        return 1.0 - self.compensated.ripple.rms / before if before > 0.0 else math.nan

    def to_frame(self) -> pd.DataFrame:
        """One row a state and part of the force [N]."""
        import pandas as pd

        rows = [{"state": state.name, **part.to_row()} for state in self.states for part in state.parts]
        return pd.DataFrame(rows)

    def lines_frame(self) -> pd.DataFrame:
        """One row a state, joint and order of the ripple, SI."""
        import pandas as pd

        rows = [{"state": state.name, **line} for state in self.states for line in state.lines_document()]
        return pd.DataFrame(rows)

    def along_frame(self) -> pd.DataFrame:
        """One row a sample of the motion: force of each part along and across it, in both states, SI."""
        import pandas as pd

        columns: dict[str, FloatArray] = {"time_s": self.motion.time, "arc_m": self.motion.arc}
        for state in self.states:
            columns |= state.columns()
        return pd.DataFrame(columns)

    def abilities_frame(self) -> pd.DataFrame:
        """One row a pose along the path: what the arm can render there, SI."""
        import pandas as pd

        return pd.DataFrame(
            {"arc_m": self.arc, **{key: getattr(self.abilities, name) for name, key in FIGURES.items()}}
        )

    def to_document(self) -> dict[str, JsonValue]:
        """Give the JSON document."""
        hand, motion, directions = self.hand, self.motion, self.bare.force.directions
        blind = directions.blind
        content: dict[str, object] = {
            "hand": {
                "rendered_force_N": hand.rendered_force,
                "gravity_feedforward": self.bare.force.carries_weight,
                "bandwidth_Hz": hand.bandwidth,
            },
            "motion": {
                "source": motion.source,
                "duration_s": motion.duration,
                "length_m": motion.length,
                "mean_speed_m_s": motion.length / motion.duration,
                "smoothing_moved_m": motion.moved,
                "tip_directions": directions.count,
                "without_figure": None if blind is None else blind,
                "near_singular": self._stretches(directions.singular),
                "jolts": self._stretches(motion.jolts),
            },
            "reduction": self.reduction,
            "states": [state.to_document() for state in self.states],
            "abilities": [
                {"figure": key, **spread_over(getattr(self.abilities, name)), "worst_at_m": self._worst_at(name)}
                for name, key in FIGURES.items()
            ],
            "wall_bounds": {"wall_by_damping_N_m": DAMPING_BOUND, "wall_by_friction_N_m": FRICTION_BOUND},
            "workspace": None if self.workspace is None else self.workspace.to_document(),
        }
        return document("feel", self.trial, self.warnings, content)

    def to_json(self) -> str:
        """Give the JSON document as text."""
        return as_text(self.to_document())

    def _stretches(self, marked: BoolArray) -> list[dict[str, float]]:
        arc = self.motion.arc
        return [
            {"start_m": float(arc[part.start]), "end_m": float(arc[part.stop - 1])} for part in stretches(marked, arc)
        ]

    def _worst_at(self, name: str) -> float:
        """Where along the path a figure is worst: least where much is good, else largest [m]."""
        values = getattr(self.abilities, name)
        if not np.isfinite(values).any():
            return math.nan
        much_is_good = name in {"continuous_force", "dynamic_range", "lever", "isotropy"} or name.startswith("wall")
        return float(self.arc[np.nanargmin(values) if much_is_good else np.nanargmax(values)])


def feel(
    trial: Trial,
    *,
    trajectory: Trajectory | None = None,
    workspace: bool = False,
    spacing: float | None = None,
    members: int = 200,
    seed: int = 0,
    progress: Progress = silent,
) -> Feel:
    """Work out what a hand meets that leads the arm along the trial's path, or as its encoders logged it.

    Parameters
    ----------
    trial
        Its ``hand`` says what the motion is and what the arm is meant to render; without one, nothing is judged by what
        a hand notices.
    trajectory
        The plan, where it has been made already.
    workspace, spacing
        Whether to map the reachable workspace, and the spacing [m] of the grid.
    members
        Of the ensemble that shows how the ripple left varies with errors of compensation.
    seed
        Of the noise on the compensation table, and of the ensemble.
    progress
        Told after each part.

    Raises
    ------
    InputError
        If the path cannot be followed, or the run that the hand led has no log.
    """
    hand = Hand() if trial.hand is None else trial.hand
    parts = 4 if workspace else 3
    progress("feeling", 0, parts)
    motion = _motion(trial, hand, trajectory)
    states = []
    for done, compensated in enumerate((False, True), start=1):
        states.append(feel_state(trial, hand, motion, compensated=compensated, members=members, seed=seed))
        progress("feeling", done, parts)
    some = np.unique(np.linspace(0, len(motion.time) - 1, _POSES_ALONG).astype(np.int64))
    acts = any(run.compensated for run in trial.runs)
    setting = {"compensated": acts, "compensation": trial.compensation}
    posed = states[int(acts)].force.motion.joint[some]
    abilities = tip_abilities(trial.arm, posed, **setting, carries_weight=hand.gravity_feedforward, seed=seed)  # type: ignore[arg-type]
    progress("feeling", 3, parts)
    mapped = None
    notes = feel_notes(trial, hand, motion, states, abilities)
    if workspace and not has_grid(states[0].force.directions):
        notes.append(
            "there are no maps of the workspace: the tip moves in a surface that no grid along the base axes fills"
        )
    elif workspace:
        mapped = workspace_map(trial.arm, spacing=spacing, carries_weight=hand.gravity_feedforward, **setting)  # type: ignore[arg-type]
        progress("feeling", parts, parts)
    return Feel(
        trial=trial.title,
        hand=hand,
        motion=motion,
        states=tuple(states),
        arc=motion.arc[some],
        abilities=abilities,
        workspace=mapped,
        warnings=(*map(str, trial.findings), *notes, CAUTION),
    )


def _motion(trial: Trial, hand: Hand, trajectory: Trajectory | None) -> HandMotion:
    if hand.run is None:
        plan = plan_trial(trial, near_singular=True) if trajectory is None else trajectory
        return planned_motion(trial.arm, plan, bandwidth=hand.bandwidth, space=trial.path.space)
    run = trial.run(hand.run)
    if not run.laps:
        raise InputError(
            f"the run `{run.name}` that the hand led has no log",
            "add `logs` to it, or take `run` out: then the planned path is the motion",
            file=trial.source,
            place="[hand] run",
        )
    return logged_motion(trial.arm, run.laps[0], name=run.name, bandwidth=hand.bandwidth)
