"""Pins of colourable-subgraph and induced-forest: conflicts by name, and choices under weights of any size."""

from functools import partial
from itertools import combinations

import networkx as nx
import numpy as np
import pytest
from definition import is_colourable, is_forest, largest_by_trial
from nearchord_solve import Budget, ColourableSubgraph, Graph, InducedForest, Monitor, Verdict, solve

QUESTIONS = [InducedForest, *(partial(ColourableSubgraph, q) for q in (2, 3, 4))]


def run(question, n, edges, weights=None, budget=None):  # type: ignore[no-untyped-def]
    """Solve with defaults."""
    array = None if weights is None else np.array(weights, np.int64)
    return solve(question, Graph.from_edges(n, edges), array, budget or Budget(), "bound", Monitor())


def holds(question):  # type: ignore[no-untyped-def]
    """The property that the question asks of a choice."""
    if isinstance(question, InducedForest):
        return is_forest
    return lambda edges, chosen: is_colourable(edges, chosen, question.colours)


def named(reason: str) -> list[int]:
    """The vertices that a reason names."""
    listed = reason.removeprefix("the pins contradict each other: vertices ").split(" must be chosen, but")[0]
    return [int(word) for word in listed.replace(" and ", ", ").split(", ")]


@pytest.mark.parametrize("ask", QUESTIONS)
def test_conflicts_are_named_and_none_of_their_vertices_is_idle(ask) -> None:  # type: ignore[no-untyped-def]
    """What is named cannot be chosen together; without any one of its vertices it can."""
    rng = np.random.default_rng(8)
    met = 0
    for _ in range(60):
        n = int(rng.integers(4, 11))
        upper = np.triu(rng.random((n, n)) < rng.uniform(0.3, 0.95), 1)
        edges = [(int(u), int(v)) for u, v in zip(*np.nonzero(upper), strict=True)]
        must = sorted(int(v) for v in rng.permutation(n)[: rng.integers(2, n + 1)])
        question = ask(must=must)
        outcome = run(question, n, edges)
        has = holds(question)
        if has([(u, v) for u, v in edges if u in must and v in must], must):
            assert outcome.verdict is Verdict.PROVEN
            continue
        met += 1
        assert outcome.verdict is Verdict.INFEASIBLE
        conflict = named(outcome.reason)
        assert conflict == sorted(conflict)
        assert set(conflict) <= set(must)
        assert not has(edges, conflict)
        for left_out in conflict:
            assert has(edges, [v for v in conflict if v != left_out])
    assert met >= 5


def test_reasons_name_cycles_and_cliques() -> None:
    ring = [(i, (i + 1) % 7) for i in range(7)]
    chord = [*ring, (0, 3)]
    outcome = run(ColourableSubgraph(2, must=range(7)), 7, chord)
    assert outcome.reason == (
        "the pins contradict each other: vertices 0, 3, 4, 5 and 6 must be chosen, but need more than 2 colours"
    )
    outcome = run(InducedForest(must=range(4)), 7, chord)
    assert outcome.reason == "the pins contradict each other: vertices 0, 1, 2 and 3 must be chosen, but close a cycle"
    clique = list(combinations((2, 4, 5, 6), 2))
    outcome = run(ColourableSubgraph(3, must=range(7)), 7, clique)
    assert named(outcome.reason) == [2, 4, 5, 6]
    assert "need more than 3 colours" in outcome.reason
    outcome = run(ColourableSubgraph(2, must=(1, 0), never=(1,)), 7, ring)
    assert "vertex 1 must be chosen and must not be chosen" in outcome.reason


def test_conflicts_without_a_clique_are_found_among_many_pins() -> None:
    """An odd wheel needs four colours and holds no clique of four; the windows around it need three."""
    rows = [*nx.power(nx.path_graph(300), 2).edges]
    place = [310, 320, 330, 340, 350, 360]
    rows += [(place[u], place[v]) for u, v in nx.wheel_graph(6).edges]
    outcome = run(ColourableSubgraph(3, must=range(400)), 400, rows)
    assert outcome.verdict is Verdict.INFEASIBLE
    assert named(outcome.reason) == place


def test_long_conflicts_are_cut_short() -> None:
    ring = [(i, (i + 1) % 41) for i in range(41)]
    outcome = run(InducedForest(must=range(41)), 41, ring)
    assert "18, 19, ... (41 in all) must be chosen, but close a cycle" in outcome.reason


@pytest.mark.parametrize("ask", QUESTIONS)
def test_pins_hold_whatever_the_weights(ask) -> None:  # type: ignore[no-untyped-def]
    """Weights so large that nothing can be added to them; trial adds them up as Python integers."""
    rng = np.random.default_rng(3)
    for _ in range(25):
        n = 9
        upper = np.triu(rng.random((n, n)) < rng.uniform(0.3, 0.7), 1)
        edges = [(int(u), int(v)) for u, v in zip(*np.nonzero(upper), strict=True)]
        weights = rng.integers(2**57, 2**58, n).tolist()
        must = [int(v) for v in rng.permutation(n)[:3]]
        for v in must:
            weights[v] = int(rng.integers(0, 9))
        question = ask(must=must[:2], never=must[2:])
        best = largest_by_trial(n, edges, weights, holds(question), must[:2], must[2:])
        outcome = run(question, n, edges, weights)
        if best is None:
            assert outcome.verdict is Verdict.INFEASIBLE
            continue
        assert (outcome.verdict, outcome.value, outcome.bound) == (Verdict.PROVEN, best, best)
        assert set(must[:2]) <= set(outcome.chosen.tolist())


@pytest.mark.parametrize("ask", QUESTIONS)
def test_small_budgets_leave_choices_that_hold_all_pins(ask) -> None:  # type: ignore[no-untyped-def]
    graph = nx.power(nx.path_graph(40), 4)
    graph.remove_edges_from([(3, 5), (10, 13), (20, 22), (30, 31)])
    question = ask(must=(0, 20, 37), never=(5, 6))
    exact = run(question, 40, graph.edges)
    for budget in (Budget(states=3), Budget(memory=1)):
        outcome = run(question, 40, graph.edges, budget=budget)
        assert outcome.value <= exact.value <= outcome.bound
        assert {0, 20, 37} <= set(outcome.chosen.tolist())
        assert not {5, 6} & set(outcome.chosen.tolist())
