"""The friction step against every possible guess of who rests, slides and stands at a stop."""

from __future__ import annotations

import itertools

import numpy as np
import pytest

from armeval.kernels.chain import ChainArrays
from armeval.kernels.compile import jit
from armeval.kernels.friction import solve_speeds
from armeval.kernels.lanes import WIDTH, with_lanes
from armeval.kernels.records import Records, joint_records


@jit
def solve_compiled(records: Records) -> int:
    return solve_speeds(with_lanes(records))


def problem(rng: np.random.Generator, n: int, condition: float, stops: bool):  # type: ignore[no-untyped-def]
    """A positive definite system with a known condition number, and friction and stops of a size that matters."""
    turn = np.linalg.qr(rng.normal(size=(n, n)))[0]
    scales = np.exp(rng.uniform(-0.5, 0.5, n) * np.log(condition))
    A = turn @ np.diag(scales) @ turn.T
    A = 0.5 * (A + A.T)
    bound = rng.uniform(0.0, 1.0, n) * (rng.random(n) < 0.8)
    pushed = rng.normal(size=n) * rng.choice([0.3, 1.0, 3.0])
    reach = np.abs(rng.normal(size=(2, n))) * (rng.random((2, n)) < 0.7) if stops else np.full((2, n), 1e300)
    return A, pushed, bound, -reach[0], reach[1]


def start(rng: np.random.Generator, slowest, fastest):  # type: ignore[no-untyped-def]
    """Any state; at a stop only where there is one."""
    return rng.integers(np.where(slowest < -1e299, -1, -2), np.where(fastest > 1e299, 2, 3))


def records_of(problems, lanes: int, states) -> Records:  # type: ignore[no-untyped-def]
    """One problem a lane."""
    n = len(problems[0][1])
    empty = ChainArrays(
        np.zeros(n, bool), np.zeros((n, 3, 4)), np.zeros(n), np.zeros((n, 3)), np.zeros((n, 3, 3)), np.zeros(3),
        np.zeros(n), np.zeros(n),
    )  # fmt: skip
    joints = joint_records(empty, lanes)
    for m, (problem_, state) in enumerate(zip(problems, states, strict=True)):
        A, *vectors = problem_
        for name, values in zip(("pushed", "friction", "slowest", "fastest", "state"), [*vectors, state], strict=True):
            (joints[name][:, m] if lanes > 1 else joints[name])[...] = values
        (joints["matrix"][:, :, m] if lanes > 1 else joints["matrix"])[...] = A
    return joints


def enumerate_answers(A, pushed, bound, slowest, fastest, tolerance: float):  # type: ignore[no-untyped-def]
    """All speeds that fit some pattern of states; for a positive definite system they are one and the same."""
    n = len(pushed)
    answers = []
    for states in itertools.product((-2, -1, 0, 1, 2), repeat=n):
        s = np.array(states)
        if ((s == 2) & (fastest > 1e299)).any() or ((s == -2) & (slowest < -1e299)).any():
            continue
        slides = np.abs(s) == 1
        x = np.select([s == 2, s == -2], [fastest, slowest], 0.0)
        if slides.any():
            rest = pushed[slides] - s[slides] * bound[slides] - A[np.ix_(slides, ~slides)] @ x[~slides]
            x[slides] = np.linalg.solve(A[np.ix_(slides, slides)], rest)
        y = pushed - A @ x
        e = tolerance
        fits = np.select(
            [s == -2, s == -1, s == 0, s == 1],
            [
                y <= -bound + e,
                (x <= e) & (x >= slowest - e),
                np.abs(y) <= bound + e,
                (x >= -e) & (x <= fastest + e),
            ],
            y >= bound - e,
        )
        if fits.all():
            answers.append(x)
    return answers


@pytest.mark.parametrize(("n", "condition", "stops", "count"), [
    (1, 1.0, True, 2000), (2, 1e2, False, 4000), (2, 1e2, True, 2000), (3, 1e2, False, 1500), (3, 1e8, False, 500),
    (3, 1e2, True, 250), (4, 1e4, False, 150),
])  # fmt: skip
def test_the_answer_is_that_of_trying_every_pattern(n: int, condition: float, stops: bool, count: int) -> None:
    rng = np.random.default_rng([n, int(condition), stops])
    for _ in range(count):
        given = problem(rng, n, condition, stops)
        joints = records_of([given], 1, [rng.integers(-1, 2, n)])
        assert solve_compiled(joints) > 0
        answers = enumerate_answers(*given, tolerance=1e-9)
        assert answers
        size = 1.0 + np.abs(answers[0]).max()
        assert min(np.abs(answer - joints["new_speed"]).max() for answer in answers) <= 1e-8 * size * condition**0.5


@pytest.mark.parametrize("n", [3, 5, 7])
@pytest.mark.parametrize("condition", [1e1, 1e6, 1e10])
def test_any_start_comes_to_the_same_answer(n: int, condition: float) -> None:
    rng = np.random.default_rng([n, int(condition)])
    for _ in range(1000):
        given = problem(rng, n, condition, stops=bool(rng.integers(2)))
        answers, passes = [], []
        for _ in range(2):
            joints = records_of([given], 1, [start(rng, *given[3:])])
            passes.append(solve_compiled(joints))
            answers.append(joints["new_speed"].copy())
        assert min(passes) > 0
        A, pushed, bound, *_ = given
        size = np.abs(pushed).max() + bound.max() + np.abs(A).max() * np.abs(answers[0]).max()
        assert np.abs(A @ (answers[0] - answers[1])).max() <= 1e-9 * size


def test_eight_members_at_once_get_what_each_would_get_alone() -> None:
    rng = np.random.default_rng(5)
    for n in (2, 3, 4):
        for _ in range(300):
            problems = [problem(rng, n, 1e3, stops=bool(rng.integers(2))) for _ in range(WIDTH)]
            states = [start(rng, *given[3:]) for given in problems]
            together = records_of(problems, WIDTH, states)
            assert solve_compiled(together) > 0
            for m in range(WIDTH):
                alone = records_of([problems[m]], 1, [states[m]])
                solve_compiled(alone)
                np.testing.assert_allclose(together["new_speed"][:, m], alone["new_speed"], rtol=1e-9, atol=1e-10)


def test_a_joint_held_by_friction_has_a_speed_of_exactly_zero() -> None:
    joints = records_of(
        [(np.eye(2), np.array([0.3, 2.0]), np.array([0.4, 0.4]), np.full(2, -1e300), np.full(2, 1e300))], 1, [[1, 1]]
    )
    assert solve_compiled(joints) > 0
    assert joints["new_speed"][0] == 0.0
    assert joints["new_speed"][1] == pytest.approx(1.6)


@pytest.mark.parametrize("field", ["pushed", "friction", "matrix"])
@pytest.mark.parametrize("lanes", [1, WIDTH])
def test_a_value_that_is_not_a_number_is_not_taken_for_an_answer(field: str, lanes: int) -> None:
    rng = np.random.default_rng(1)
    given = problem(rng, 3, 10.0, stops=True)
    joints = records_of([given] * lanes, lanes, [[1, 1, 1]] * lanes)
    joints[field][(1, *[-1] * (joints[field].ndim - 1))] = np.nan
    assert solve_compiled(joints) == 0


def test_a_motion_without_bounds_is_not_taken_for_an_answer() -> None:
    joints = records_of(
        [(np.eye(1) * 1e-200, np.array([1e200]), np.zeros(1), np.full(1, -1e300), np.full(1, 1e300))], 1, [[0]]
    )
    assert solve_compiled(joints) == 0
