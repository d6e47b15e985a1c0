"""What the cog maps of an arm say: the answer of ``map``."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from armeval.arrays import FloatArray
from armeval.errors import InputError
from armeval.evaluate.cogging.cog_agreement import MapAgreement, agreement
from armeval.evaluate.cogging.cog_loss import CogResidual, residual
from armeval.evaluate.cogging.cog_orders import CogOrder, detents, expected_orders, orders, significant_part
from armeval.evaluate.document import JsonValue, as_text, document
from armeval.model.arm import Arm
from armeval.model.cogmap import CogMap
from armeval.model.drive import Drive
from armeval.model.trial import Compensation
from armeval.units import angle_text, torque_text

if TYPE_CHECKING:
    import pandas as pd


@dataclass(frozen=True, eq=False)
class JointMap:
    """The cog map of one joint's motor and what it says; all on the motor side.

    Attributes
    ----------
    joint
        The joint's name.
    cog_map
        The map as measured.
    cogging
        The same without its noise, which would add to the peaks.
    orders
        The orders that stand out of the noise, largest first.
    detents
        Shape (d,) [rad]. Stable rest angles.
    expected_order
        The native order that slots and poles let expect; None where they are not known.
    residual
        What the compensation table leaves of the cogging.
    """

    joint: str
    cog_map: CogMap
    cogging: CogMap
    orders: tuple[CogOrder, ...]
    detents: FloatArray
    expected_order: int | None
    residual: CogResidual

    @property
    def figures(self) -> dict[str, JsonValue]:
        """The figures that have one value for the whole map, by their names in the JSON document."""
        cog_map, ripple = self.cog_map, self.cog_map.friction_ripple
        return {
            "peak_to_peak_Nm": self.cogging.peak_to_peak,
            "rms_Nm": self.cogging.rms,
            "friction_Nm": cog_map.friction,
            "friction_ripple_rms_Nm": None if ripple is None else float(np.std(ripple)),
            "noise_Nm": cog_map.noise,
            "noise_from": cog_map.noise_from,
            "removed_mean_Nm": cog_map.removed_mean,
            "directions": cog_map.directions,
            "direction_lag_rad": cog_map.direction_lag,
            "samples": cog_map.samples,
            "angles": cog_map.distinct,
            "widest_gap_rad": cog_map.widest_gap,
            "highest_order": cog_map.bandwidth,
            "expected_order": self.expected_order,
            "quantity": cog_map.quantity,
            "file": cog_map.source or None,
        }

    def to_document(self) -> dict[str, JsonValue]:
        """Give the map's entry in the JSON document."""
        return {
            "joint": self.joint,
            **self.figures,
            "orders": [
                {
                    "order": order.order,
                    "amplitude_Nm": order.amplitude,
                    "phase_rad": order.phase,
                    "amplitude_noise_Nm": order.amplitude_noise,
                    "kind": order.kind,
                }
                for order in self.orders
            ],
            "detents_rad": self.detents,
            "compensation": {
                "rms_before_Nm": self.residual.cogging_rms,
                "rms_after_Nm": self.residual.rms,
                "noise_rms_Nm": self.residual.noise_rms,
                "share_left": self.residual.share,
                "break_even_index_error_rad": self.residual.break_even_angle,
                "orders": [
                    {"order": left.order, "rms_after_Nm": left.rms, "share_left": left.share}
                    for left in self.residual.orders
                ],
            },
        }


@dataclass(frozen=True, eq=False)
class CogReport:
    """What the cog maps of an arm say.

    Attributes
    ----------
    title
        What the maps belong to: the trial, the arm or a file.
    maps
        One a joint that has a map, from the base to the tip.
    agreements
        Comparison with a second set of maps, where there was one.
    warnings
        What is doubtful, in words.
    """

    title: str
    maps: tuple[JointMap, ...]
    agreements: tuple[MapAgreement, ...] = ()
    warnings: tuple[str, ...] = ()

    def to_frame(self) -> pd.DataFrame:
        """One row a map: the figures for the whole of it, and what compensation leaves."""
        import pandas as pd

        return pd.DataFrame(
            {
                "joint": entry.joint,
                **entry.figures,
                "detents": len(entry.detents),
                "strongest_order": entry.orders[0].order if entry.orders else None,
                "share_left": entry.residual.share,
                "break_even_index_error_rad": entry.residual.break_even_angle,
            }
            for entry in self.maps
        )

    def orders_frame(self) -> pd.DataFrame:
        """One row a joint and order, with what compensation leaves of it."""
        import pandas as pd

        return pd.DataFrame(
            [
                {
                    "joint": entry.joint,
                    "order": order.order,
                    "amplitude_Nm": order.amplitude,
                    "phase_rad": order.phase,
                    "amplitude_noise_Nm": order.amplitude_noise,
                    "kind": order.kind,
                    "share_left": left.share,
                }
                for entry in self.maps
                for order, left in zip(entry.orders, entry.residual.orders, strict=True)
            ],
            columns=["joint", "order", "amplitude_Nm", "phase_rad", "amplitude_noise_Nm", "kind", "share_left"],
        )

    def to_document(self) -> dict[str, JsonValue]:
        """Give the JSON document ``armeval/map/1``."""
        return document(
            "map",
            self.title,
            self.warnings,
            {
                "maps": [entry.to_document() for entry in self.maps],
                "agreement": [entry.to_document() for entry in self.agreements],
            },
        )

    def to_json(self) -> str:
        """Write the document as JSON text."""
        return as_text(self.to_document())


def joint_map(drive: Drive, compensation: Compensation | None = None) -> JointMap:
    """Say what the cog map of one drive tells.

    Raises
    ------
    InputError
        If the drive has no cog map.
    """
    if drive.cog_map is None:
        raise InputError("the joint has no cog map", "add `cog_map`", place=f"[joint.{drive.joint}]")
    return JointMap(
        joint=drive.joint,
        cog_map=drive.cog_map,
        cogging=significant_part(drive.cog_map),
        orders=orders(drive.cog_map, slots=drive.slots, poles=drive.poles),
        detents=detents(drive.cog_map),
        expected_order=expected_orders(drive.slots, drive.poles).fundamental,
        residual=residual(drive.cog_map, compensation or Compensation()),
    )


def cog_report(
    arm: Arm,
    *,
    title: str = "",
    compensation: Compensation | None = None,
    second: Mapping[str, CogMap] | None = None,
    warnings: Sequence[str] = (),
) -> CogReport:
    """Say what the cog maps of an arm tell.

    Parameters
    ----------
    arm
        The arm; joints without a map are left out.
    title
        What the maps belong to; default: the arm's name.
    compensation
        What the firmware's table can do.
    second
        Maps to compare with, by joint.
    warnings
        What was doubtful so far.

    Raises
    ------
    InputError
        If no joint has a map, or a second map belongs to a joint that has none.
    """
    maps = tuple(joint_map(drive, compensation) for drive in arm.drives if drive.cog_map is not None)
    if not maps:
        raise InputError(f"no joint of {arm.name} has a cog map", "add `cog_map` to a [joint] table")
    first = {entry.joint: entry.cog_map for entry in maps}
    lost = [joint for joint in second or {} if joint not in first]
    if lost:
        raise InputError(f"`{lost[0]}` has no cog map to compare with", f"joints with a map: {', '.join(first)}")
    return CogReport(
        title=title or arm.name,
        maps=maps,
        agreements=tuple(agreement(first[joint], other, joint=joint) for joint, other in (second or {}).items()),
        warnings=(*warnings, *(f"{entry.joint}: {said}" for entry in maps for said in _doubts(entry))),
    )


def _doubts(entry: JointMap) -> list[str]:
    """Say what makes a map less useful than it looks."""
    said = []
    if not entry.orders:
        return ["no order stands out of the noise of the cog map"]
    strongest = entry.orders[0]
    if strongest.kind == "unexpected":
        said.append(
            f"the strongest order, {strongest.order} ({torque_text(strongest.amplitude)}), is a multiple of neither "
            "slots nor poles: are they right, and is the angle the motor's?"
        )
    if strongest.order == 1:
        said.append("order 1 is the strongest: an unbalanced load on the shaft looks like that")
    if entry.residual.share >= 1.0:
        said.append(
            "compensation with this table does more harm than good: "
            f"the index error must stay below {angle_text(entry.residual.break_even_angle)}"
        )
    return said
