"""The equations of motion against pinocchio, and against values of textbooks."""

from __future__ import annotations

import numpy as np
import pinocchio
import pytest

from armeval.kernels.chain import ChainArrays
from armeval.kernels.dynamics import mass_matrix_and_bias
from tests.random_arms import chain_of, pinocchio_model, pinocchio_pose, random_pose, random_urdf

KINDS = {"revolute": (0.0, 0.0), "prismatic": (1.0, 0.0), "mixed": (0.4, 0.3)}


@pytest.mark.parametrize("kind", KINDS)
@pytest.mark.parametrize("joints", range(2, 8))
def test_mass_matrix_bias_and_gravity_torque_are_those_of_pinocchio(joints: int, kind: str) -> None:
    rng = np.random.default_rng([joints, list(KINDS).index(kind)])
    for _ in range(3):
        prismatic, continuous = KINDS[kind]
        urdf = random_urdf(rng, joints, prismatic=prismatic, continuous=continuous)
        chain, model = chain_of(urdf), pinocchio_model(urdf)
        data = model.createData()
        gravity = rng.normal(size=3) * 9.81
        model.gravity.linear = gravity
        q = np.array([random_pose(rng, chain) for _ in range(20)])
        v = rng.normal(size=q.shape) * 3.0
        M, h, g = mass_matrix_and_bias(chain.arrays, gravity, q, v)
        for k in range(len(q)):
            pose = pinocchio_pose(model, q[k])
            mass = np.triu(pinocchio.crba(model, data, pose))
            np.testing.assert_allclose(M[k], mass + np.triu(mass, 1).T, rtol=0, atol=1e-10)
            np.testing.assert_allclose(h[k], pinocchio.nonLinearEffects(model, data, pose, v[k]), rtol=0, atol=1e-10)
            np.testing.assert_allclose(g[k], pinocchio.computeGeneralizedGravity(model, data, pose), rtol=0, atol=1e-10)


def planar_2r(
    lengths: tuple[float, float],
    masses: tuple[float, float],
    centers: tuple[float, float],
    inertias: tuple[float, float],
) -> ChainArrays:
    """Two links in the x-y plane, turning about z."""
    placement = np.tile(np.eye(3, 4), (2, 1, 1))
    placement[1, 0, 3] = lengths[0]
    return ChainArrays(
        prismatic=np.zeros(2, bool),
        placement=placement,
        mass=np.array(masses),
        center=np.array([[centers[0], 0.0, 0.0], [centers[1], 0.0, 0.0]]),
        inertia=np.array([np.diag([0.0, 0.0, inertia]) for inertia in inertias]),
        tip=np.array([lengths[1], 0.0, 0.0]),
        lower=np.full(2, -np.inf),
        upper=np.full(2, np.inf),
    )


def evaluate(chain: ChainArrays, q: list[float], v: list[float], gravity: tuple[float, float, float] = (0, 0, 0)):  # type: ignore[no-untyped-def]
    M, h, g = mass_matrix_and_bias(chain, np.array(gravity, dtype=float), np.array([q]), np.array([v]))
    return M[0], h[0], g[0]


@pytest.mark.parametrize(
    ("degrees", "expected"), [(90.0, [[3, 1], [1, 1]]), (150.0, [[1.267949, 0.133975], [0.133975, 1]])]
)
def test_unit_links_with_end_masses_have_the_inertia_of_the_textbook(
    degrees: float, expected: list[list[float]]
) -> None:
    """Lynch & Park, Modern Robotics (2017), section 8.1.3: unit lengths and point masses at the ends."""
    chain = planar_2r((1.0, 1.0), (1.0, 1.0), (1.0, 1.0), (0.0, 0.0))
    M, _, _ = evaluate(chain, [0.3, np.radians(degrees)], [0.0, 0.0])
    np.testing.assert_allclose(M, expected, atol=1e-6)


def test_a_planar_arm_has_the_inertia_and_coriolis_torque_of_the_handbook() -> None:
    """The two-link formulas of Spong, Hutchinson & Vidyasagar and of Craig (from memory), evaluated by hand."""
    chain = planar_2r((0.2, 0.18), (0.3, 0.2), (0.1, 0.09), (1.2e-3, 7e-4))
    M, h, _ = evaluate(chain, [0.7, np.radians(60.0)], [1.0, 2.0])
    np.testing.assert_allclose(M, [[0.01812, 0.00412], [0.00412, 0.00232]], rtol=1e-12)
    np.testing.assert_allclose(h, [-0.0249415, 0.00311769], rtol=1e-5)


def test_gravity_torque_is_weight_times_lever() -> None:
    chain = planar_2r((0.2, 0.18), (0.3, 0.2), (0.1, 0.09), (0.0, 0.0))
    _, h, g = evaluate(chain, [0.0, 0.0], [0.0, 0.0], (0.0, -9.81, 0.0))
    np.testing.assert_allclose(g, [9.81 * (0.3 * 0.1 + 0.2 * 0.29), 9.81 * 0.2 * 0.09], rtol=1e-12)
    np.testing.assert_allclose(h, g, rtol=1e-12)
