"""What an arm can let a hand feel in many poses: how much force, how little, how heavy, how fine, how stiff."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from armeval.arrays import FloatArray
from armeval.evaluate.cogging.net_cogging import net_cogging
from armeval.evaluate.feeling.ripple import ripple_covariance
from armeval.evaluate.feeling.tip_directions import TipDirections, tip_directions
from armeval.evaluate.feeling.wall_stiffness import stiffest_by_damping, stiffest_by_friction
from armeval.kernels.polytope import held_forces, largest_steps
from armeval.model.arm import Arm
from armeval.model.trial import Compensation


@dataclass(frozen=True, eq=False)
class TipAbilities:
    """What the arm can render in k poses, in its best and worst directions; NaN near singular poses.

    Attributes
    ----------
    continuous_force
        Shape (k,) [N]. Force that the torque limits hold in every direction, weight carried beside it. NaN: no limits.
    friction_least, friction_most
        Shape (k,) [N]. Force that moves the arm against Coulomb friction in the easiest and in the hardest direction.
    ripple
        Shape (k,) [N]. RMS of the cogging that is left, in the worst direction, the motors' angles being anything.
    dynamic_range
        Shape (k,). ``continuous_force`` over the smallest force that stands out: the larger of ``friction_most`` and
        the ripple's amplitude, sqrt(2) times its RMS.
    mass_least, mass_most
        Shape (k,) [kg]. Apparent mass in the lightest and in the heaviest direction: force over acceleration of the
        free tip.
    step
        Shape (k,) [m]. Farthest that the tip may be off within one encoder count a joint. 0: ideal encoders.
    wall_by_damping, wall_by_friction
        Shape (k,) [N/m]. Largest stiffness of a virtual wall by the bounds of
        :mod:`armeval.evaluate.feeling.wall_stiffness`: with the viscous friction of the easiest direction, and with
        ``friction_least`` and ``step``.
    lever
        Shape (k,). Smallest singular value of the Jacobian over the arm's reach.
    isotropy
        Shape (k,). Smallest over largest singular value.
    """

    continuous_force: FloatArray
    friction_least: FloatArray
    friction_most: FloatArray
    ripple: FloatArray
    dynamic_range: FloatArray
    mass_least: FloatArray
    mass_most: FloatArray
    step: FloatArray
    wall_by_damping: FloatArray
    wall_by_friction: FloatArray
    lever: FloatArray
    isotropy: FloatArray

    @property
    def wall(self) -> FloatArray:
        """Shape (k,) [N/m]. The smaller of the two bounds."""
        return np.minimum(self.wall_by_damping, self.wall_by_friction)


def tip_abilities(
    arm: Arm,
    q: FloatArray,
    *,
    compensated: bool = False,
    compensation: Compensation | None = None,
    carries_weight: bool | None = None,
    seed: int = 0,
    directions: TipDirections | None = None,
) -> TipAbilities:
    """Work out what an arm can render in many poses.

    A static force F at the tip takes the joint torques J^T F, so the forces that bounded torques hold are a polytope;
    its nearest edge is the force in the worst direction. Coulomb friction holds the arm against such a polytope too:
    moving the tip along u takes the largest F . u in it, because the joints of a redundant arm share a slow motion so
    that friction does the least work, and the two are dual linear programs.

    Parameters
    ----------
    arm
        The arm, n joints.
    q
        Shape (k, n) [rad or m].
    compensated, compensation, seed
        Whether compensation acts, what its table can do and the seed of its noise; the ripple depends on them.
    carries_weight
        Whether the drives carry the arm's weight; None: as the servo does.
    directions
        What the joints are to the tip there, where that is known already.
    """
    at = tip_directions(arm, q) if directions is None else directions
    drives, prismatic = arm.drives, arm.chain.prismatic
    held = np.ascontiguousarray(at.jacobian.transpose(0, 2, 1) @ at.basis)

    def of(name: str) -> FloatArray:
        return np.array([getattr(drive, name) for drive in drives], dtype=np.float64)

    carries = arm.servo.gravity_feedforward if carries_weight is None else carries_weight
    limit = np.maximum(of("torque_limit") - (np.abs(at.weight) if carries else 0.0), 0.0)
    limit = np.ascontiguousarray(np.broadcast_to(limit, q.shape))
    friction = np.ascontiguousarray(np.broadcast_to(of("coulomb_friction"), q.shape))
    force, _ = held_forces(held, limit)
    friction_least, friction_most = held_forces(held, friction)
    mobility: FloatArray = np.asarray(
        np.linalg.eigvalsh(at.basis.transpose(0, 2, 1) @ at.mobility @ at.basis), dtype=np.float64
    )
    viscous = of("viscous_friction")
    damping: FloatArray = np.zeros(len(q))
    if (viscous > 0.0).all():
        scaled = held.transpose(0, 2, 1) / np.sqrt(viscous)
        damping = np.asarray(1.0 / np.linalg.eigvalsh(scaled @ scaled.transpose(0, 2, 1))[:, -1], dtype=np.float64)
    tables = net_cogging(arm, compensated=compensated, compensation=compensation, seed=seed)
    covariance = ripple_covariance(arm, at.torque_to_force, tables)
    ripple: FloatArray = np.sqrt(np.maximum(np.linalg.eigvalsh(covariance)[:, -1], 0.0)).astype(np.float64)
    step = largest_steps(at.jacobian, arm.resolution)
    floor = np.maximum(friction_most, np.sqrt(2.0) * ripple)
    singular_values = np.sqrt(np.maximum(np.linalg.eigvalsh(held.transpose(0, 2, 1) @ held), 0.0))

    def shown(values: FloatArray) -> FloatArray:
        return np.where(at.singular | ~np.isfinite(values), np.nan, values)

    force = shown(force)
    return TipAbilities(
        continuous_force=force,
        friction_least=shown(friction_least),
        friction_most=shown(friction_most),
        ripple=shown(ripple),
        dynamic_range=shown(np.divide(force, floor, out=np.full_like(force, np.nan), where=floor > 0.0)),
        mass_least=shown(np.reciprocal(mobility[:, -1])),
        mass_most=shown(np.reciprocal(np.maximum(mobility[:, 0], 1e-300))),
        step=shown(step),
        wall_by_damping=np.where(at.singular, np.nan, stiffest_by_damping(damping, arm.servo.period)),
        wall_by_friction=np.where(at.singular, np.nan, stiffest_by_friction(friction_least, step)),
        lever=at.lever,
        isotropy=np.where(prismatic.any(), np.nan, singular_values[:, 0] / singular_values[:, -1]),
    )


def ability_notes(arm: Arm) -> tuple[str, ...]:
    """Say which figures cannot be had because the arm's file lacks something, and what would mend it."""
    notes = []

    def lacking(name: str, missing: float, figure: str) -> None:
        joints = [drive.joint for drive in arm.drives if getattr(drive, name) == missing]
        if joints:
            which = "no joint has" if len(joints) == len(arm.drives) else f"{_listed(joints)} lacks"
            notes.append(f"{which} a `{name}`: {figure}")

    every = all(np.isinf(drive.torque_limit) for drive in arm.drives)
    given = (
        "there is no continuous force and no dynamic range" if every else "the continuous force is that of the others"
    )
    lacking("torque_limit", np.inf, given)
    lacking("rotor_inertia", 0.0, "inertia and apparent mass leave the rotor out and are too small")
    lacking("coulomb_friction", 0.0, "back-drive friction and the wall that friction allows are too small, perhaps 0")
    lacking("viscous_friction", 0.0, "damping allows no stiff wall at all")
    lacking("encoder_counts", 0.0, "the encoder counts as ideal: position resolution and wall stiffness are too good")
    joints = [drive.joint for drive in arm.drives if drive.cog_map is None]
    if joints:
        notes.append(f"{_listed(joints)} lacks a `cog_map`: its cogging is not in the ripple")
    if arm.servo.delay > 0.0:
        notes.append(
            f"the servo's torque comes {1e3 * arm.servo.delay:.3g} ms late, which the bounds of wall stiffness leave "
            "out: a real wall shakes earlier"
        )
    return tuple(notes)


def _listed(joints: list[str]) -> str:
    return ("joint " if len(joints) == 1 else "joints ") + ", ".join(joints)
