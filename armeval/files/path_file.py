"""The path file: tip points or joint targets, with time or without, to a planned path and back."""

from __future__ import annotations

import os
from collections.abc import Sequence
from typing import Literal

import numpy as np

from armeval.errors import Findings, InputError
from armeval.files.tables.columns import factor, find, missing, unused
from armeval.files.tables.dialect import Column
from armeval.files.tables.reading import Reading
from armeval.files.tables.row_faults import refuse_time_that_does_not_rise
from armeval.files.tables.scaled import Scaled
from armeval.files.tables.table import open_table
from armeval.files.tables.table_writer import write_table
from armeval.model.planned_path import PlannedPath

_AXES = ("x", "y", "z")


def read_path(
    path: str | os.PathLike[str],
    joints: Sequence[str],
    prismatic: Sequence[bool],
    *,
    findings: Findings | None = None,
) -> PlannedPath:
    """Read a path: ``x [mm], y [mm], z [mm]``, or ``<joint>.angle [deg]`` for every joint; optionally ``time [s]``.

    Parameters
    ----------
    path
        A delimited text table, plain or gzip.
    joints
        The arm's joints in the chain's order.
    prismatic
        Whether each of them slides: then its targets are lengths.
    findings
        Gathers the warnings; None: they are Python's own warnings.

    Returns
    -------
    PlannedPath
        Points in m (tip, base frame) or rad and m (joints), time in s.

    Raises
    ------
    InputError
        With everything that is wrong in the file, by row and column.
    """
    with Reading(path, findings) as found:
        table = open_table(path)
        columns = table.columns
        targets = [f"{joint}.angle" for joint in joints]
        space, names, units = _kind(columns, targets, prismatic)
        known = [find(columns, name, found) for name in names]
        if absent := [name for name, place in zip(names, known, strict=True) if place is None]:
            missing(columns, absent, f"`{absent[0]} [{'mm' if space == 'tip' else 'deg'}]`", found)
        timed = find(columns, "time", found)
        places = [place for place in known if place is not None]
        factors = [factor(columns[i], unit, found) for i, unit in zip(known, units, strict=True) if i is not None]
        time_factor = 1.0 if timed is None else factor(columns[timed], "s", found)
        unused(columns, [*places, *(() if timed is None else (timed,))], found, [*_AXES, *targets, "time"])
        found.raise_errors()

        groups = [[Scaled(*pair) for pair in zip(places, factors, strict=True)]]
        if timed is not None:
            groups.append([Scaled(timed, time_factor)])
        points, *rest = table.read(groups)
        time = rest[0][:, 0] if rest else None
        if time is not None:
            stuck = np.flatnonzero(np.diff(time) <= 0.0) + 1
            mend = "put the rows in the order of time"
            refuse_time_that_does_not_rise(time, stuck, range(len(time)), mend, table, found)
            found.raise_errors()
        return PlannedPath(points, space, time, os.fspath(path))


def _kind(
    columns: Sequence[Column], targets: Sequence[str], prismatic: Sequence[bool]
) -> tuple[Literal["tip", "joint"], Sequence[str], Sequence[str]]:
    """Tell tip points from joint targets, with the names and units of their columns."""
    names = {column.name for column in columns}
    has_tip = not names.isdisjoint(_AXES)
    has_joints = any(name.endswith(".angle") for name in names)
    if has_tip and has_joints:
        raise InputError("it has both tip points and joint targets", "keep one kind of them", place="header")
    if has_joints:
        return "joint", targets, ["m" if slides else "rad" for slides in prismatic]
    if not has_tip:
        have = ", ".join(f"`{column.text}`" for column in columns)
        due = ", ".join(f"{target} [..]" for target in targets)
        raise InputError(
            f"it has neither tip points nor joint targets: {have}",
            f"write the header `x [mm], y [mm], z [mm]` or `{due}`",
            place="header",
        )
    return "tip", _AXES, ("m", "m", "m")


def write_path(
    path: PlannedPath,
    file: str | os.PathLike[str],
    joints: Sequence[str] = (),
    prismatic: Sequence[bool] | None = None,
) -> None:
    """Write a path so that reading it gives the same numbers.

    Parameters
    ----------
    path
        What to write.
    file
        Where to; packed where the name ends in ``.gz``.
    joints, prismatic
        Names of the joints and whether they slide (default: none does); only for a path of joint targets.

    Raises
    ------
    InputError
        If the joints do not match the path, or the file cannot be written.
    """
    names = [f"{axis} [m]" for axis in _AXES]
    if path.space == "joint":
        slides = [False] * len(joints) if prismatic is None else list(prismatic)
        if not len(joints) == len(slides) == path.points.shape[1]:
            raise InputError(f"{len(joints)} joints for a path of {path.points.shape[1]}", "name every joint once")
        names = [f"{joint}.angle [{'m' if slide else 'rad'}]" for joint, slide in zip(joints, slides, strict=True)]
    table = dict(zip(names, path.points.T, strict=True))
    write_table(file, table if path.time is None else {"time [s]": path.time, **table})
