"""A ROS 2 bag or an MCAP file with joint states as named float64 columns, through the optional package `rosbags`."""

from __future__ import annotations

import os
from array import array
from collections.abc import Collection, Iterator, Sequence
from pathlib import Path
from typing import Any

import numpy as np
import numpy.typing as npt

from armeval.arrays import FloatArray
from armeval.errors import InputError
from armeval.files.tables.dialect import Column
from armeval.files.tables.row_faults import no_numbers
from armeval.files.tables.scaled import Scaled, scaled_rows

#: How an MCAP file and the database of a bag begin; a bag is a folder with a file of that name.
BAG_MAGIC = (b"\x89MCAP0\r\n", b"SQLite f")
BAG_INDEX = "metadata.yaml"

_JOINT_STATE = "sensor_msgs/msg/JointState"
_USUAL_TOPIC = "/joint_states"


class BagTable:
    """The joint states of one topic; see :class:`armeval.files.tables.table.Table`.

    Parameters
    ----------
    source
        The bag as the user named it.
    columns
        Time first, then each joint's position and effort.
    values
        Shape (messages, columns); NaN where a message does not say it.
    """

    def __init__(self, source: str, columns: tuple[Column, ...], values: FloatArray) -> None:
        self.source = source
        self.columns = columns
        self._values = values
        self._messages: npt.NDArray[np.intp] = np.arange(len(values))

    def read(self, groups: Sequence[Sequence[Scaled]]) -> list[FloatArray]:
        """Give groups of columns in SI; see :meth:`armeval.files.tables.table.Table.read`.

        A message that tells of none of the joints that are read, such as one of a gripper, is no row.
        """
        wanted = [column.place for group in groups for column in group]
        said = ~np.isnan(self._values[:, [place for place in wanted if place > 0]])
        self._messages = np.flatnonzero(said.any(axis=1))
        columns = [self._values[self._messages, place] for place in wanted]
        rows = scaled_rows(columns, groups)
        if rows is None:
            raise no_numbers(columns, groups, self)
        return rows

    def places(self, samples: Sequence[int]) -> list[str]:
        """Say which messages of the topic samples are, both counted in order, messages from 1."""
        return [f"message {self._messages[sample] + 1}" for sample in samples]


def open_bag(path: str | os.PathLike[str], sliding: Collection[str]) -> BagTable:
    """Read the joint states of a bag.

    A joint's position is the column ``<joint>.angle`` and its effort ``<joint>.torque``, under the name that the
    messages give the joint; ``[columns]`` may rename them by ``<joint>`` and ``<joint>.effort``. Time is the messages'
    own stamp, or where there is none the time of recording.

    Parameters
    ----------
    path
        The folder of a bag, its database, or an MCAP file.
    sliding
        Names of joints that slide: their positions are metres, all others radians.

    Raises
    ------
    InputError
        If ``rosbags`` is not installed, the bag cannot be read, or holds no joint states.
    """
    try:
        from rosbags.highlevel import AnyReader
        from rosbags.typesys import Stores, get_typestore
    except ImportError as fault:
        raise InputError(
            "a ROS bag needs the package `rosbags`, which is not installed",
            'install it with `pip install "armeval[ros]"`, or convert the bag to CSV or Parquet',
            file=path,
        ) from fault
    try:
        with AnyReader([Path(path)], default_typestore=get_typestore(Stores.LATEST)) as reader:
            topic = _topic({each.topic for each in reader.connections if each.msgtype == _JOINT_STATE})
            connections = [each for each in reader.connections if each.topic == topic]
            states = _JointStates()
            for connection, recorded, raw in reader.messages(connections=connections):
                states.append(reader.deserialize(raw, connection.msgtype), recorded)
    except InputError as fault:
        raise fault.placed(file=path) from fault
    except Exception as fault:  # damaged bytes fail in the reader in every way there is
        first_line = str(fault).splitlines()[0] if str(fault) else type(fault).__name__
        raise InputError(f"the bag cannot be read: {first_line}", "copy or record it again", file=path) from fault
    if not states.stamps:
        raise InputError(f"the topic `{topic}` holds no message", "record a whole lap", file=path)
    return BagTable(os.fspath(path), *states.tabulated(sliding))


class _JointStates:
    """Gathers what joint states say, eight bytes a number: the messages themselves would take a hundred times that."""

    def __init__(self) -> None:
        self.stamps = array("q")
        self._recorded = array("q")
        # Messages of one topic need not tell of the same joints: the rows and numbers of each list of joints.
        self._said: dict[tuple[str, ...], tuple[array[int], array[float]]] = {}

    def append(self, message: Any, recorded: int) -> None:
        """Add one message; it was recorded at that time [ns]."""
        stamp = message.header.stamp
        rows, numbers = self._said.setdefault(tuple(message.name), (array("q"), array("d")))
        rows.append(len(self.stamps))
        for values in (message.position, message.effort):
            told = values if len(values) == len(message.name) else np.full(len(message.name), np.nan)
            numbers.frombytes(np.asarray(told, dtype=np.float64).tobytes())
        self.stamps.append(int(stamp.sec) * 10**9 + int(stamp.nanosec))
        self._recorded.append(recorded)

    def tabulated(self, sliding: Collection[str]) -> tuple[tuple[Column, ...], FloatArray]:
        """Give the columns that hold anything, and their numbers, shape (messages, columns)."""
        joints = list(dict.fromkeys(joint for names in self._said for joint in names))
        values = np.full((len(self.stamps), 1 + 2 * len(joints)), np.nan)
        values[:, 0] = np.array(self.stamps if any(self.stamps) else self._recorded) / 1e9
        for names, (rows, numbers) in self._said.items():
            places = np.array([1 + 2 * joints.index(joint) for joint in names], dtype=np.intp)
            values[np.ix_(np.array(rows), np.concatenate([places, places + 1]))] = np.reshape(numbers, (len(rows), -1))
        columns = list(_columns(joints, sliding))
        given = [index for index in range(len(columns)) if not np.isnan(values[:, index]).all()]
        return tuple(columns[index] for index in given), values[:, given]


def _topic(topics: Collection[str]) -> str:
    """Choose the topic of joint states."""
    if not topics:
        raise InputError("it holds no joint states", f"record a topic of the type {_JOINT_STATE}")
    if len(topics) == 1:
        return next(iter(topics))
    if _USUAL_TOPIC in topics:
        return _USUAL_TOPIC
    names = ", ".join(f"`{topic}`" for topic in sorted(topics))
    raise InputError(f"it holds {len(topics)} topics of joint states: {names}", f"record `{_USUAL_TOPIC}` or one only")


def _columns(joints: Sequence[str], sliding: Collection[str]) -> Iterator[Column]:
    yield Column("time", "time", "s")
    for joint in joints:
        yield Column(joint, f"{joint}.angle", "m" if joint in sliding else "rad")
        yield Column(f"{joint}.effort", f"{joint}.torque", "N" if joint in sliding else "N*m")
