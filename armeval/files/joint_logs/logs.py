"""The logs of a trial's runs: which files a pattern names, and their laps in file-name order."""

from __future__ import annotations

import itertools
import os
from collections.abc import Mapping, Sequence
from concurrent.futures import ThreadPoolExecutor, as_completed
from dataclasses import replace
from pathlib import Path

from armeval.errors import Findings, InputError
from armeval.files.joint_logs.bag_table import BAG_INDEX
from armeval.files.text_file import what_is_there
from armeval.model.arm import Arm
from armeval.model.joint_log import JointLog
from armeval.progress import Progress, silent

_WILD = "*?["


def find_logs(folder: Path, patterns: Sequence[str], findings: Findings, *, place: str) -> tuple[Path, ...]:
    """List the log files of one run.

    Parameters
    ----------
    folder
        What the patterns are relative to.
    patterns
        File names, with ``*`` and ``?`` where they name several.
    findings, place
        A pattern that names nothing is noted, with what is there.

    Returns
    -------
    The files that each pattern names, in plain file-name order; each file once.
    """
    files: dict[Path, None] = {}
    for pattern in patterns:
        wanted = folder / pattern
        one_file = wanted.is_file() or not any(mark in pattern for mark in _WILD)
        named = [wanted] if one_file else _matching(wanted)
        if not named:
            findings.error(f"no log matches `{pattern}`", what_is_there(wanted.parent), place=place)
        _doubtful_order(named, findings, place)
        files.update(dict.fromkeys(named))
    return tuple(files)


def _matching(wanted: Path) -> list[Path]:
    """Files that a pattern names; wildcards may stand in folder names too."""
    parts = wanted.parts
    first = next(index for index, part in enumerate(parts) if any(mark in part for mark in _WILD))
    fixed, wild = Path(*parts[:first]), str(Path(*parts[first:]))
    try:
        found = (file for file in fixed.glob(wild) if _is_log(file) and not file.name.startswith("."))
        return sorted(found, key=lambda file: file.parts)
    except (OSError, ValueError, NotImplementedError):
        return []


def _is_log(file: Path) -> bool:
    """Whether it can be a log: a file, or the folder of a bag."""
    return file.is_file() or (file / BAG_INDEX).is_file()


def _doubtful_order(files: Sequence[Path], findings: Findings, place: str) -> None:
    """Note where plain order puts number 10 before number 2: laps are counted in plain order."""
    for first, second in itertools.pairwise(files):
        common = _common_start(first.name, second.name)
        one, other = (_leading_number(file.name[len(common) :]) for file in (first, second))
        if common and not common[-1].isdigit() and one is not None and other is not None and one > other:
            findings.warning(
                f"`{first.name}` comes before `{second.name}`: laps count in plain file-name order",
                "write the numbers with leading zeros if the order matters",
                place=place,
            )
            return


def _common_start(one: str, other: str) -> str:
    same = itertools.takewhile(lambda pair: pair[0] == pair[1], zip(one, other, strict=False))
    return "".join(letter for letter, _ in same)


def _leading_number(text: str) -> int | None:
    digits = text[: next((index for index, letter in enumerate(text) if letter not in "0123456789"), len(text))]
    return int(digits) if digits else None


def read_logs(
    runs: Sequence[Sequence[Path]],
    arm: Arm,
    columns: Mapping[str, str],
    findings: Findings,
    progress: Progress = silent,
) -> list[tuple[JointLog, ...]]:
    """Read the logs of all runs, several at a time.

    Parameters
    ----------
    runs
        Files of each run, in the order in which their laps count.
    arm
        Whose joints the logs hold.
    columns
        What foreign headers mean.
    findings
        Warnings and errors of all files, in the order of the files.
    progress
        Told after every file.

    Returns
    -------
    The laps of each run, counted from 1 on over its files; a run with a faulty file lacks that file's laps.
    """
    from armeval.files.joint_logs.log_file import read_joint_log

    files = list(dict.fromkeys(file for run in runs for file in run))
    heard = {file: Findings(os.fspath(file)) for file in files}
    read: dict[Path, tuple[JointLog, ...]] = {}

    def read_one(file: Path) -> tuple[JointLog, ...]:
        return read_joint_log(file, arm, columns=columns or None, findings=heard[file])

    with ThreadPoolExecutor(max_workers=min(8, os.cpu_count() or 1)) as pool:
        waiting = {pool.submit(read_one, file): file for file in files}
        for done, future in enumerate(as_completed(waiting), start=1):
            file = waiting[future]
            try:
                read[file] = future.result()
            except InputError as fault:
                heard[file].take(fault)
            progress("reading logs", done, len(files))
    for file in files:
        findings.extend(heard[file].found)
    return [_counted([log for file in run for log in read.get(file, ())]) for run in runs]


def _counted(laps: Sequence[JointLog]) -> tuple[JointLog, ...]:
    return tuple(replace(log, lap=number) for number, log in enumerate(laps, start=1))
