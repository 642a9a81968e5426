"""Many vectors of weights in one solve."""

from itertools import pairwise

import numpy as np
import pytest
from definition import heaviest_with_pins, is_independent
from nearchord_solve import Budget, Graph, IndependentSet, Monitor, Outcome, Phase, SolverError, Stop, Verdict, solve
from nearchord_solve.arrays import I64
from networkx.generators.atlas import graph_atlas_g
from weighted_cases import Pairs, large_cases, random_case


def ask(
    n: int, edges: Pairs, weights: I64, budget: Budget | None = None, monitor: Monitor | None = None, **pins: object
) -> Outcome:
    """Solve for all rows of ``weights``."""
    question = IndependentSet(scenarios=len(weights), **pins)
    return solve(question, Graph.from_edges(n, edges), weights, budget or Budget(), "bound", monitor or Monitor())


def choices(outcome: Outcome) -> list[list[int]]:
    """What each scenario chooses."""
    start = outcome.columns["scenario_start"]
    return [outcome.columns["scenario_chosen"][i:j].tolist() for i, j in pairwise(start)]


def expect_sound(outcome: Outcome, edges: Pairs, weights: I64, must: list[int], never: list[int]) -> None:
    """Choices are feasible, ascending and worth their value, bounds are no less, and the head is the first one's."""
    columns = outcome.columns
    assert len(choices(outcome)) == len(weights)
    for row, chosen in enumerate(choices(outcome)):
        assert chosen == sorted(set(chosen))
        assert is_independent(edges, chosen)
        assert set(must) <= set(chosen)
        assert not set(never) & set(chosen)
        assert columns["scenario_value"][row] == weights[row][chosen].sum() <= columns["scenario_bound"][row]
    assert (outcome.value, outcome.bound) == (columns["scenario_value"][0], columns["scenario_bound"][0])
    assert outcome.chosen.tolist() == choices(outcome)[0]
    proven = bool((columns["scenario_value"] == columns["scenario_bound"]).all())
    assert (outcome.verdict is Verdict.PROVEN) == proven


def test_two_scenarios_of_a_path() -> None:
    outcome = ask(3, [(0, 1), (1, 2)], np.array([[3, 5, 3], [1, 5, 1]]))
    assert outcome.columns["scenario_value"].tolist() == outcome.columns["scenario_bound"].tolist() == [6, 5]
    assert choices(outcome) == [[0, 2], [1]]
    assert (outcome.value, outcome.chosen.tolist(), outcome.proof) == (6, [0, 2], "search")
    assert outcome.columns["scenario_chosen"].dtype == np.uint32
    assert outcome.columns["scenario_start"].dtype == outcome.columns["scenario_value"].dtype == np.int64


def test_all_atlas_graphs_against_the_definition() -> None:
    for number, graph in enumerate(graph_atlas_g()):
        n, edges = graph.number_of_nodes(), sorted(graph.edges)
        weights = np.random.default_rng(number).integers(0, 6, (3, n))
        outcome = ask(n, edges, weights)
        expect_sound(outcome, edges, weights, [], [])
        assert outcome.columns["scenario_bound"].tolist() == [
            heaviest_with_pins(n, edges, row.tolist()) for row in weights
        ]


@pytest.mark.parametrize("count", [1, 2, 5, 33, 70])
def test_random_graphs_with_pins_against_the_definition(count: int) -> None:
    """Also with more vectors than are swept together, and numbers that fill no block."""
    for seed in range(30):
        n, edges, _, must, never = random_case(100 * count + seed, 12)
        weights = np.random.default_rng(seed).integers(0, (3, 100)[seed % 2], (count, n))
        outcome = ask(n, edges, weights, must=must, never=never)
        expect_sound(outcome, edges, weights, must, never)
        assert outcome.columns["scenario_bound"].tolist() == [
            heaviest_with_pins(n, edges, row.tolist(), must, never) for row in weights
        ]


@pytest.mark.parametrize("name", large_cases())
def test_larger_graphs_against_separate_solves(name: str) -> None:
    n, edges = large_cases()[name]
    weights = np.random.default_rng(1).integers(0, 30, (40, n))
    outcome = ask(n, edges, weights)
    expect_sound(outcome, edges, weights, [], [])
    graph = Graph.from_edges(n, edges)
    for row, bound in zip(weights, outcome.columns["scenario_bound"], strict=True):
        assert solve(IndependentSet(), graph, row, Budget(), "bound", Monitor()).value == bound


def test_weights_up_to_the_limit_are_exact() -> None:
    edges = sorted((min(v, (v + 1) % 7), max(v, (v + 1) % 7)) for v in range(7))
    weights = np.array([[2**61 - 1, 2**60, 2**59 - 5, 7, 2**58, 3, 2**57], [0, 2**61, 2**61 - 1, 0, 0, 0, 0]])
    outcome = ask(7, edges, weights)
    assert outcome.columns["scenario_value"].tolist() == [heaviest_with_pins(7, edges, row.tolist()) for row in weights]


@pytest.mark.parametrize("budget", [Budget(states=1), Budget(memory=1)])
def test_what_the_budget_does_not_settle_gets_a_bound_and_a_choice(budget: Budget) -> None:
    n, edges = large_cases()["queen"]
    weights = np.random.default_rng(2).integers(1, 30, (5, n))
    outcome = ask(n, edges, weights, budget)
    expect_sound(outcome, edges, weights, [], [])
    for row, bound in zip(weights, outcome.columns["scenario_bound"], strict=True):
        assert bound >= ask(n, edges, row[None]).value


def test_scenarios_that_no_longer_fit_the_memory_together_are_swept_one_by_one() -> None:
    """Found by lowering the budget until even a single solve does not fit."""
    n, edges = large_cases()["grid"]
    weights = np.random.default_rng(3).integers(1, 30, (20, n))
    reference = ask(n, edges, weights).columns["scenario_value"].tolist()
    proven = 0
    for memory in range(2**20 + 40_000, 2**20 + 400_000, 40_000):
        outcome = ask(n, edges, weights, Budget(memory=memory))
        expect_sound(outcome, edges, weights, [], [])
        if outcome.verdict is Verdict.PROVEN:
            proven += 1
            assert outcome.columns["scenario_value"].tolist() == reference
    assert proven > 0


@pytest.mark.parametrize("stop", [Stop.SECONDS, Stop.CANCEL])
def test_a_stop_after_the_first_scenario(stop: Stop) -> None:
    phases: list[Phase] = []

    def on_phase(phase: Phase) -> None:
        phases.append(phase)
        if phases.count(Phase.SWEEP) == 2:
            monitor.cells[Monitor.STOP] = stop

    monitor = Monitor(on_phase=on_phase)
    n, edges = large_cases()["queen"]
    weights = np.random.default_rng(4).integers(1, 30, (40, n))
    outcome = ask(n, edges, weights, monitor=monitor)
    if stop is Stop.CANCEL:
        assert (outcome.verdict, outcome.value, outcome.columns) == (Verdict.CANCELLED, None, {})
        return
    expect_sound(outcome, edges, weights, [], [])
    assert outcome.value == outcome.bound


def test_pins_that_contradict_each_other_leave_no_scenario() -> None:
    outcome = ask(2, [(0, 1)], np.ones((2, 2), np.int64), must=[0, 1])
    assert outcome.verdict is Verdict.INFEASIBLE
    assert outcome.columns == {}


@pytest.mark.parametrize(
    ("weights", "message"),
    [
        (None, "are needed for the 2 scenarios"),
        (np.ones(3, np.int64), "must be an int64 array of 2 x 3, got int64(3,)"),
        (np.ones((3, 3), np.int64), "must be an int64 array of 2 x 3, got int64(3, 3)"),
        (np.array([[1, 1, 1], [1, -4, 1]]), "scenario 1, vertex 1: weight -4 is negative"),
        (np.array([[1, 1, 1], [2**61, 2**61, 1]]), "must sum to less than 2**62"),
    ],
)
def test_bad_weights_are_named(weights: I64 | None, message: str) -> None:
    with pytest.raises(SolverError) as raised:
        solve(IndependentSet(scenarios=2), Graph.from_edges(3, []), weights, Budget(), "bound", Monitor())
    assert (raised.value.field, raised.value.message) == ("weights", message)


def test_each_scenario_has_the_whole_range_of_weights() -> None:
    weights = np.full((3, 2), 2**60)
    assert ask(2, [(0, 1)], weights).columns["scenario_value"].tolist() == [2**60] * 3
