"""Questions colourable-subgraph and induced-forest: against trial, integer programs and published values."""

from functools import partial

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
    Structure,
    Verdict,
    solve,
)
from networkx.generators.atlas import graph_atlas_g
from scipy.optimize import Bounds, LinearConstraint, milp
from scipy.sparse import lil_matrix

QUESTIONS = [InducedForest, *(partial(ColourableSubgraph, q) for q in (1, 2, 3, 4))]


def run(question, n, edges, weights=None, budget=None, when_over="bound", monitor=None):  # type: ignore[no-untyped-def]
    """Solve with defaults."""
    array = None if weights is None else np.array(weights, np.int64)
    return solve(question, Graph.from_edges(n, edges), array, budget or Budget(), when_over, monitor or Monitor())


def holds(question):  # type: ignore[no-untyped-def]
    """The property that the question asks of a choice."""
    if isinstance(question, InducedForest):
        return is_forest
    return lambda edges, chosen: is_colourable(edges, chosen, question.colours)


def assert_coloured(question, outcome, edges) -> None:  # type: ignore[no-untyped-def]
    """Colours are in range and differ at the ends of every edge; a forest has no cycle."""
    if isinstance(question, InducedForest):
        assert "colour" not in outcome.columns
        assert is_forest(edges, outcome.chosen.tolist())
        return
    colour = dict(zip(outcome.chosen.tolist(), outcome.columns["colour"].tolist(), strict=True))
    assert all(1 <= c <= question.colours for c in colour.values())
    assert all(colour[u] != colour[v] for u, v in edges if u in colour and v in colour)


@pytest.mark.parametrize("ask", QUESTIONS)
def test_every_atlas_graph_agrees_with_trial(ask) -> None:  # type: ignore[no-untyped-def]
    rng = np.random.default_rng(5)
    for graph in graph_atlas_g()[1:900]:
        n, edges = graph.number_of_nodes(), list(graph.edges)
        weights = rng.integers(0, 5, n).tolist()
        question = ask()
        outcome = run(question, n, edges, weights)
        assert (outcome.verdict, outcome.bound) == (Verdict.PROVEN, outcome.value)
        assert sum(weights[v] for v in outcome.chosen) == outcome.value
        assert outcome.value == largest_by_trial(n, edges, weights, holds(question))
        assert_coloured(question, outcome, edges)


@pytest.mark.parametrize("ask", QUESTIONS)
@pytest.mark.parametrize("n", [8, 10, 12])
def test_random_graphs_with_pins_agree_with_trial(ask, n: int) -> None:  # type: ignore[no-untyped-def]
    rng = np.random.default_rng(n)
    for _ in range(6):
        upper = np.triu(rng.random((n, n)) < rng.uniform(0.2, 0.8), 1)
        edges = [(int(u), int(v)) for u, v in zip(*np.nonzero(upper), strict=True)]
        weights = rng.integers(0, 9, n).tolist()
        picked = [int(v) for v in rng.permutation(n)]
        must, never = picked[:3], picked[3:5]
        question = ask(must=must, never=never)
        outcome = run(question, n, edges, weights)
        best = largest_by_trial(n, edges, weights, holds(question), must, never)
        if best is None:
            assert outcome.verdict is Verdict.INFEASIBLE
            continue
        assert (outcome.verdict, outcome.value, outcome.bound) == (Verdict.PROVEN, best, best)
        assert set(must) <= set(outcome.chosen.tolist())
        assert not set(never) & set(outcome.chosen.tolist())
        assert_coloured(question, outcome, edges)


def windows(n: int, reach: int, removed: int, seed: int) -> nx.Graph:
    """A power of a path, shuffled, with some edges removed: nearly chordal."""
    rng = np.random.default_rng(seed)
    graph = nx.power(nx.path_graph(n), reach)
    edges = sorted(graph.edges)
    graph.remove_edges_from([edges[i] for i in rng.choice(len(edges), removed, replace=False)])
    return nx.relabel_nodes(graph, dict(enumerate(int(v) for v in rng.permutation(n))))


def milp_colours(graph: nx.Graph, weights: list[int], colours: int) -> int:
    """HiGHS: x[v, c], one colour a vertex, one vertex a colour in each maximal clique."""
    n = graph.number_of_nodes()
    cliques = list(nx.find_cliques(graph))
    rows = lil_matrix((n + len(cliques) * colours, n * colours))
    for v in range(n):
        for c in range(colours):
            rows[v, v * colours + c] = 1
    for i, clique in enumerate(cliques):
        for c in range(colours):
            for v in clique:
                rows[n + i * colours + c, v * colours + c] = 1
    found = milp(
        -np.repeat(weights, colours), constraints=LinearConstraint(rows.tocsr(), ub=1), bounds=Bounds(0, 1),
        integrality=np.ones(n * colours),
    )  # fmt: skip
    return round(-found.fun)


def milp_forest(graph: nx.Graph, weights: list[int]) -> int:
    """HiGHS with cycle cuts until no cycle is chosen."""
    n = graph.number_of_nodes()
    cuts = [list(c) for c in nx.enumerate_all_cliques(graph) if len(c) == 3]
    while True:
        rows = lil_matrix((max(len(cuts), 1), n))
        for i, cycle in enumerate(cuts):
            rows[i, cycle] = 1
        limits = np.array([len(cycle) - 1 for cycle in cuts] or [n])
        found = milp(
            -np.array(weights), constraints=LinearConstraint(rows.tocsr(), ub=limits), bounds=Bounds(0, 1),
            integrality=np.ones(n),
        )  # fmt: skip
        inside = graph.subgraph([v for v in range(n) if found.x[v] > 0.5])
        fresh = nx.cycle_basis(inside)
        if not fresh:
            return round(-found.fun)
        cuts += fresh


@pytest.mark.parametrize("seed", range(4))
def test_larger_graphs_agree_with_integer_programs(seed: int) -> None:
    graph = windows(60, 5, 25, seed)
    weights = np.random.default_rng(seed).integers(1, 50, 60).tolist()
    for question, best in (
        (InducedForest(), milp_forest(graph, weights)),
        (ColourableSubgraph(2), milp_colours(graph, weights, 2)),
        (ColourableSubgraph(3), milp_colours(graph, weights, 3)),
    ):
        outcome = run(question, 60, graph.edges, weights)
        assert (outcome.verdict, outcome.value) == (Verdict.PROVEN, best)
        assert_coloured(question, outcome, graph.edges)


def test_forest_is_two_colourable_subgraph_on_chordal_graphs() -> None:
    """A chordal graph without triangle has no cycle."""
    for seed in range(5):
        graph = windows(200, 6, 0, seed)
        weights = np.random.default_rng(seed).integers(1, 50, 200).tolist()
        forest = run(InducedForest(), 200, graph.edges, weights)
        colours = run(ColourableSubgraph(2), 200, graph.edges, weights)
        assert forest.value == colours.value == forest.bound
        assert is_forest(graph.edges, forest.chosen.tolist())


@pytest.mark.parametrize(
    ("graph", "vertices", "forest", "bipartite"),
    [
        (nx.petersen_graph(), 10, 3, 3),
        (nx.icosahedral_graph(), 12, 6, 6),
        (nx.dodecahedral_graph(), 20, 6, 6),
        (nx.chvatal_graph(), 12, 5, 4),
        (nx.mycielski_graph(4), 11, 4, 3),
        (nx.hypercube_graph(3), 8, 3, 0),
        (nx.hypercube_graph(4), 16, 6, 0),
        (nx.heawood_graph(), 14, 4, 0),
        (nx.pappus_graph(), 18, 5, 0),
        (nx.desargues_graph(), 20, 6, 0),
        (nx.grid_2d_graph(4, 4), 16, 4, 0),
        (nx.grid_2d_graph(4, 5), 20, 5, 0),
    ],
)
def test_feedback_vertex_and_odd_cycle_transversal_numbers(
    graph: nx.Graph, vertices: int, forest: int, bipartite: int
) -> None:
    """Recomputed with two general solvers; the last seven are bipartite by construction."""
    plain = nx.convert_node_labels_to_integers(graph)
    assert run(InducedForest(), vertices, plain.edges).value == vertices - forest
    assert run(ColourableSubgraph(), vertices, plain.edges).value == vertices - bipartite


def test_states_are_those_that_the_structure_predicts() -> None:
    graph = windows(60, 5, 25, 3)
    report = run(Structure(), 60, graph.edges).report
    predicted = {(one.question, one.colours): one.states for one in report.predictions}
    for q in (2, 3):
        outcome = run(ColourableSubgraph(q), 60, graph.edges)
        assert outcome.states == predicted["colourable-subgraph", q]


@pytest.mark.parametrize("budget", [Budget(states=3), Budget(memory=1), Budget(memory=2**20 + 20000)])
@pytest.mark.parametrize("ask", QUESTIONS[1:] + QUESTIONS[:1])
def test_small_budgets_leave_a_feasible_choice_and_a_valid_bound(ask, budget: Budget) -> None:  # type: ignore[no-untyped-def]
    graph = windows(60, 5, 25, 1)
    question = ask()
    outcome, exact = run(question, 60, graph.edges, budget=budget), run(question, 60, graph.edges)
    assert exact.verdict is Verdict.PROVEN
    assert outcome.value <= exact.value <= outcome.bound
    assert_coloured(question, outcome, graph.edges)


@pytest.mark.parametrize("colours", [0, 5])
def test_colours_out_of_range_are_named(colours: int) -> None:
    with pytest.raises(SolverError, match="must be 1 to 4"):
        run(ColourableSubgraph(colours), 3, [(0, 1)])


@pytest.mark.parametrize("ask", QUESTIONS)
@pytest.mark.parametrize("stop", [Stop.SECONDS, Stop.CANCEL])
def test_a_stop_is_heeded(ask, stop: Stop) -> None:  # type: ignore[no-untyped-def]
    monitor = Monitor()
    monitor.cells[Monitor.STOP] = stop
    graph = windows(40, 4, 9, 4)
    outcome = run(ask(), 40, graph.edges, monitor=monitor)
    if stop is Stop.CANCEL:
        assert (outcome.verdict, outcome.value) == (Verdict.CANCELLED, None)
    else:
        assert outcome.value <= outcome.bound


@pytest.mark.parametrize("n", [0, 1])
@pytest.mark.parametrize("ask", QUESTIONS)
def test_tiny_graphs(ask, n: int) -> None:  # type: ignore[no-untyped-def]
    assert run(ask(), n, []).value == n
