"""Samples of a log that came twice or late: found, put in order and counted, unless there are too many."""

from __future__ import annotations

import numpy as np

from armeval.arrays import BoolArray
from armeval.errors import Findings
from armeval.files.joint_logs.log_samples import Samples
from armeval.files.tables.row_faults import refuse_time_that_does_not_rise
from armeval.files.tables.table import Table
from armeval.units import time_text

_RESTARTED = "split the file where its clock starts anew, or give a `lap` column"
#: More samples than this share that are late, or stand at the time of another, are no accident.
_REPAIRABLE_SHARE = 0.05
#: Nor is a sample that is later than so many periods.
_REPAIRABLE_PERIODS = 100.0


def in_order_of_time(samples: Samples, table: Table, found: Findings) -> Samples:
    """Give the samples in rising order of time.

    A sample that equals another in everything is removed, however many there are. Up to 5 % of the samples may come
    late (by up to 100 median periods), and as many may share their time with another (the first stays): they are
    repaired with a warning. Beyond that, time is not to be trusted.

    Raises
    ------
    InputError
        If time stands still or runs back too often; names the rows.
    """
    time = samples.time
    if (time[1:] > time[:-1]).all():
        return samples
    steps = np.diff(time)
    allowed = int(_REPAIRABLE_SHARE * len(time))
    behind = np.maximum.accumulate(time) - time
    late = behind > 0.0
    rising = steps[steps > 0.0]
    farthest = _REPAIRABLE_PERIODS * float(np.median(rising)) if len(rising) else 0.0
    if late.sum() > allowed or behind.max() > farthest:
        refuse_time_that_does_not_rise(time, np.flatnonzero(steps < 0.0) + 1, samples.row, _RESTARTED, table, found)
        found.raise_errors()
    if late.any():
        found.warning(
            f"{_samples(int(late.sum()))} came late, by up to {time_text(float(behind.max()))}: put in their place",
            place=_first(late, samples, table),
        )
        samples = samples.at(np.argsort(time, kind="stable"))
    same_time = np.diff(samples.time, prepend=-np.inf) == 0.0
    twice = same_time & _equals_the_one_before(samples)
    if twice.any():
        found.warning(
            f"{_samples(int(twice.sum()))} came twice: removed",
            place=_first(twice, samples, table),
        )
    standing = same_time & ~twice
    if standing.sum() > allowed:
        refuse_time_that_does_not_rise(samples.time, np.flatnonzero(standing), samples.row, _RESTARTED, table, found)
        found.raise_errors()
    if standing.any():
        found.warning(
            f"{_samples(int(standing.sum()))} had the time of the one before: the first of each is kept",
            place=_first(standing, samples, table),
        )
    rising_in_time = np.flatnonzero(~same_time)
    if len(rising_in_time) < 2:
        refuse_time_that_does_not_rise(samples.time, np.flatnonzero(same_time), samples.row, _RESTARTED, table, found)
        found.raise_errors()
    return samples.at(rising_in_time)


def _equals_the_one_before(samples: Samples) -> BoolArray:
    """Shape (k,). Whether a sample has the same signals as the one before it."""
    equal = np.ones(len(samples.time), dtype=np.bool_)
    equal[0] = False
    for signals in (samples.angle, samples.target, samples.torque):
        if signals is not None:
            equal[1:] &= (signals[1:] == signals[:-1]).all(axis=1)
    return equal


def _first(chosen: BoolArray, samples: Samples, table: Table) -> str:
    """Say where in the file the first of the chosen samples stands."""
    return f"from {table.places([int(samples.row[int(np.argmax(chosen))])])[0]}"


def _samples(count: int) -> str:
    return f"{count:,} {'sample' if count == 1 else 'samples'}"
