"""The comparison: what compensation changed, run against run along one path."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING, Protocol

from armeval.arrays import FloatArray
from armeval.evaluate.document import JsonValue
from armeval.evaluate.measuring.intervals import reduction_interval
from armeval.evaluate.run_errors import RunErrors

if TYPE_CHECKING:
    import pandas as pd


class Documented(Protocol):
    """Something that knows its entry in a JSON document: a region of sticking."""

    def to_document(self) -> dict[str, JsonValue]: ...  # noqa: D102  (the class docstring says it)


@dataclass(frozen=True)
class Comparison:
    """RMS of one run against another.

    Reductions are fractions, 1 - RMS after / RMS before, with the ends of their 95 % intervals: 0.5 is an error halved,
    below 0 it has grown.

    Attributes
    ----------
    before, after
        Names of the runs.
    tracking_reduction, tracking_reduction_low, tracking_reduction_high
        Of the tracking error.
    deviation_reduction, deviation_reduction_low, deviation_reduction_high
        Of the path deviation.
    regions_before, regions_after
        Where joints stick in each run, where that was asked for.
    """

    before: str
    after: str
    tracking_reduction: float
    tracking_reduction_low: float
    tracking_reduction_high: float
    deviation_reduction: float
    deviation_reduction_low: float
    deviation_reduction_high: float
    regions_before: tuple[Documented, ...] = ()
    regions_after: tuple[Documented, ...] = ()

    def to_frame(self) -> pd.DataFrame:
        """One row a kind of error."""
        import pandas as pd

        return pd.DataFrame(
            [
                {
                    "before": self.before,
                    "after": self.after,
                    "error": error,
                    "reduction": getattr(self, f"{error}_reduction"),
                    "reduction_low": getattr(self, f"{error}_reduction_low"),
                    "reduction_high": getattr(self, f"{error}_reduction_high"),
                }
                for error in ("tracking", "deviation")
            ]
        )

    def to_document(self) -> dict[str, JsonValue]:
        """Give the `comparison` entry of the report's JSON document."""
        return {
            "before": self.before,
            "after": self.after,
            "tracking_reduction": self.tracking_reduction,
            "tracking_reduction_low": self.tracking_reduction_low,
            "tracking_reduction_high": self.tracking_reduction_high,
            "deviation_reduction": self.deviation_reduction,
            "deviation_reduction_low": self.deviation_reduction_low,
            "deviation_reduction_high": self.deviation_reduction_high,
            "regions_before": [region.to_document() for region in self.regions_before],
            "regions_after": [region.to_document() for region in self.regions_after],
        }


def compare(
    before: RunErrors,
    after: RunErrors,
    *,
    regions_before: Sequence[Documented] = (),
    regions_after: Sequence[Documented] = (),
) -> Comparison:
    """Hold one run against another over the same path.

    Parameters
    ----------
    before, after
        Two runs along the same planned path; their errors are paired by arc length.
    regions_before, regions_after
        Where joints stick in each.
    """
    arcs = [lap.arc for lap in before.tracks], [lap.arc for lap in after.tracks]

    def reduction(
        old: float, new: float, pairs: tuple[list[FloatArray], list[FloatArray]]
    ) -> tuple[float, float, float]:
        low, high = reduction_interval(*pairs, *arcs)
        return (1.0 - new / old if old > 0.0 else float("nan")), low, high

    tracking = reduction(
        before.tracking.rms,
        after.tracking.rms,
        ([lap.tracking for lap in before.tracks], [lap.tracking for lap in after.tracks]),
    )
    deviation = reduction(
        before.deviation.rms,
        after.deviation.rms,
        ([lap.deviation for lap in before.tracks], [lap.deviation for lap in after.tracks]),
    )
    return Comparison(
        before.name,
        after.name,
        *tracking,
        *deviation,
        regions_before=tuple(regions_before),
        regions_after=tuple(regions_after),
    )
