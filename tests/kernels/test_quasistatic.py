"""A joint, and an arm, dragged slowly: what must hold whatever the cogging and the friction."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from armeval.kernels.chain import tip_jacobians, tip_positions
from armeval.kernels.periodic import hermite_table, periodic_values
from armeval.kernels.quasistatic import DraggedJoint, follow_target
from armeval.kernels.quasistatic_tip import DraggedArm, follow_tip_target
from tests.planar_arms import planar_chain

CELLS = 4096
ANGLE = 2.0 * np.pi * np.arange(CELLS) / CELLS


def cog_table(rng, amplitude):
    torque = sum(
        a * np.sin(n * ANGLE + p) for n, a, p in zip((12, 84, 168), amplitude, rng.uniform(0, 6, 3), strict=True)
    )
    return hermite_table(torque)


def joint(table, stiffness, coulomb=0.0, static=None, gear=1.0, lower=-np.inf, upper=np.inf):
    return DraggedJoint(stiffness, coulomb, coulomb if static is None else static, gear, 0.3, lower, upper, table)


@settings(max_examples=25)
@given(
    seed=st.integers(0, 10_000),
    eta=st.floats(0.2, 6.0),
    coulomb=st.floats(0.0, 0.01),
    more=st.one_of(st.just(0.0), st.floats(1e-6, 0.01)),
    gear=st.sampled_from([1.0, -3.0]),
)
def test_a_resting_joint_is_always_within_static_friction(seed, eta, coulomb, more, gear):
    rng = np.random.default_rng(seed)
    table = cog_table(rng, (0.003, 0.02, 0.004))
    stiffness = gear**2 * 84 * 0.02 / eta
    target = np.cumsum(rng.normal(size=2000) * 1e-3)
    load = 0.005 * np.sin(np.arange(2000) / 100.0)
    dragged = joint(table, stiffness, coulomb, coulomb + more, gear)
    step = 2.0 * np.pi / CELLS / abs(gear)
    q, _, jumps = follow_target(dragged, target, load, float(target[0]), step, 1e-6)
    torque = stiffness * (target - q) + gear * periodic_values(table, gear * q + 0.3) + load
    # A fold shallower than a step of the search may be overshot by less than that step.
    assert np.abs(torque).max() <= coulomb + more + 1e-9 + stiffness * step
    assert np.all(np.abs(jumps[:, 1] - jumps[:, 0]) > 1e-6)


def test_a_joint_that_does_not_slip_stands_exactly_still():
    target = np.linspace(0.0, 0.9e-3, 500)
    q, _, _ = follow_target(joint(np.zeros((8, 2)), 20.0, 0.02), target, np.zeros(500), 0.0, 1e-4, 1e-6)
    assert np.all(q == 0.0)


def test_a_constant_load_shifts_the_joint_by_load_over_stiffness():
    target = np.linspace(0.0, 1.0, 500)
    q, _, _ = follow_target(joint(np.zeros((8, 2)), 20.0), target, np.full(500, 0.1), 0.0, 1e-3, 1e-6)
    assert q - target == pytest.approx(0.1 / 20.0)


def test_it_stops_at_the_end_of_its_range():
    dragged = joint(np.zeros((8, 2)), 20.0, upper=0.5, lower=-0.2)
    target = np.concatenate([np.linspace(0.0, 1.0, 200), np.linspace(1.0, -1.0, 400)])
    q, _, _ = follow_target(dragged, target, np.zeros(600), 0.0, 1e-3, 1e-6)
    assert q == pytest.approx(np.clip(target, -0.2, 0.5), abs=1e-12)


def falling(arrays, table, spring, coulomb, target, q, hold):
    """Overdamped motion of the arm in small steps, an independent route to where it comes to rest."""
    direction = np.zeros(len(q))
    for _ in range(200_000):
        J, tip = tip_jacobians(arrays, q[None])[0], tip_positions(arrays, q[None])[0]
        u = J.T @ (spring * (target - tip)) + periodic_values(table, q)
        direction = np.where((direction == 0.0) & (np.abs(u) > hold), np.sign(u), direction)
        push = np.where(direction != 0.0, u - coulomb * direction, 0.0)
        push = np.where(push * direction > 0.0, push, 0.0)
        if np.abs(push).max() < 1e-7:
            break
        q = q + push / (spring[:, None] * J**2).sum(axis=0).max() * 0.2
    return q


def test_an_arm_on_a_tip_spring_falls_to_where_an_overdamped_one_comes_to_rest():
    arrays = planar_chain((0.2, 0.2)).arrays
    table = hermite_table(-0.02 * np.sin(84 * ANGLE))
    spring, coulomb = np.full(3, 12.0), 0.002
    start = np.array([0.0, 2.0 * np.pi * 21 / 84])
    line = np.linspace(0.0, 1.0, 30)[:, None] * np.array([-0.01, 0.015, 0.0])
    targets = tip_positions(arrays, start[None])[0] + line
    dragged = DraggedArm(
        arrays, spring, np.full(2, coulomb), np.full(2, coulomb), np.ones(2), np.zeros(2), np.stack([table, table])
    )
    step = np.full(2, 2.0 * np.pi / CELLS)
    q, fell = follow_tip_target(dragged, targets, np.zeros((30, 2)), start, step)
    assert fell.any()
    truth, pose = np.empty_like(q), start
    for k, target in enumerate(targets):
        pose = falling(arrays, table, spring, coulomb, target, pose, coulomb)
        truth[k] = pose
    # Which of two wells a fall ends in may depend on how the joints share the way; nearly all must agree.
    agree = np.abs(q - truth).max(axis=1) < 2e-3
    assert agree.mean() > 0.9


@settings(max_examples=15)
@given(seed=st.integers(0, 10_000), stiffness=st.floats(10.0, 400.0), static=st.floats(0.0, 0.01))
def test_a_resting_arm_on_a_tip_spring_is_within_static_friction(seed, stiffness, static):
    rng = np.random.default_rng(seed)
    arrays = planar_chain((0.2, 0.15, 0.1)).arrays
    tables = np.stack([cog_table(rng, (0.003, 0.02, 0.004)) for _ in range(3)])
    spring, start = np.full(3, stiffness), np.array([0.3, 0.9, 0.4])
    turn = np.linspace(0.0, 2.0, 300)
    targets = tip_positions(arrays, start[None])[0] + 0.03 * np.column_stack(
        [np.cos(turn) - 1.0, np.sin(turn), np.zeros(300)]
    )
    coulomb = np.full(3, 0.5 * static)
    dragged = DraggedArm(arrays, spring, coulomb, np.full(3, static), np.ones(3), np.zeros(3), tables)
    q, _ = follow_tip_target(dragged, targets, np.zeros((300, 3)), start, np.full(3, 4.0 * 2.0 * np.pi / CELLS))
    J, tip = tip_jacobians(arrays, q), tip_positions(arrays, q)
    torque = np.einsum("kri,kr->ki", J, stiffness * (targets - tip))
    torque += np.column_stack([periodic_values(tables[i], np.ascontiguousarray(q[:, i])) for i in range(3)])
    assert np.abs(torque).max() <= static + 1e-7
