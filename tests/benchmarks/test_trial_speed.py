"""How long the demo's questions take that replay it: the prediction, its members, the error budget."""

import pytest
from pytest_benchmark.fixture import BenchmarkFixture

from armeval.evaluate.budget import budget
from armeval.evaluate.plan import plan_trial
from armeval.evaluate.predict import predict
from armeval.files.demo import write_demo
from armeval.files.trial_file import read_trial
from armeval.model.trial import Trial


@pytest.fixture(scope="module")
def demo(tmp_path_factory: pytest.TempPathFactory) -> Trial:
    """The demo's trial, with all kernels compiled."""
    trial = read_trial(write_demo(tmp_path_factory.mktemp("demo") / "demo"), logs=False)
    predict(trial, members=1)
    return trial


def test_planning_and_predicting_both_runs(demo: Trial, benchmark: BenchmarkFixture) -> None:
    assert len(benchmark(predict, demo).runs) == 2


@pytest.mark.parametrize("threads", [1, 2])
def test_160_members_of_both_runs(demo: Trial, threads: int, benchmark: BenchmarkFixture) -> None:
    plan = plan_trial(demo)
    found = benchmark.pedantic(
        predict, args=(demo,), kwargs={"trajectory": plan, "members": 160, "threads": threads}, rounds=3
    )
    assert found.runs[0].ensemble is not None


@pytest.mark.parametrize("threads", [1, 2])
def test_budget_of_both_runs(demo: Trial, threads: int, benchmark: BenchmarkFixture) -> None:
    plan = plan_trial(demo)
    found = benchmark.pedantic(budget, args=(demo,), kwargs={"trajectory": plan, "threads": threads}, rounds=3)
    assert len(found.budgets) == 2
