"""The cog map file: a measured table over the motor's angle, in any of five quantities, to a cog map and back."""

from __future__ import annotations

import os
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace

import numpy as np

from armeval.arrays import FloatArray
from armeval.errors import Findings, near
from armeval.files.tables.columns import factor, find, missing, renamed, unused
from armeval.files.tables.dialect import Column
from armeval.files.tables.reading import Reading
from armeval.files.tables.row_faults import note_rows
from armeval.files.tables.scaled import Scaled
from armeval.files.tables.table import Table, open_table
from armeval.files.tables.table_writer import write_table
from armeval.model.cogmap import CogMap, CogQuantity


@dataclass(frozen=True)
class _Conversion:
    """What makes a torque on the rotor of a measured quantity.

    Attributes
    ----------
    unit
        SI unit of the quantity.
    sign
        -1 for what the drive applied to stand still: the cogging torque is its opposite.
    times, over
        Motor constants that the quantity is multiplied with, and divided by.
    """

    unit: str
    sign: float
    times: tuple[str, ...] = ()
    over: tuple[str, ...] = ()


_CONVERSIONS: Mapping[CogQuantity, _Conversion] = {
    "cog_torque": _Conversion("N*m", 1.0),
    "hold_torque": _Conversion("N*m", -1.0),
    "hold_current": _Conversion("A", -1.0, ("torque_constant",)),
    "hold_voltage": _Conversion("V", -1.0, ("torque_constant",), ("winding_resistance",)),
    "spin_acceleration": _Conversion("rad/s^2", 1.0, ("rotor_inertia",)),
}


def read_cog_map(
    path: str | os.PathLike[str],
    *,
    torque_constant: float | None = None,
    winding_resistance: float | None = None,
    rotor_inertia: float | None = None,
    slots: int | None = None,
    poles: int | None = None,
    columns: Mapping[str, str] | None = None,
    findings: Findings | None = None,
) -> CogMap:
    """Read a cog map: ``angle [deg]``, one measured quantity, optionally ``direction`` (+1 or -1).

    The quantity is ``cog_torque`` (on the rotor), ``hold_torque``, ``hold_current`` or ``hold_voltage`` (what the drive
    applied to stand still: the opposite of the cogging torque), or ``spin_acceleration`` of a slow open-loop spin
    (about its mean, times the rotor's inertia).

    Parameters
    ----------
    path
        A delimited text table, plain or gzip.
    torque_constant
        Motor side [N m/A]; for a current or a voltage.
    winding_resistance
        [ohm]; for a voltage.
    rotor_inertia
        Motor side [kg m^2]; for a spin.
    slots, poles
        Of the motor, where known: they say which orders to expect.
    columns
        Foreign header to ``name [unit]``.
    findings
        Gathers the warnings; None: they are Python's own warnings.

    Returns
    -------
    CogMap
        Torque on the rotor [N m] over one motor turn.

    Raises
    ------
    InputError
        With everything that is wrong in the file, by row and column; names the key of the arm file that is missing.
    """
    constants = {
        "torque_constant": torque_constant,
        "winding_resistance": winding_resistance,
        "rotor_inertia": rotor_inertia,
    }
    with Reading(path, findings) as found:
        table = open_table(path)
        header = renamed(table.columns, columns, found)
        angle = find(header, "angle", found)
        direction = find(header, "direction", found)
        quantity, measured = _quantity(header, found)
        if angle is None:
            missing(header, ["angle"], "`angle [deg]`", found)
        if columns is None:
            used = [place for place in (angle, direction, measured) if place is not None]
            unused(header, used, found, ["angle", "direction", *_CONVERSIONS])
        angle_factor = 1.0 if angle is None else factor(header[angle], "rad", found)
        torque_factor = 1.0 if measured is None else _torque_factor(quantity, header[measured], constants, found)
        found.raise_errors()

        assert angle is not None
        assert measured is not None
        groups = [[Scaled(angle, angle_factor)], [Scaled(measured, torque_factor)]]
        if direction is not None:
            groups.append([Scaled(direction)])
        turn, torque, *rest = (column[:, 0] for column in table.read(groups))
        turned = _checked_direction(rest[0], table, found) if rest else None
        found.raise_errors()
        if quantity == "spin_acceleration":
            torque -= torque.mean()

        from armeval.evaluate.cogging.cog_resample import resample

        cog_map, told = resample(
            turn,
            torque,
            turned,
            quantity=quantity,
            source=os.fspath(path),
            slots=slots,
            poles=poles,
        )
        found.extend(replace(finding, file=finding.file or os.fspath(path)) for finding in told)
        return cog_map


def _quantity(header: Sequence[Column], found: Findings) -> tuple[CogQuantity, int | None]:
    """Find the one measured quantity; an error is noted if there is none, or more than one."""
    present = [(quantity, find(header, quantity, found)) for quantity in _CONVERSIONS]
    known = [(quantity, place) for quantity, place in present if place is not None]
    if not known:
        due = ", ".join(f"`{name} [{conversion.unit}]`" for name, conversion in _CONVERSIONS.items())
        hints = [near(column.name, _CONVERSIONS) for column in header if column.name]
        meant = [hint for hint in hints if hint.startswith("did you mean")]
        found.error("there is no measured quantity", "; ".join([*meant, f"give one of {due}"]), place="header")
        return "cog_torque", None
    if len(known) > 1:
        names = ", ".join(f"`{header[place].text}`" for _, place in known)
        found.error(f"it has {len(known)} measured quantities: {names}", "keep one of them", place="header")
    return known[0]


def _torque_factor(
    quantity: CogQuantity, column: Column, constants: Mapping[str, float | None], found: Findings
) -> float:
    """Give what turns the column's numbers into torque on the rotor [N m]."""
    conversion = _CONVERSIONS[quantity]
    product = conversion.sign * factor(column, conversion.unit, found)
    for name in (*conversion.times, *conversion.over):
        value = constants[name]
        if value is None or not 0.0 < value < np.inf:
            found.error(
                f"a {quantity.replace('_', ' ')} makes a torque only with the motor's {name.replace('_', ' ')}",
                f"give `{name}` for this joint in the arm file",
                place=f"column `{column.text}`",
            )
        else:
            product = product * value if name in conversion.times else product / value
    return product


def _checked_direction(direction: FloatArray, table: Table, found: Findings) -> FloatArray:
    """Note every row whose direction is neither +1 nor -1."""
    wrong = np.flatnonzero(np.abs(direction) != 1.0)
    mend = "give +1 where the angle was approached upwards, -1 downwards"
    note_rows(
        wrong,
        table,
        found,
        lambda index: (f"the direction is {direction[wrong[index]]:g}", mend),
        rest="rows with a wrong direction",
        column="direction",
    )
    return direction


def write_cog_map(cog_map: CogMap, file: str | os.PathLike[str]) -> None:
    """Write a cog map as torque on the rotor, in both directions where friction is known.

    Reading it again gives the same torque and friction up to rounding; noise and what else the first measurement said
    about itself is not in the table.

    Parameters
    ----------
    cog_map
        What to write.
    file
        Where to; packed where the name ends in ``.gz``.

    Raises
    ------
    InputError
        If the file cannot be written.
    """
    torque = cog_map.torque + cog_map.removed_mean
    ripple = cog_map.friction_ripple
    if ripple is None:
        write_table(file, {"angle [rad]": cog_map.angle, "cog_torque [N*m]": torque})
        return
    ones = np.ones(len(torque))
    write_table(
        file,
        {
            "angle [rad]": np.concatenate([cog_map.angle, cog_map.angle]),
            "cog_torque [N*m]": np.concatenate([torque - ripple, torque + ripple]),
            "direction": np.concatenate([ones, -ones]),
        },
    )
