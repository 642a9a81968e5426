"""Prices of vertices and of conflicts, against the definition and against separate solves."""

import random

import numpy as np
import pytest
from definition import heaviest_with_pins
from nearchord_solve import Budget, Graph, IndependentSet, Monitor, Outcome, Phase, Stop, Verdict, solve
from networkx.generators.atlas import graph_atlas_g
from weighted_cases import Pairs, large_cases, random_case

BOTH = {"prices": True, "conflict_prices": True}


def ask(n: int, edges: Pairs, weights: list[int], budget: Budget | None = None, **question: object) -> Outcome:
    """Solve with defaults."""
    graph = Graph.from_edges(n, edges)
    return solve(IndependentSet(**question), graph, np.array(weights, np.int64), budget or Budget(), "bound", Monitor())


def expect_prices(
    outcome: Outcome, n: int, edges: Pairs, weights: list[int], must: list[int], never: list[int]
) -> None:
    """Both columns of vertices are what the definition says."""
    best = heaviest_with_pins(n, edges, weights, must, never)
    assert outcome.value == best

    def loss(more: list[int], less: list[int]) -> int:
        value = heaviest_with_pins(n, edges, weights, must + more, never + less)
        return -1 if value is None else best - value

    assert outcome.columns["price_in"].tolist() == [loss([v], []) for v in range(n)]
    assert outcome.columns["price_out"].tolist() == [loss([], [v]) for v in range(n)]


def expect_conflict_prices(
    outcome: Outcome, n: int, edges: Pairs, weights: list[int], must: list[int], never: list[int]
) -> None:
    """The column of edges is what the definition says."""
    gains = []
    for edge in edges:
        others = [other for other in edges if other != edge]
        gains.append(heaviest_with_pins(n, others, weights, must, never) - outcome.value)
    assert outcome.columns["conflict_price"].tolist() == gains


def test_prices_of_a_path() -> None:
    """0-1-2 with weights 3, 5, 3: the ends are best; taking 1 costs 1, losing an end costs 1."""
    outcome = ask(3, [(0, 1), (1, 2)], [3, 5, 3], **BOTH)
    assert outcome.columns["price_in"].tolist() == [0, 1, 0]
    assert outcome.columns["price_out"].tolist() == [1, 0, 1]
    assert outcome.columns["conflict_price"].tolist() == [2, 2]
    assert outcome.columns["price_in"].dtype == outcome.columns["conflict_price"].dtype == np.int64
    assert outcome.proof == "certificate"


def test_pins_settle_their_vertices_and_neighbours() -> None:
    outcome = ask(4, [(0, 1), (2, 3)], [1, 9, 1, 1], must=[0], never=[3], **BOTH)
    assert outcome.columns["price_in"].tolist() == [0, -1, 0, -1]
    assert outcome.columns["price_out"].tolist() == [-1, 0, 1, 0]
    assert outcome.columns["conflict_price"].tolist() == [9, 0]


def test_columns_come_only_when_asked_for() -> None:
    assert "price_in" not in ask(2, [(0, 1)], [1, 2], conflict_prices=True).columns
    assert "conflict_price" not in ask(2, [(0, 1)], [1, 2], prices=True).columns


def test_all_atlas_graphs_against_the_definition() -> None:
    for graph in graph_atlas_g():
        n, edges = graph.number_of_nodes(), sorted(graph.edges)
        weights = [1 + 7 * v % 5 for v in range(n)]
        outcome = ask(n, edges, weights, **BOTH)
        expect_prices(outcome, n, edges, weights, [], [])
        expect_conflict_prices(outcome, n, edges, weights, [], [])


@pytest.mark.parametrize("block", range(4))
def test_random_graphs_with_pins_against_the_definition(block: int) -> None:
    for seed in range(100 * block, 100 * block + 100):
        n, edges, weights, must, never = random_case(seed, 12)
        outcome = ask(n, edges, weights, must=must, never=never, **BOTH)
        expect_prices(outcome, n, edges, weights, must, never)
        expect_conflict_prices(outcome, n, edges, weights, must, never)


@pytest.mark.parametrize("name", large_cases())
@pytest.mark.parametrize("pinned", [False, True])
def test_larger_graphs_against_separate_solves(name: str, pinned: bool) -> None:
    n, edges = large_cases()[name]
    draw = random.Random(name)
    weights = [draw.choice([1, 2, draw.randint(1, 50)]) for _ in range(n)]
    must, never = ([n // 2], [n // 3]) if pinned else ([], [])
    outcome = ask(n, edges, weights, must=must, never=never, **BOTH)

    def loss(more: list[int], less: list[int]) -> int:
        other = ask(n, edges, weights, must=[*must, *more], never=[*never, *less])
        return -1 if other.verdict is Verdict.INFEASIBLE else outcome.value - other.value

    for v in range(n):
        assert outcome.columns["price_in"][v] == loss([v], []), v
        assert outcome.columns["price_out"][v] == loss([], [v]), v
    for k in draw.sample(range(len(edges)), min(len(edges), 150)):
        dropped = ask(n, edges[:k] + edges[k + 1 :], weights, must=must, never=never)
        assert outcome.columns["conflict_price"][k] == dropped.value - outcome.value, edges[k]


def test_weights_up_to_the_limit_are_exact() -> None:
    """Residuals may leave int64 on the way; differences do not."""
    edges = sorted((min(v, (v + 1) % 7), max(v, (v + 1) % 7)) for v in range(7))
    weights = [2**61 - 1, 2**60, 2**59 - 5, 7, 2**58, 3, 2**57]
    outcome = ask(7, edges, weights, **BOTH)
    expect_prices(outcome, 7, edges, weights, [], [])
    expect_conflict_prices(outcome, 7, edges, weights, [], [])


@pytest.mark.parametrize(("n", "edges"), [(0, []), (1, []), (4, [])])
def test_graphs_without_edges(n: int, edges: Pairs) -> None:
    outcome = ask(n, edges, [3] * n, **BOTH)
    assert outcome.columns["price_in"].tolist() == [0] * n
    assert outcome.columns["price_out"].tolist() == [3] * n
    assert outcome.columns["conflict_price"].size == 0


def test_an_answer_that_no_sweep_proved_has_no_prices_and_says_so() -> None:
    edges = sorted((min(v, (v + 1) % 9), max(v, (v + 1) % 9)) for v in range(9))
    outcome = ask(9, edges, [1] * 9, Budget(states=1), **BOTH)
    assert not {"price_in", "price_out", "conflict_price"} & set(outcome.columns)
    assert "without prices and conflict prices" in outcome.reason


@pytest.mark.parametrize("name", BOTH)
def test_too_little_memory_is_said(name: str) -> None:
    """There are budgets that leave room for the sweep but not for prices besides: the answer stands without them."""
    n, edges = large_cases()["grid"]
    column = {"prices": "price_in", "conflict_prices": "conflict_price"}[name]
    words = name.replace("_", " ")
    without = 0
    for memory in range(2**20, 2**20 + 400_000, 1_000):
        outcome = ask(n, edges, [1] * n, Budget(memory=memory), **{name: True})
        if f"{words}: memory budget" in outcome.reason:
            assert outcome.verdict is Verdict.PROVEN
            assert column not in outcome.columns
            without += 1
        elif column in outcome.columns:
            break
    assert without > 0
    assert column in outcome.columns


@pytest.mark.parametrize(("stop", "verdict"), [(Stop.SECONDS, Verdict.PROVEN), (Stop.CANCEL, Verdict.CANCELLED)])
def test_a_stop_while_pricing(stop: Stop, verdict: Verdict) -> None:
    """The answer stands without prices when seconds run out, and nothing stands after a cancel."""
    phases: list[Phase] = []

    def on_phase(phase: Phase) -> None:
        phases.append(phase)
        if phases.count(Phase.SWEEP) == 2:  # the second sweep is that of the prices
            monitor.cells[Monitor.STOP] = stop

    monitor = Monitor(on_phase=on_phase)
    graph = Graph.from_edges(4, [(0, 1), (1, 2), (2, 3), (0, 3)])
    outcome = solve(IndependentSet(prices=True), graph, None, Budget(), "bound", monitor)
    assert outcome.verdict is verdict
    assert "price_in" not in outcome.columns
    assert ("seconds ran out" in outcome.reason) == (stop is Stop.SECONDS)
