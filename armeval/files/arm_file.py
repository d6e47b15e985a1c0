"""arm.toml to arm: the chain from its URDF, the drives with their cog maps, the servo."""

from __future__ import annotations

import math
import os
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import numpy as np

from armeval.arrays import FloatArray
from armeval.errors import Findings, InputError, near
from armeval.files.arm_table import ARM_SCHEMA, ArmTable, CogMapTable, JointTable, ServoTable
from armeval.files.chains.urdf import read_urdf
from armeval.files.quantities import JointKind
from armeval.files.tables.reading import Reading, existing_file
from armeval.files.toml_file import check_schema, read_toml, validate
from armeval.model.arm import Arm
from armeval.model.chain import Chain
from armeval.model.cogmap import CogMap
from armeval.model.drive import Drive
from armeval.model.servo import Servo
from armeval.units import angle_text, length_text


@dataclass
class ArmReading:
    """What came of reading an arm, as far as it went.

    Attributes
    ----------
    arm
        The arm, or None if there were errors.
    stand_in
        An arm of the same joints, fit only to look for faults in further files; None if not even the chain is known.
    files
        Every file that was read, as the user named it.
    """

    arm: Arm | None = None
    stand_in: Arm | None = None
    files: tuple[str, ...] = ()


def read_arm(path: str | os.PathLike[str], *, findings: Findings | None = None) -> Arm:
    """Read an arm: ``arm.toml``, and the URDF and cog maps that it names.

    Parameters
    ----------
    path
        The ``arm.toml``; other files are named relative to it.
    findings
        Gathers warnings; without it they become :class:`armeval.errors.InputWarning`.

    Raises
    ------
    InputError
        If anything in any of the files cannot be used; with all faults of all of them.
    """
    with Reading(path, findings) as found:
        arm = load_arm(path, found).arm
        found.raise_errors()
        assert arm is not None
        return arm


def load_arm(path: str | os.PathLike[str], findings: Findings) -> ArmReading:
    """Read an arm as far as it goes; warnings and errors are noted in ``findings`` and nothing is raised."""
    reading = ArmReading(files=(os.fspath(path),))
    found = Findings(os.fspath(path))
    try:
        _load(path, reading, found)
    except InputError as fault:
        found.take(fault)
    findings.extend(found.found)
    return reading


def _load(path: str | os.PathLike[str], reading: ArmReading, found: Findings) -> None:
    content = read_toml(path)
    if not check_schema(content, ARM_SCHEMA, found):
        return
    table = validate(ArmTable, content, found)
    folder = Path(path).parent
    chain = _chain(content, folder, reading, found)
    drives = _drives(content.get("joint"), chain, folder, reading, found)
    servo = None if table is None else _servo(table.servo, found)
    if chain is None:
        return
    reading.stand_in = Arm(
        "stand-in",
        chain,
        tuple(drives.get(joint) or Drive(joint, encoder_counts=1.0) for joint in chain.joints),
        servo or Servo("joint_pd", 1e-3),
        np.zeros(3),
    )
    gravity = None if table is None else _gravity(table, found)
    for joint, drive in drives.items():
        _has_inertia(chain, joint, drive, found)
        _rests_in_range(chain, joint, drive, found)
    if table is None or servo is None or gravity is None or found.has_errors:
        return
    reading.arm = Arm(table.name, chain, tuple(drives[joint] for joint in chain.joints), servo, gravity)


def _chain(content: dict[str, Any], folder: Path, reading: ArmReading, found: Findings) -> Chain | None:
    """Read the chain, if ``urdf`` and ``tip`` are text; the table's own check says so if they are not."""
    urdf, tip = content.get("urdf"), content.get("tip")
    if not isinstance(urdf, str) or not isinstance(tip, str):
        return None
    file = folder / urdf
    reading.files += (os.fspath(file),)
    try:
        return read_urdf(file, tip, findings=found)
    except InputError as fault:
        found.take(fault)
        return None


def _drives(
    tables: object, chain: Chain | None, folder: Path, reading: ArmReading, found: Findings
) -> dict[str, Drive]:
    """Read the drives, by joint, as far as they can be; missing and needless tables are noted."""
    if not isinstance(tables, dict):
        return {}
    if chain is not None:
        for joint in [joint for joint in tables if joint not in chain.joints]:
            found.error(f"the arm has no moving joint `{joint}`", near(joint, chain.joints), place=f"[joint.{joint}]")
        for joint in chain.joints:
            if joint not in tables:
                found.error(
                    f"the joint `{joint}` has no drive", f"add a table [joint.{joint}]", place=f"[joint.{joint}]"
                )
    drives: dict[str, Drive] = {}
    for joint, content in tables.items():
        if chain is not None and joint not in chain.joints:
            continue
        slides = None if chain is None else bool(chain.prismatic[chain.index(joint)])
        table = validate(JointTable, content, found, inside=("joint", joint), kind=JointKind(slides))
        if table is None:
            _map_is_there(joint, content, folder, found)
            continue
        try:
            drives[joint] = _drive(joint, table, bool(slides), folder, reading, found)
        except InputError as fault:
            found.take(fault)
    return drives


def _drive(joint: str, table: JointTable, slides: bool, folder: Path, reading: ArmReading, found: Findings) -> Drive:
    cog_map = None if table.cog_map is None else _cog_map(joint, table.cog_map, table, folder, reading, found)
    measured = None if cog_map is None or cog_map.friction is None else cog_map.friction * abs(table.gear_ratio)
    return Drive(
        joint,
        gear_ratio=table.gear_ratio,
        stiffness=table.stiffness,
        damping=table.damping,
        torque_limit=math.inf if table.torque_limit is None else table.torque_limit,
        torque_step=table.torque_step,
        dead_time_torque=table.dead_time_torque,
        torque_constant=table.torque_constant,
        winding_resistance=table.winding_resistance,
        rotor_inertia=table.rotor_inertia,
        coulomb_friction=(measured or 0.0) if table.coulomb_friction is None else table.coulomb_friction,
        static_friction=table.static_friction,
        stribeck_speed=table.stribeck_speed,
        viscous_friction=table.viscous_friction,
        encoder_counts=table.encoder_counts,
        encoder_on=table.encoder_on,
        slots=table.slots,
        poles=table.poles,
        rest_angle=table.rest_angle,
        cog_map=cog_map,
        index_offset=0.0 if table.cog_map is None else table.cog_map.index_offset,
        slides=slides,
    )


def _map_is_there(joint: str, content: object, folder: Path, found: Findings) -> None:
    """Note a missing cog map of a joint whose table has faults of its own: those must not hide it."""
    named = content.get("cog_map") if isinstance(content, dict) else None
    file = named.get("file") if isinstance(named, dict) else named
    if not isinstance(file, str):
        return
    try:
        existing_file(folder / file)
    except InputError as fault:
        found.take(fault, place=f"joint `{joint}`")


def _cog_map(
    joint: str, named: CogMapTable, table: JointTable, folder: Path, reading: ArmReading, found: Findings
) -> CogMap:
    from armeval.files.cog_map_file import read_cog_map

    file = folder / named.file
    reading.files += (os.fspath(file),)
    try:
        return read_cog_map(
            file,
            torque_constant=table.torque_constant,
            winding_resistance=table.winding_resistance,
            rotor_inertia=table.rotor_inertia or None,
            findings=found,
        )
    except InputError as fault:
        raise fault.placed(place=f"joint `{joint}`") from fault


def _servo(table: ServoTable, found: Findings) -> Servo | None:
    at_tip = table.law == "tip_impedance"
    for key in ("tip_stiffness", "tip_damping"):
        given = getattr(table, key) is not None
        if at_tip and not given:
            found.error(
                f"law `tip_impedance` needs `{key}`", "add three entries, along x, y and z", place=f"[servo] {key}"
            )
        if given and not at_tip:
            found.warning(f"law `{table.law}` does not use `{key}`", "take it out", place=f"[servo] {key}")
    if found.has_errors:
        return None
    zero = [0.0, 0.0, 0.0]
    return Servo(
        table.law,
        period=1.0 / table.rate,
        delay=table.delay,
        speed_cutoff=math.inf if table.speed_filter is None else table.speed_filter,
        gravity_feedforward=table.gravity_feedforward,
        inertia_feedforward=table.inertia_feedforward,
        tip_stiffness=np.array(table.tip_stiffness if at_tip else zero),
        tip_damping=np.array(table.tip_damping if at_tip else zero),
    )


def _gravity(table: ArmTable, found: Findings) -> FloatArray | None:
    up = np.array(table.up)
    length = float(np.linalg.norm(up))
    if not length > 0.0 or not math.isfinite(length):
        found.error(f"the direction {table.up} has no length", "write such as [0, 0, 1]", place="up")
        return None
    return -table.gravity * up / length


def _has_inertia(chain: Chain, joint: str, drive: Drive, found: Findings) -> None:
    """Note a joint that no inertia resists: its acceleration would have no bound.

    If every joint's own body has inertia about its axis, the mass matrix is positive definite in every pose.
    """
    i = chain.index(joint)
    x, y, _ = chain.center[i]
    about_axis = chain.mass[i] if chain.prismatic[i] else chain.inertia[i, 2, 2] + chain.mass[i] * (x * x + y * y)
    if not about_axis + drive.gear_ratio**2 * drive.rotor_inertia > 0.0:
        found.error(
            "nothing that the joint moves has inertia about its axis",
            "give its link an inertia in the URDF, or the joint a `rotor_inertia`",
            place=f"[joint.{joint}] rotor_inertia",
        )


def _rests_in_range(chain: Chain, joint: str, drive: Drive, found: Findings) -> None:
    """Note a rest angle that the joint cannot take."""
    i = chain.index(joint)
    if drive.rest_angle is None or chain.lower[i] <= drive.rest_angle <= chain.upper[i]:
        return
    text = length_text if chain.prismatic[i] else angle_text
    found.error(
        f"{text(drive.rest_angle)} is outside the joint's range, "
        f"{text(float(chain.lower[i]))} to {text(float(chain.upper[i]))}",
        "choose a rest angle within it, or mend <limit> in the URDF",
        place=f"[joint.{joint}] rest_angle",
    )
