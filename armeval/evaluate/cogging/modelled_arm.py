"""The arm as predictions take it: without what its cog maps owe to the measurement."""

from __future__ import annotations

from dataclasses import replace

from armeval.evaluate.cogging.cog_orders import significant_part
from armeval.model.arm import Arm


def modelled(arm: Arm) -> Arm:
    """Give the arm with each cog map reduced to the orders that stand out of its noise.

    What the noise of a map looks like is not what the rotor does: taken for cogging it would add slope, and with it
    sticking that never comes. Each map still tells how large its noise is, so that the table that the firmware is
    given (:func:`armeval.evaluate.cogging.cog_loss.compensation_table`) gets it back.
    """
    drives = (
        drive if drive.cog_map is None else replace(drive, cog_map=significant_part(drive.cog_map))
        for drive in arm.drives
    )
    return replace(arm, drives=tuple(drives))


def unmapped(arm: Arm) -> list[str]:
    """Say of which joints nothing is known about their cogging."""
    return [f"joint {d.joint} has no cog map: no cogging is predicted for it" for d in arm.drives if d.cog_map is None]
