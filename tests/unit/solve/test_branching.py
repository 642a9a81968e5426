"""Branching where the tables do not fit."""

import numpy as np
import pytest
from definition import is_independent
from nearchord_solve import Budget, Graph, IndependentSet, Monitor, Outcome, Phase, Stop, Verdict, VertexCover, solve
from nearchord_solve.questions import branching

N = 40


def random_edges(seed: int, density: float = 0.25) -> list[tuple[int, int]]:
    """Edges of a random graph."""
    rng = np.random.default_rng(seed)
    return [(u, v) for v in range(N) for u in range(v) if rng.random() < density]


def weights_of(seed: int) -> np.ndarray:
    """Random weights."""
    return np.random.default_rng(seed).integers(1, 100, N)


@pytest.fixture(autouse=True)
def cheap_nodes(monkeypatch: pytest.MonkeyPatch) -> None:
    """Let small graphs with tiny budgets branch, and not find the best set before."""
    monkeypatch.setattr(branching, "VERTEX_COST", 0)
    monkeypatch.setattr(branching, "SHARE", 1)
    monkeypatch.setattr("nearchord_solve.bounds.MOST_KICKS", 1)
    monkeypatch.setattr("nearchord_solve.bounds.ROUNDS", 1)


def run(seed: int, budget: Budget, monitor: Monitor | None = None) -> Outcome:
    """Solve the random graph of this seed."""
    graph = Graph.from_edges(N, random_edges(seed))
    return solve(IndependentSet(), graph, weights_of(seed), budget, "bound", monitor or Monitor())


@pytest.mark.parametrize("seed", range(8))
def test_branching_proves_what_the_tables_would(seed: int, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(branching, "WORK", 10**6)
    exact = run(seed, Budget())
    assert "branches" not in exact.reason
    branched = run(seed, Budget(states=200))
    assert "branches were looked at" in branched.reason
    assert branched.verdict is Verdict.PROVEN
    assert branched.value == branched.bound == exact.value
    assert is_independent(random_edges(seed), branched.chosen.tolist())
    assert weights_of(seed)[branched.chosen].sum() == exact.value


@pytest.mark.parametrize("work", [0, 1, 10, 40])
@pytest.mark.parametrize("seed", range(4))
def test_work_that_is_used_up_leaves_a_valid_interval(seed: int, work: int, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(branching, "WORK", work)
    best = run(seed, Budget()).value
    outcome = run(seed, Budget(states=200))
    assert best is not None
    assert outcome.value <= best <= outcome.bound
    assert is_independent(random_edges(seed), outcome.chosen.tolist())


@pytest.mark.parametrize("stop", [Stop.SECONDS, Stop.CANCEL])
@pytest.mark.parametrize("look", [1, 2, 3, 8])
def test_a_stop_at_any_branch_is_obeyed(stop: Stop, look: int, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(branching, "WORK", 10**6)
    build, looks = branching.build_structure, []
    monitor = Monitor()

    def build_and_stop(*arguments):  # type: ignore[no-untyped-def]
        looks.append(1)
        if len(looks) == look:
            monitor.cells[Monitor.STOP] = stop
        return build(*arguments)

    best = run(0, Budget()).value
    monkeypatch.setattr(branching, "build_structure", build_and_stop)
    outcome = run(0, Budget(states=200), monitor)
    assert len(looks) == look
    if stop is Stop.CANCEL:
        assert outcome.verdict is Verdict.CANCELLED
        return
    assert best is not None
    assert outcome.value <= best <= outcome.bound
    assert "seconds ran out in the search" in outcome.reason


def test_branches_leave_the_figures_of_the_whole_and_its_phase() -> None:
    phases: list[Phase] = []
    monitor = Monitor(on_phase=phases.append)
    outcome = run(1, Budget(states=200), monitor)
    assert phases == sorted(phases)
    assert monitor.cells[Monitor.FILL] == outcome.fill
    assert monitor.cells[Monitor.FILL_LOWER] == outcome.fill_lower_bound
    assert monitor.cells[[Monitor.INCUMBENT, Monitor.BOUND]].tolist() == [outcome.value, outcome.bound]


def test_branching_under_pins_and_for_covers(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(branching, "WORK", 10**6)
    graph, weights = Graph.from_edges(N, random_edges(2)), weights_of(2)
    for question in (IndependentSet(must=(3,), never=(7, 9)), VertexCover(must=(3,), never=(7,))):
        exact = solve(question, graph, weights, Budget(), "bound", Monitor())
        branched = solve(question, graph, weights, Budget(states=200), "bound", Monitor())
        assert (branched.verdict, branched.value) == (Verdict.PROVEN, exact.value)
