"""What to do about a region: one plain sentence with numbers from the evidence."""

from __future__ import annotations

from collections.abc import Sequence

from armeval.evaluate.lap_track import LapTrack
from armeval.evaluate.regions import Region
from armeval.model.arm import Arm
from armeval.model.trial import Compensation


def action(arm: Arm, region: Region, tracks: Sequence[LapTrack], *, compensation: Compensation) -> str:
    """Say what would help in a region.

    Parameters
    ----------
    arm
        The arm.
    region
        Where it sticks.
    tracks
        The laps of its run.
    compensation
        What the firmware's table can do.
    """
    return ""
