"""Where along the path the arm sticks, which joint, and why: from logs and from predictions alike."""

from __future__ import annotations

import re
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING, Literal

from armeval.errors import InputError
from armeval.evaluate.document import JsonValue, as_text, document
from armeval.evaluate.lap_track import LapTrack
from armeval.evaluate.replaying.sticking_ratio import StickingRatio
from armeval.evaluate.sticking.action import action, fastest_told
from armeval.evaluate.sticking.carried_through import CarriedThrough, carried_through
from armeval.evaluate.sticking.cause import Counterfactual, find_causes
from armeval.evaluate.sticking.regions import Counterpart, Region, counterparts, regions
from armeval.evaluate.sticking.rests import sticking_events
from armeval.evaluate.sticking.sticking_event import StickingEvent
from armeval.model.arm import Arm
from armeval.model.trial import Compensation, StickingRule
from armeval.units import angle_text, length_text, time_text

if TYPE_CHECKING:
    import pandas as pd


@dataclass(frozen=True, eq=False)
class RunSticking:
    """Where the arm sticks in one run.

    Attributes
    ----------
    name, compensated, source
        The run; ``source`` is ``log`` or ``prediction``.
    laps
        How many laps were looked at.
    events
        Every rest, lap by lap in order of time.
    jumps
        Every sudden motion without a rest before it (a skipped cog).
    regions
        Where rests recur, the most harmful first.
    carried
        For a prediction with its sticking ratio: joint by joint, where the two disagree.
    """

    name: str
    compensated: bool
    source: Literal["log", "prediction"]
    laps: int
    events: tuple[StickingEvent, ...]
    jumps: tuple[StickingEvent, ...]
    regions: tuple[Region, ...]
    carried: tuple[CarriedThrough, ...] = ()

    def to_document(self) -> dict[str, JsonValue]:
        """Give the run's entry in the JSON document."""
        return {
            "name": self.name,
            "compensated": self.compensated,
            "source": self.source,
            "of_laps": self.laps,
            "events": [event.to_document() for event in self.events],
            "jumps": [event.to_document() for event in self.jumps],
            "regions": [region.to_document() for region in self.regions],
            **({"carried_through": [joint.to_document() for joint in self.carried]} if self.carried else {}),
        }


@dataclass(frozen=True)
class Matching:
    """The regions of one run beside those of another.

    Attributes
    ----------
    kind
        ``compensation``: bare beside compensated; ``prediction``: measured beside predicted.
    first, second
        The runs' places in :attr:`Location.runs`, from 0.
    pairs
        Region beside region; with ``prediction`` a pair that lacks one side was found by the other alone.
    """

    kind: Literal["compensation", "prediction"]
    first: int
    second: int
    pairs: tuple[Counterpart, ...]


@dataclass(frozen=True, eq=False)
class Location:
    """Where the arm sticks, run by run.

    Attributes
    ----------
    runs
        In the order in which their laps were given.
    matchings
        Bare beside compensated, and measured beside predicted, wherever both are there.
    trial
        The trial's title.
    warnings
        What the reader should know.
    """

    runs: tuple[RunSticking, ...]
    matchings: tuple[Matching, ...] = ()
    trial: str = ""
    warnings: tuple[str, ...] = ()

    def to_frame(self) -> pd.DataFrame:
        """One row a rest or jump, in SI units with the unit in the column's name."""
        import pandas as pd

        rows = [
            {"run": run.name, "compensated": run.compensated, "source": run.source, **_flat(event.to_document())}
            for run in self.runs
            for event in (*run.events, *run.jumps)
        ]
        return pd.DataFrame(rows)

    def regions_frame(self) -> pd.DataFrame:
        """One row a region, most harmful first within each run."""
        import pandas as pd

        rows = [
            {"run": run.name, "compensated": run.compensated, "source": run.source, **region.to_document()}
            for run in self.runs
            for region in run.regions
        ]
        return pd.DataFrame(rows)

    def to_document(self) -> dict[str, JsonValue]:
        """Give the JSON document."""
        content = {
            "runs": [run.to_document() for run in self.runs],
            "matchings": [self._matching_document(matching) for matching in self.matchings],
        }
        return document("locate", self.trial, self.warnings, content)

    def to_json(self) -> str:
        """Give the JSON document as text."""
        return as_text(self.to_document())

    def to_text(self, *, most: int = 5) -> str:
        """Write a short ranked table with the sentence of action under each region.

        Parameters
        ----------
        most
            So many regions of each run, the most harmful first.
        """
        return "\n\n".join(_run_text(run, most) for run in self.runs) + "\n"

    def _matching_document(self, matching: Matching) -> dict[str, JsonValue]:
        first, second = self.runs[matching.first], self.runs[matching.second]
        found = {"gone": "first only", "new": "second only"}
        pairs = []
        for pair in matching.pairs:
            region = first.regions[pair.first] if pair.first is not None else second.regions[pair.second or 0]
            fate = pair.fate if matching.kind == "compensation" else found.get(pair.fate, "both")
            pairs.append(
                {
                    "joint": region.joint,
                    "start_m": region.start_arc,
                    "end_m": region.end_arc,
                    "first_region": pair.first,
                    "second_region": pair.second,
                    "fate" if matching.kind == "compensation" else "found_in": fate,
                }
            )
        return {
            "kind": matching.kind,
            "first": {"name": first.name, "source": first.source},
            "second": {"name": second.name, "source": second.source},
            "regions": pairs,
        }


def locate(
    arm: Arm,
    tracks_by_run: Sequence[Sequence[LapTrack]],
    *,
    rule: StickingRule | None = None,
    compensation: Compensation | None = None,
    counterfactuals: Mapping[str, Counterfactual] | None = None,
    ratios: Mapping[str, StickingRatio] | None = None,
    trial: str = "",
    warnings: Sequence[str] = (),
) -> Location:
    """Find where the arm sticks, which joint, and why.

    Parameters
    ----------
    arm
        The arm.
    tracks_by_run
        The laps of each run, measured or predicted; runs without laps are passed over.
    rule
        When a joint counts as resting; default: the definition's thresholds.
    compensation
        What the firmware's table can do; needed to say what it leaves in compensated runs.
    counterfactuals
        By the name of the run: replays of that run with a cause taken out, for predicted laps.
    ratios
        By the name of the run: its sticking ratio along the samples of its predicted lap.
    trial
        Title for the document.
    warnings
        What the reader should know already.

    Raises
    ------
    InputError
        If there is no lap at all, or laps of different arms.
    """
    rule = rule or StickingRule()
    compensation = compensation or Compensation()
    laps_by_run = [tuple(tracks) for tracks in tracks_by_run if len(tracks)]
    if not laps_by_run:
        raise InputError("there is no lap to look at", "give logs, or predict the run first")
    for track in (track for laps in laps_by_run for track in laps):
        if track.angle.shape[1] != arm.chain.count:
            raise InputError(
                f"a lap of run `{track.run}` has {track.angle.shape[1]} joints, the arm {arm.chain.count}",
                "give laps of this arm",
                file=track.file or "",
            )
    runs = []
    for laps in laps_by_run:
        first = laps[0]
        counterfactual = (counterfactuals or {}).get(first.run) if first.source == "prediction" else None
        found = [event for track in laps for event in sticking_events(arm, track, rule)]
        found = find_causes(arm, laps, found, rule=rule, compensation=compensation, counterfactual=counterfactual)
        rests = tuple(event for event in found if event.kind == "rest")
        asked = fastest_told(laps)
        merged = tuple(
            replace(region, action=action(arm, region, laps, rests, asked=asked, compensation=compensation))
            for region in regions(laps, rests)
        )
        jumps = tuple(event for event in found if event.kind == "jump")
        ratio = (ratios or {}).get(first.run) if first.source == "prediction" else None
        carried = carried_through(arm, first, ratio, found, rule) if ratio is not None else ()
        runs.append(RunSticking(first.run, first.compensated, first.source, len(laps), rests, jumps, merged, carried))
    return Location(tuple(runs), _matchings(runs), trial, tuple(warnings))


def _matchings(runs: Sequence[RunSticking]) -> tuple[Matching, ...]:
    """Pair bare with compensated runs of one source, and measured with predicted runs of one name."""
    found = []
    for i, one in enumerate(runs):
        for j, other in enumerate(runs):
            if one.source == other.source and not one.compensated and other.compensated:
                found.append(Matching("compensation", i, j, counterparts(one.regions, other.regions)))
            if one.name == other.name and one.source == "log" and other.source == "prediction":
                found.append(Matching("prediction", i, j, counterparts(one.regions, other.regions)))
    return tuple(found)


def _flat(entry: dict[str, JsonValue]) -> dict[str, JsonValue]:
    routes = entry.pop("routes")
    return {**entry, "routes": "; ".join(f"{route['name']}: {route['says']}" for route in routes)}


def _behind(lag: float) -> str:
    way = ("falls", "behind") if lag >= 0.0 else ("comes", "nearer")
    return f"the tip {way[0]} {length_text(abs(lag), 2)} {way[1]}"


def _run_text(run: RunSticking, most: int) -> str:
    how = "measured" if run.source == "log" else "predicted"
    state = "compensated" if run.compensated else "bare"
    name = f"{run.name} ({state}, {how}, {run.laps} lap{'' if run.laps == 1 else 's'})"
    carried = [f"     {joint.text}" for joint in run.carried if joint.text]
    if not run.regions:
        return "\n".join((f"{name}: no joint sticks.", *carried))
    head = f"{name}: {len(run.regions)} region{'' if len(run.regions) == 1 else 's'}, the most harmful first"
    lines = [head]
    said: dict[str, int] = {}
    for rank, region in enumerate(run.regions[:most], start=1):
        lines.append(
            f"{rank:3d}. {region.joint} at {length_text(region.start_arc, 4)} to {length_text(region.end_arc, 4)}: "
            f"{region.laps} of {region.of_laps} laps, rests {time_text(region.dwell, 2)} "
            f"at {angle_text(region.joint_angle)}, {_behind(region.lag)}, "
            f"then springs {length_text(region.release_distance, 2)}; {region.cause}; "
            f"{100.0 * region.harm:.1f} % of the squared error"
        )
        if region.action:
            lines.append(f"     {_unless_said(region.action, rank, said)}")
    if len(run.regions) > most:
        lines.append(f"     and {len(run.regions) - most} more")
    return "\n".join((*lines, *carried))


def _unless_said(text: str, rank: int, said: dict[str, int]) -> str:
    """Point to the region where a sentence stands already, and note the new ones."""
    new = []
    for sentence in re.split(r"(?<=\.) (?=[A-Z])", text):
        where = said.setdefault(sentence, rank)
        told = sentence if where == rank else f"As for {where}."
        if told not in new:
            new.append(told)
    return " ".join(new)
