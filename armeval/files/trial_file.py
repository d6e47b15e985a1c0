"""trial.toml to trial: the arm, the path and the logs of the runs that it names."""

from __future__ import annotations

import os
from pathlib import Path
from typing import Any

from armeval.errors import Findings, InputError
from armeval.files.arm_file import ArmReading, load_arm
from armeval.files.joint_logs.logs import find_logs, read_logs
from armeval.files.tables.reading import Reading, existing_file
from armeval.files.toml_file import check_schema, read_toml, validate
from armeval.files.trial_table import TRIAL_SCHEMA, HandTable, TrialTable
from armeval.model.hand import Hand
from armeval.model.joint_log import JointLog
from armeval.model.planned_path import PlannedPath
from armeval.model.trial import Run, Trial
from armeval.progress import Progress, silent


def read_trial(
    path: str | os.PathLike[str],
    *,
    logs: bool = True,
    findings: Findings | None = None,
    progress: Progress = silent,
) -> Trial:
    """Read a trial: ``trial.toml``, and the arm, path and logs that it names.

    Parameters
    ----------
    path
        The ``trial.toml``; other files are named relative to it.
    logs
        Whether the logs are read; without them every run is predicted only.
    findings
        Gathers warnings too; they stand in ``Trial.findings`` in any case.
    progress
        Told how many logs are read.

    Raises
    ------
    InputError
        If anything in any of the files cannot be used; with all faults of all of them.
    """
    with Reading(path, Findings() if findings is None else findings) as found:
        return _load(path, found, logs, progress)


def _load(path: str | os.PathLike[str], found: Findings, with_logs: bool, progress: Progress) -> Trial:
    content = read_toml(path)
    if not check_schema(content, TRIAL_SCHEMA, found):
        raise InputError.of(found.found)
    table = validate(TrialTable, content, found)
    folder = Path(path).parent
    # A fault in the trial's own file must not hide those in the files that it names: its plain values tell which.
    named = {key: folder / content[key] for key in ("arm", "path") if isinstance(content.get(key), str)}
    reading = load_arm(named["arm"], found) if "arm" in named else ArmReading()
    planned = _path(named["path"], reading, found) if "path" in named else None
    files = _logs_of_runs(content, folder, found, with_logs)
    laps = _laps(files, content.get("columns"), reading, found, progress)
    hand = None if table is None or table.hand is None else _hand(table.hand, folder, found)
    if table is None or reading.arm is None or planned is None or found.has_errors:
        raise InputError.of(found.found)
    if planned.time is not None:
        for key in ("feed", "acceleration"):
            if getattr(table, key) is not None:
                found.warning("the path has its own time; this is not used", "take it out", place=key)
    corner = {} if table.corner_angle is None else {"corner_angle": table.corner_angle}
    return Trial(
        title=Path(path).absolute().parent.name if table.title is None else table.title,
        arm=reading.arm,
        path=planned,
        runs=tuple(Run(run.name, run.compensated, own) for run, own in zip(table.run, laps, strict=True)),
        feed=table.feed,
        acceleration=table.acceleration,
        compensation=table.compensation.value(),
        sticking=table.sticking.value(),
        uncertainty=table.uncertainty.value(),
        hand=hand,
        findings=found.warnings,
        files=(
            os.fspath(path),
            *reading.files,
            os.fspath(named["path"]),
            *([hand.thresholds.source] if hand is not None and hand.thresholds and hand.thresholds.source else []),
            *dict.fromkeys(os.fspath(file) for run in files for file in run),
        ),
        source=os.fspath(path),
        **corner,
    )


def _path(file: Path, reading: ArmReading, found: Findings) -> PlannedPath | None:
    from armeval.files.path_file import read_path

    try:
        arm = reading.arm or reading.stand_in
        if arm is None:  # no joints to look for in its header; at least it must be there
            existing_file(file)
            return None
        return read_path(file, arm.joints, [bool(slides) for slides in arm.chain.prismatic], findings=found)
    except InputError as fault:
        found.take(fault)
        return None


def _hand(table: HandTable, folder: Path, found: Findings) -> Hand | None:
    from armeval.files.thresholds_file import read_thresholds

    try:
        return table.value(read_thresholds(None if table.thresholds is None else folder / table.thresholds))
    except InputError as fault:
        found.take(fault, place="[hand]")
        return None


def _logs_of_runs(content: dict[str, Any], folder: Path, found: Findings, with_logs: bool) -> list[tuple[Path, ...]]:
    """List the log files of each run."""
    runs = content.get("run")
    wanted = [
        _texts(run.get("logs")) if isinstance(run, dict) else [] for run in (runs if isinstance(runs, list) else [])
    ]
    if not with_logs:
        return [()] * len(wanted)
    files = [
        find_logs(folder, patterns, found, place=f"[[run]] {number}, logs")
        for number, patterns in enumerate(wanted, start=1)
    ]
    everywhere = [file for run in files for file in run]
    for file in sorted({file for file in everywhere if everywhere.count(file) > 1}):
        found.warning(f"`{file}` belongs to more than one run", "let each run have its own logs", place="[[run]] logs")
    return files


def _laps(
    files: list[tuple[Path, ...]], columns: object, reading: ArmReading, found: Findings, progress: Progress
) -> list[tuple[JointLog, ...]]:
    """Read the laps of each run, if it is known which joints to look for."""
    arm = reading.arm or reading.stand_in
    if arm is None:
        return []
    renamed = {key: name for key, name in columns.items() if isinstance(name, str)} if isinstance(columns, dict) else {}
    heard = Findings(found.file)
    laps = read_logs(files, arm, renamed, heard, progress)
    # What a stand-in's encoders make doubtful is not the log's fault.
    found.extend(heard.found if reading.arm is not None else (each for each in heard.found if each.level == "error"))
    return laps


def _texts(given: object) -> list[str]:
    """Give a text, or the texts in a list, as a list."""
    entries = given if isinstance(given, list) else [given]
    return [entry for entry in entries if isinstance(entry, str)]
