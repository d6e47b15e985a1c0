"""``armeval map``: what do these cog maps say?"""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING, Annotated

import typer

from armeval.cli.answer import AsJson, Force, OutFolder

if TYPE_CHECKING:
    from armeval.evaluate.cog_report import CogReport

_ORDERS_SHOWN = 4


def maps(
    file: Annotated[Path, typer.Argument(metavar="TRIAL", help="A trial.toml or an arm.toml.", show_default=False)],
    second: Annotated[
        Path | None,
        typer.Option("--second", metavar="FILE", help="Another trial or arm: how well do its maps agree with these?"),
    ] = None,
    out: OutFolder = None,
    as_json: AsJson = False,
    force: Force = False,
) -> None:
    """What do these cog maps say? Orders, peak-to-peak, friction, detents, noise, agreement of two maps."""
    from armeval.cli.answer import hand_over
    from armeval.evaluate.cog_report import cog_report
    from armeval.files.maps import read_maps

    read = read_maps(file)
    other = read_maps(second) if second is not None else None
    findings = (*read.findings, *(other.findings if other is not None else ()))
    report = cog_report(
        read.arm,
        title=read.title,
        compensation=read.compensation,
        second=None if other is None else {d.joint: d.cog_map for d in other.arm.drives if d.cog_map is not None},
        warnings=[str(finding) for finding in findings],
    )
    tables = {"maps": report.to_frame(), "orders": report.orders_frame()}
    hand_over(report, maps_text(report), tables, name="map", findings=findings, as_json=as_json, out=out, force=force)


def maps_text(report: CogReport) -> str:
    """Write the maps as tables: one row a joint, then its strongest orders, then how two maps agree."""
    from armeval.cli.text_table import text_table
    from armeval.units import angle_text, significant, torque_text

    rows = []
    for entry in report.maps:
        cog_map = entry.cog_map
        rows.append(
            [
                entry.joint,
                torque_text(entry.cogging.peak_to_peak),
                torque_text(entry.cogging.rms),
                "one direction only" if cog_map.friction is None else torque_text(cog_map.friction),
                torque_text(cog_map.noise, 2),
                f"{len(entry.detents)}",
                f"{significant(100.0 * entry.residual.share, 2)} %",
                angle_text(entry.residual.break_even_angle, 2),
            ]
        )
    title = f"{report.title}: cogging on the motor side"
    head = [
        "joint",
        "peak to peak",
        "rms",
        "friction",
        "noise",
        "detents",
        "left by the table",
        "break-even index error",
    ]
    parts = [title, text_table(head, rows)]
    rows = [
        [entry.joint, f"{order.order}", torque_text(order.amplitude), angle_text(order.phase), order.kind]
        for entry in report.maps
        for order in entry.orders[:_ORDERS_SHOWN]
    ]
    if rows:
        parts.append(text_table(["joint", "order", "amplitude", "phase", "as slots and poles let expect"], rows))
    if report.agreements:
        rows = [
            [
                both.joint,
                angle_text(both.shift, 2),
                significant(both.correlation, 3),
                torque_text(both.residual_rms, 2),
            ]
            for both in report.agreements
        ]
        parts.append(text_table(["joint", "shift of the second map", "correlation", "rms difference"], rows))
    return "\n\n".join(parts)
