"""Maps over the workspace."""

from __future__ import annotations

import numpy as np
import pytest

from armeval.errors import InputError
from armeval.evaluate.feeling.tip_abilities import tip_abilities
from armeval.evaluate.feeling.workspace import workspace_map
from armeval.kernels.chain import tip_positions
from tests.planar_arms import planar_arm
from tests.random_arms import chain_of, random_pose, random_urdf

ARM = planar_arm((0.2, 0.15), (0.4, 1.2), limit=2.5, rotor_inertia=1e-4, coulomb_friction=0.01, torque_limit=0.2)


@pytest.fixture(scope="module")
def mapped():
    return workspace_map(ARM, spacing=0.01)


def test_every_pose_stands_at_its_grid_point_within_the_joint_ranges(mapped):
    assert np.abs(tip_positions(ARM.chain.arrays, mapped.joint) - mapped.tip).max() < 1e-5
    assert (mapped.joint >= ARM.chain.lower).all()
    assert (mapped.joint <= ARM.chain.upper).all()


def test_the_map_covers_the_ring_that_two_links_reach_and_nothing_else(mapped):
    # Elbow within 2.5 rad: the inner radius is that of the law of cosines.
    inner = np.sqrt(0.2**2 + 0.15**2 + 2 * 0.2 * 0.15 * np.cos(2.5))
    distance = np.linalg.norm(mapped.tip, axis=1)
    assert distance.min() >= inner - 1e-5
    assert distance.max() <= 0.35 + 1e-5
    rng = np.random.default_rng(0)
    poses = rng.uniform(-2.5, 2.5, (2000, 2))
    tips = tip_positions(ARM.chain.arrays, poses)
    gap = np.array([np.linalg.norm(mapped.tip - tip, axis=1).min() for tip in tips])
    assert (gap < 0.01).mean() > 0.99


def test_a_map_says_what_a_pose_by_itself_says(mapped):
    chosen = slice(None, None, 97)
    alone = tip_abilities(ARM, mapped.joint[chosen])
    for name in ("continuous_force", "friction_most", "mass_least", "wall_by_damping"):
        assert getattr(mapped.abilities, name)[chosen] == pytest.approx(getattr(alone, name), nan_ok=True)


def test_the_table_has_a_row_a_point_and_the_document_their_spread(mapped):
    assert len(mapped.to_frame()) == len(mapped.tip)
    document = mapped.to_document()
    forces = next(entry for entry in document["figures"] if entry["figure"] == "continuous_force_N")
    assert forces["least"] <= forces["median"] <= forces["most"]
    assert document["points"] == len(mapped.tip)


def test_a_grid_of_millions_is_refused_with_the_way_out():
    with pytest.raises(InputError, match="wider spacing"):
        workspace_map(ARM, spacing=1e-5)


@pytest.mark.parametrize("joints", [3, 4, 6])
def test_farthest_friction_is_the_dual_of_the_least_friction_work(joints):
    # Moving the tip by u against bounds b takes min sum b |q'| over J q' = u: a linear program of its own.
    from scipy.optimize import linprog

    from armeval.kernels.chain import tip_jacobians
    from armeval.kernels.polytope import held_forces

    rng = np.random.default_rng(joints)
    chain = chain_of(random_urdf(rng, joints, prismatic=0.0))
    J = tip_jacobians(chain.arrays, random_pose(rng, chain)[None])[0]
    bound = rng.uniform(0.5, 2.0, joints)
    least, most = held_forces(np.ascontiguousarray(J.T)[None], bound[None])
    ways = rng.normal(size=(400, 3))
    ways /= np.linalg.norm(ways, axis=1)[:, None]
    work = [linprog(np.tile(bound, 2), A_eq=np.hstack([J, -J]), b_eq=way).fun for way in ways]
    assert max(work) <= most[0] * (1.0 + 1e-9)
    assert max(work) > 0.9 * most[0]
    assert min(work) >= least[0] * (1.0 - 1e-9)
    nearest = J[:, np.argmin(bound / np.linalg.norm(J, axis=0))]
    assert linprog(np.tile(bound, 2), A_eq=np.hstack([J, -J]), b_eq=nearest / np.linalg.norm(nearest)).fun == (
        pytest.approx(least[0], rel=1e-6)
    )
