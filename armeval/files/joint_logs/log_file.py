"""The joint log: a file of encoder samples to one log a lap, repaired where that is safe, and back."""

from __future__ import annotations

import os
from collections.abc import Mapping, Sequence
from dataclasses import replace
from pathlib import Path

import numpy as np

from armeval.arrays import FloatArray
from armeval.errors import Findings, InputError
from armeval.files.joint_logs.bag_table import BAG_INDEX, BAG_MAGIC, open_bag
from armeval.files.joint_logs.log_columns import LogColumns, log_columns
from armeval.files.joint_logs.log_doubts import doubt_log
from armeval.files.joint_logs.log_samples import Samples, parted, read_samples
from armeval.files.joint_logs.rollover import carry_on_clock, carry_on_joints
from armeval.files.joint_logs.time_repairs import in_order_of_time
from armeval.files.tables.columns import renamed
from armeval.files.tables.parquet_table import PARQUET_MAGIC, open_parquet
from armeval.files.tables.reading import Reading, existing_file
from armeval.files.tables.table import Table, open_table
from armeval.files.tables.table_writer import write_table
from armeval.model.arm import Arm
from armeval.model.joint_log import JointLog


def read_joint_log(
    path: str | os.PathLike[str],
    arm: Arm,
    *,
    columns: Mapping[str, str] | None = None,
    first_lap: int = 1,
    findings: Findings | None = None,
) -> tuple[JointLog, ...]:
    """Read a joint log: ``time [s]``, ``<joint>.angle [count|deg|rad]`` for every joint, and what else was logged.

    Optional are ``<joint>.target``, ``<joint>.torque [N*m]`` at the joint, ``<joint>.current [A]`` of the motor (times
    ``torque_constant`` and ``gear_ratio``), and ``lap``. Samples that came twice or late are repaired and counted,
    counters that rolled over are carried on, gaps are told; signals that contradict each other are doubted in warnings.

    Parameters
    ----------
    path
        A delimited text table, plain or gzip; a Parquet file; a ROS 2 bag or MCAP file with joint states.
    arm
        What it was logged on.
    columns
        Foreign header to ``name [unit]``.
    first_lap
        Number that the file's first lap gets.
    findings
        Gathers the warnings; None: they are Python's own warnings.

    Returns
    -------
    tuple of JointLog
        One a lap, in the order of the file.

    Raises
    ------
    InputError
        With everything that is wrong in the file, by row and column.
    """
    with Reading(path, findings) as found:
        table = open_log(path, [joint for joint, slides in zip(arm.joints, arm.chain.prismatic, strict=True) if slides])
        signals = log_columns(renamed(table.columns, columns, found), arm, found)
        samples, lap = read_samples(table, signals)
        laps = [samples]
        if lap is not None:
            carry_on_joints(samples, signals, arm, found, "", one_lap=False)
            laps = parted(samples, lap, table, found)
        if not laps or len(laps[0].time) < 2:
            raise InputError("the log has one row", "log a whole lap", place=table.places([0])[0])
        logs = []
        for index, samples in enumerate(laps):
            place = f"lap {first_lap + index}" if len(laps) > 1 else ""
            log = _log(samples, signals, table, arm, found, place)
            logs.append(replace(log, lap=first_lap + index, source=os.fspath(path)))
            doubt_log(logs[-1], arm, found, place)
        return tuple(logs)


def open_log(path: str | os.PathLike[str], sliding: Sequence[str]) -> Table:
    """Open the table of a joint log, whatever kind of file it is in: its first bytes say which.

    Parameters
    ----------
    path
        The file, or the folder of a bag.
    sliding
        Names of the joints that slide.

    Raises
    ------
    InputError
        If it cannot be read, or its header cannot.
    """
    if (Path(path) / BAG_INDEX).is_file():
        return open_bag(path, sliding)
    with existing_file(path).open("rb") as raw:
        magic = raw.read(8)
    if magic.startswith(BAG_MAGIC):
        return open_bag(path, sliding)
    if magic.startswith(PARQUET_MAGIC):
        return open_parquet(path)
    return open_table(path)


def _log(samples: Samples, signals: LogColumns, table: Table, arm: Arm, found: Findings, place: str) -> JointLog:
    """Make the log of one lap of its samples."""
    carry_on_clock(samples.time, signals.time, found, place)
    samples = in_order_of_time(samples, table, found)
    carry_on_joints(samples, signals, arm, found, place)
    for values in (samples.time, samples.angle, samples.target, samples.torque):
        if values is not None:
            _freeze(values)
    return JointLog(samples.time, samples.angle, samples.target, samples.torque, arm.resolution)


def _freeze(values: FloatArray) -> None:
    """Forbid writing into the array and what it is a view of, so that nobody needs a copy of it."""
    if isinstance(values.base, np.ndarray):
        values.base.setflags(write=False)
    values.setflags(write=False)


def write_joint_log(
    logs: JointLog | Sequence[JointLog],
    path: str | os.PathLike[str],
    joints: Sequence[str],
    prismatic: Sequence[bool] | None = None,
) -> None:
    """Write a joint log in SI so that reading it gives the same numbers.

    Parameters
    ----------
    logs
        One lap, or several of the same signals: then there is a ``lap`` column, with numbers of its own where two laps
        have the same.
    path
        Where to: ``.csv``, ``.csv.gz`` or ``.parquet``.
    joints, prismatic
        Names of the joints, and whether they slide (default: none does).

    Raises
    ------
    InputError
        If the joints do not match the log, or the file cannot be written.
    """
    laps = (logs,) if isinstance(logs, JointLog) else tuple(logs)
    slides = [False] * len(joints) if prismatic is None else list(prismatic)
    if not laps or any(len(joints) != log.angle.shape[1] for log in laps):
        raise InputError("the joints do not match the log", "name every joint once", file=path)
    table = {"time [s]": np.concatenate([log.time for log in laps])}
    for quantity, units in (("angle", ("rad", "m")), ("target", ("rad", "m")), ("torque", ("N*m", "N"))):
        values = [getattr(log, quantity) for log in laps]
        if any(each is None for each in values):
            continue
        for j, joint in enumerate(joints):
            name = f"{joint}.{quantity} [{units[bool(slides[j])]}]"
            table[name] = np.concatenate([each[:, j] for each in values])
    if len(laps) > 1:
        numbers = [log.lap for log in laps]
        if len(set(numbers)) < len(numbers):
            numbers = list(range(1, len(laps) + 1))
        table["lap"] = np.concatenate([np.full(len(log.time), float(n)) for log, n in zip(laps, numbers, strict=True)])
    write_table(Path(path), table)
