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


@pytest.mark.parametrize("ask", QUESTIONS[:2])
def test_conflicts_are_found_among_many_harmless_cycles(ask) -> None:  # type: ignore[no-untyped-def]
    """Bipartite graphs with one edge more: most cycles through its ends are even, and only odd ones count."""
    long = 0
    for seed in range(60):
        rng = np.random.default_rng(seed)
        edges = [(u, v) for u in range(8) for v in range(8, 16) if rng.random() < 0.3]
        edges.append((0, int(rng.integers(1, 8))))
        has = holds(ask())
        outcome = run(ask(must=range(16)), 16, edges)
        if has(edges, range(16)):
            assert outcome.verdict is Verdict.PROVEN
            continue
        conflict = named(outcome.reason)
        long += len(conflict) > 3
        assert not has(edges, conflict)
        assert all(has(edges, [v for v in conflict if v != left_out]) for left_out in conflict)
    assert long >= 10


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
    for _ in range(15):
        n = 11
        upper = np.triu(rng.random((n, n)) < rng.uniform(0.3, 0.7), 1)
        edges = [(int(u), int(v)) for u, v in zip(*np.nonzero(upper), strict=True)]
        weights = rng.integers(2**58, 2**59, n).tolist()
        must = [int(v) for v in rng.permutation(n)[:5]]
        for v in must:
            weights[v] = int(rng.integers(0, 9))
        question = ask(must=must[:4], never=must[4:])
        best = largest_by_trial(n, edges, weights, holds(question), must[:4], must[4:])
        outcome = run(question, n, edges, weights)
        if best is None:
            assert outcome.verdict is Verdict.INFEASIBLE
            continue
        assert (outcome.verdict, outcome.value, outcome.bound) == (Verdict.PROVEN, best, best)
        assert set(must[:4]) <= set(outcome.chosen.tolist())


@pytest.mark.parametrize("ask", QUESTIONS)
def test_pins_that_weigh_nothing_are_not_given_up_for_all_the_rest(ask) -> None:  # type: ignore[no-untyped-def]
    """A clique with one vertex too many: leaving out a pin would make room for the only one that weighs anything."""
    question = ask()
    n = (2 if isinstance(question, InducedForest) else question.colours) + 1
    must = tuple(range(n - 1))
    outcome = run(ask(must=must), n, list(combinations(range(n), 2)), [0] * (n - 1) + [5])
    assert (outcome.verdict, outcome.value, outcome.chosen.tolist()) == (Verdict.PROVEN, 0, list(must))


def test_pins_that_a_small_budget_cannot_settle_are_no_contradiction() -> None:
    """All vertices of three-colourable graphs; where greed leaves one out and a few states do not help, nothing is
    claimed: neither a choice that lacks pins nor a conflict."""
    open_cases = 0
    for seed in range(60):
        rng = np.random.default_rng(seed)
        n, colour = 12, rng.integers(0, 3, 12)
        edges = [(u, v) for u, v in combinations(range(n), 2) if colour[u] != colour[v] and rng.random() < 0.6]
        outcome = run(ColourableSubgraph(3, must=range(n)), n, edges, budget=Budget(states=3))
        assert outcome.bound == n
        if outcome.value is None:
            assert outcome.verdict is Verdict.BOUNDED
            assert "no choice with all pins was found" in outcome.reason
            open_cases += 1
        else:
            assert outcome.chosen.tolist() == list(range(n))
    assert 3 <= open_cases < 60


def test_colours_found_for_pins_are_kept_where_the_rest_does_not_fit() -> None:
    """Pins that greed along their numbers does not colour with three colours, behind vertices that must not be chosen,
    beside a graph with too many states."""
    hard = 0
    for seed in range(20):
        rng = np.random.default_rng(seed)
        colour = rng.integers(0, 3, 12)
        pinned = [(u, v) for u, v in combinations(range(12), 2) if colour[u] != colour[v] and rng.random() < 0.5]
        greedy = nx.greedy_color(nx.Graph([*pinned, *((v, v) for v in range(12))]), lambda graph, _: sorted(graph))
        hard += max(greedy.values()) >= 3
        beside = nx.power(nx.path_graph(40), 9)
        edges = [(u + 2, v + 2) for u, v in pinned] + [(u + 14, v + 14) for u, v in beside.edges] + [(0, 2), (1, 3)]
        question = ColourableSubgraph(3, must=range(2, 14), never=(0, 1))
        if not is_colourable(edges, range(2, 14), 3):
            continue
        outcome = run(question, 54, edges, budget=Budget(states=3000))
        assert outcome.verdict is Verdict.BOUNDED
        assert set(range(2, 14)) <= set(outcome.chosen.tolist())
        given = dict(zip(outcome.chosen.tolist(), outcome.columns["colour"].tolist(), strict=True))
        assert set(given.values()) <= {1, 2, 3}
        assert all(given[u] != given[v] for u, v in edges if u in given and v in given)
    assert hard >= 3


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
