"""Prices and scenarios of colourable-subgraph and induced-forest, against separate solves and trial."""

from functools import partial
from math import comb

import networkx as nx
import numpy as np
import pytest
from definition import is_colourable, is_forest, largest_by_trial
from nearchord_solve import (
    Budget,
    ColourableSubgraph,
    Graph,
    InducedForest,
    Monitor,
    SolverError,
    Stop,
    Verdict,
    solve,
)
from networkx.generators.atlas import graph_atlas_g

QUESTIONS = [InducedForest, *(partial(ColourableSubgraph, q) for q in (1, 2, 3, 4))]


def run(question, n, edges, weights, budget=None, monitor=None):  # type: ignore[no-untyped-def]
    """Solve with defaults."""
    array = None if weights is None else np.array(weights, np.int64)
    return solve(question, Graph.from_edges(n, edges), array, budget or Budget(), "bound", monitor or Monitor())


def holds(question):  # type: ignore[no-untyped-def]
    """The property that the question asks of a choice."""
    if isinstance(question, InducedForest):
        return is_forest
    return lambda edges, chosen: is_colourable(edges, chosen, question.colours)


def prices_by_trial(question, n, edges, weights, must=(), never=()):  # type: ignore[no-untyped-def]
    """Prices from the definition: what the best choice with, and without, each vertex is worth less; -1 if none."""
    has = holds(question)
    best = largest_by_trial(n, edges, weights, has, must, never)
    lists = ([], [])
    for v in range(n):
        inside = largest_by_trial(n, edges, weights, has, {*must, v}, never) if v not in never else None
        outside = largest_by_trial(n, edges, weights, has, must, {*never, v}) if v not in must else None
        for prices, other in zip(lists, (inside, outside), strict=True):
            prices.append(-1 if other is None else best - other)
    return lists


def assert_prices(outcome, expected) -> None:  # type: ignore[no-untyped-def]
    """Both columns are as expected."""
    assert outcome.columns["price_in"].dtype == outcome.columns["price_out"].dtype == np.int64
    assert (outcome.columns["price_in"].tolist(), outcome.columns["price_out"].tolist()) == expected


@pytest.mark.parametrize("ask", QUESTIONS)
def test_prices_on_atlas_graphs_agree_with_trial(ask) -> None:  # type: ignore[no-untyped-def]
    rng = np.random.default_rng(6)
    for graph in graph_atlas_g()[1:1253:6]:
        n, edges = graph.number_of_nodes(), list(graph.edges)
        weights = rng.integers(0, 5, n).tolist()
        outcome = run(ask(prices=True), n, edges, weights)
        assert_prices(outcome, prices_by_trial(ask(), n, edges, weights))


@pytest.mark.parametrize("heavy", [9, 3 * 2**57])
@pytest.mark.parametrize("ask", QUESTIONS)
def test_prices_with_pins_agree_with_trial(ask, heavy: int) -> None:  # type: ignore[no-untyped-def]
    """The larger weights leave no room for what pins weigh more."""
    rng = np.random.default_rng(heavy % 97)
    for _ in range(8):
        n = 9
        upper = np.triu(rng.random((n, n)) < rng.uniform(0.2, 0.7), 1)
        edges = [(int(u), int(v)) for u, v in zip(*np.nonzero(upper), strict=True)]
        weights = rng.integers(0, heavy, n).tolist()
        picked = [int(v) for v in rng.permutation(n)]
        must, never = picked[:2], picked[2:4]
        question = ask(must=must, never=never, prices=True)
        if largest_by_trial(n, edges, weights, holds(question), must, never) is None:
            assert run(question, n, edges, weights).verdict is Verdict.INFEASIBLE
            continue
        assert_prices(run(question, n, edges, weights), prices_by_trial(question, n, edges, weights, must, never))


def windows(n: int, reach: int, removed: int, seed: int) -> nx.Graph:
    """A power of a path, shuffled, with some edges removed: nearly chordal."""
    rng = np.random.default_rng(seed)
    graph = nx.power(nx.path_graph(n), reach)
    edges = sorted(graph.edges)
    graph.remove_edges_from([edges[i] for i in rng.choice(len(edges), removed, replace=False)])
    return nx.relabel_nodes(graph, dict(enumerate(int(v) for v in rng.permutation(n))))


@pytest.mark.parametrize("ask", QUESTIONS)
@pytest.mark.parametrize(("reach", "removed"), [(5, 0), (5, 20), (3, 40)])
def test_prices_of_windows_agree_with_separate_solves(ask, reach: int, removed: int) -> None:  # type: ignore[no-untyped-def]
    n = 60
    graph = windows(n, reach, removed, removed)
    weights = np.random.default_rng(reach).integers(1, 50, n)
    outcome = run(ask(prices=True), n, graph.edges, weights)
    assert outcome.verdict is Verdict.PROVEN
    for v in range(0, n, 3):
        inside = run(ask(must=(v,)), n, graph.edges, weights)
        outside = run(ask(never=(v,)), n, graph.edges, weights)
        assert outcome.columns["price_in"][v] == outcome.value - inside.value
        assert outcome.columns["price_out"][v] == outcome.value - outside.value


@pytest.mark.parametrize(("reach", "removed"), [(6, 0), (6, 25), (3, 40)])
def test_values_by_sets_agree_with_worths(reach: int, removed: int) -> None:
    """Two colours under weights that leave no room for what pins weigh more, against the same weights scaled down."""
    n, scale = 70, 2**50
    graph = windows(n, reach, removed, removed)
    weights = np.random.default_rng(reach).integers(1, 90, n)
    question = ColourableSubgraph(2, must=(3, 50), never=(7,), prices=True)
    small = run(question, n, graph.edges, weights)
    large = run(question, n, graph.edges, weights * scale)
    assert large.states > small.states
    assert large.value == small.value * scale
    assert weights[large.chosen].sum() == small.value
    for name in ("price_in", "price_out"):
        expected = small.columns[name]
        assert np.array_equal(large.columns[name], np.where(expected < 0, -1, expected * scale))


@pytest.mark.parametrize("colours", [3, 4])
def test_as_many_states_are_tried_as_predicted(colours: int) -> None:
    """A budget of exactly the states of all bags is enough, one less is not; pins change neither."""
    n = 50
    graph = windows(n, 6, 0, 1)
    sizes = [7] * (n - 6)  # maximal cliques
    states = sum(comb(size, k) for size in sizes for k in range(colours + 1))
    for must in ((), (3, 40)):
        question = ColourableSubgraph(colours, must=must)
        outcome = run(question, n, graph.edges, None, Budget(states=states))
        assert (outcome.verdict, outcome.states) == (Verdict.PROVEN, states)
        assert "state budget" in run(question, n, graph.edges, None, Budget(states=states - 1)).reason


@pytest.mark.parametrize("ask", QUESTIONS)
def test_prices_of_a_hub_with_many_leaves(ask) -> None:  # type: ignore[no-untyped-def]
    """A clique, less two edges, with a pair of its vertices under each of many others."""
    graph = nx.complete_graph(9)
    graph.remove_edges_from([(0, 1), (2, 3)])
    for leaf in range(9, 40):
        graph.add_edges_from([(leaf, leaf % 9), (leaf, leaf * 5 % 9 if leaf * 5 % 9 != leaf % 9 else (leaf + 1) % 9)])
    weights = np.random.default_rng(1).integers(1, 9, 40)
    outcome = run(ask(prices=True), 40, graph.edges, weights)
    for v in range(0, 40, 2):
        assert outcome.columns["price_in"][v] == outcome.value - run(ask(must=(v,)), 40, graph.edges, weights).value
        assert outcome.columns["price_out"][v] == outcome.value - run(ask(never=(v,)), 40, graph.edges, weights).value


@pytest.mark.parametrize("ask", QUESTIONS)
def test_prices_take_tables(ask) -> None:  # type: ignore[no-untyped-def]
    outcome = run(ask(prices=True), 5, [(0, 1), (1, 2), (2, 3), (3, 0), (3, 4)], [1] * 5, Budget(memory=1))
    assert "price_in" not in outcome.columns
    if outcome.value is not None and outcome.verdict is not Verdict.INFEASIBLE:
        assert "without prices: that takes an optimum proven by tables" in outcome.reason


@pytest.mark.parametrize("ask", QUESTIONS)
def test_scenarios_agree_with_separate_solves(ask) -> None:  # type: ignore[no-untyped-def]
    n = 40
    graph = windows(n, 4, 12, 2)
    weights = np.random.default_rng(7).integers(0, 30, (5, n))
    outcome = run(ask(must=(3,), never=(5, 6), scenarios=5), n, graph.edges, weights)
    columns = outcome.columns
    start = columns["scenario_start"]
    assert (outcome.verdict, outcome.proof) == (Verdict.PROVEN, "search")
    assert outcome.reason.endswith("proven for 5 of 5 scenarios")
    for r in range(5):
        single = run(ask(must=(3,), never=(5, 6)), n, graph.edges, weights[r])
        chosen = columns["scenario_chosen"][start[r] : start[r + 1]]
        assert columns["scenario_value"][r] == columns["scenario_bound"][r] == single.value
        assert weights[r][chosen].sum() == single.value
        assert chosen.tolist() == sorted(chosen.tolist())
        if isinstance(ask(), InducedForest):
            assert "scenario_colour" not in columns
            assert is_forest(graph.edges, chosen.tolist())
        else:
            given = columns["scenario_colour"][start[r] : start[r + 1]].tolist()
            colour = dict(zip(chosen.tolist(), given, strict=True))
            assert all(1 <= c <= ask().colours for c in colour.values())
            assert all(colour[u] != colour[v] for u, v in graph.edges if u in colour and v in colour)
    assert outcome.value == columns["scenario_value"][0]
    assert outcome.chosen.tolist() == columns["scenario_chosen"][: start[1]].tolist()


@pytest.mark.parametrize("ask", QUESTIONS[:1] + QUESTIONS[2:])
def test_scenarios_without_room_have_bounds(ask) -> None:  # type: ignore[no-untyped-def]
    n = 40
    graph = windows(n, 4, 12, 2)
    weights = np.random.default_rng(7).integers(0, 30, (3, n))
    outcome = run(ask(scenarios=3), n, graph.edges, weights, Budget(states=2))
    for r in range(3):
        best = run(ask(), n, graph.edges, weights[r]).value
        assert outcome.columns["scenario_value"][r] <= best <= outcome.columns["scenario_bound"][r]


@pytest.mark.parametrize("ask", QUESTIONS[:1] + QUESTIONS[2:])
def test_one_scenario_that_is_not_proven_leaves_the_whole_bounded(ask) -> None:  # type: ignore[no-untyped-def]
    """The first one has nothing to win, so any choice proves it."""
    n = 40
    weights = np.concatenate((np.zeros((1, n), np.int64), np.random.default_rng(7).integers(0, 30, (1, n))))
    outcome = run(ask(scenarios=2), n, windows(n, 4, 12, 2).edges, weights, Budget(states=2))
    assert outcome.columns["scenario_value"][0] == outcome.columns["scenario_bound"][0] == 0
    assert outcome.columns["scenario_value"][1] < outcome.columns["scenario_bound"][1]
    assert outcome.verdict is Verdict.BOUNDED
    assert outcome.reason.endswith("proven for 1 of 2 scenarios")


@pytest.mark.parametrize("ask", QUESTIONS[:1] + QUESTIONS[2:])
def test_a_cancel_between_scenarios_leaves_nothing(ask) -> None:  # type: ignore[no-untyped-def]
    monitor = Monitor()
    monitor.cells[Monitor.STOP] = Stop.CANCEL
    outcome = run(ask(scenarios=2), 4, [(0, 1)], np.ones((2, 4)), monitor=monitor)
    assert (outcome.verdict, outcome.value) == (Verdict.CANCELLED, None)


def test_add_ons_that_do_not_go_together_are_named() -> None:
    with pytest.raises(SolverError, match="goes with no other add-on: ask for prices in a job of its own"):
        run(InducedForest(prices=True, scenarios=1), 2, [], np.ones((1, 2)))
    with pytest.raises(SolverError, match="are needed for the 2 scenarios"):
        run(InducedForest(scenarios=2), 2, [], None)
