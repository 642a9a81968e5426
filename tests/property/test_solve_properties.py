"""Properties of answers over drawn graphs, judged by scipy's mixed-integer solver and by the definitions."""

import networkx as nx
import numpy as np
from definition import is_cover, is_independent, networkx_graph
from hypothesis import given, settings
from hypothesis import strategies as st
from nearchord_solve import Budget, Graph, IndependentSet, Monitor, Verdict, VertexCover, solve
from nearchord_solve.fill import cores
from nearchord_solve.tree import Structure, build_structure
from scipy.optimize import Bounds, LinearConstraint, milp
from scipy.sparse import csr_array
from strategies import Edges, chordal_graphs, graphs, near_chordal_graphs, weighted_graphs


def heaviest_by_milp(n: int, edges: list[tuple[int, int]], weights: list[int]) -> int:
    """Weight of the heaviest independent set by HiGHS on the edge formulation."""
    if n == 0:
        return 0
    rows = np.repeat(np.arange(len(edges)), 2)
    columns = np.array(edges, np.int64).reshape(-1)
    matrix = csr_array((np.ones(rows.size), (rows, columns)), shape=(len(edges), n))
    constraints = [LinearConstraint(matrix, -np.inf, 1)] if edges else []
    result = milp(-np.array(weights), integrality=np.ones(n), bounds=Bounds(0, 1), constraints=constraints)
    return round(-result.fun)


@settings(max_examples=150, deadline=None)
@given(weighted_graphs())
def test_value_is_that_of_a_general_solver(drawn: tuple[int, list[tuple[int, int]], list[int]]) -> None:
    n, edges, weights = drawn
    graph = Graph.from_edges(n, edges)
    outcome = solve(IndependentSet(), graph, np.array(weights, np.int64), Budget(), "bound", Monitor())
    assert outcome.verdict is Verdict.PROVEN
    assert outcome.value == outcome.bound == heaviest_by_milp(n, edges, weights)
    assert is_independent(edges, outcome.chosen.tolist())
    assert sum(weights[v] for v in outcome.chosen.tolist()) == outcome.value


@settings(max_examples=100, deadline=None)
@given(weighted_graphs(), st.data())
def test_pins_are_kept_and_the_rest_is_best(
    drawn: tuple[int, list[tuple[int, int]], list[int]], data: st.DataObject
) -> None:
    n, edges, weights = drawn
    vertices = st.lists(st.integers(0, n - 1), max_size=3) if n else st.just([])
    must, never = data.draw(vertices), data.draw(vertices)
    graph = Graph.from_edges(n, edges)
    question = IndependentSet(must=must, never=never)
    outcome = solve(question, graph, np.array(weights, np.int64), Budget(), "bound", Monitor())
    if set(must) & set(never) or not is_independent(edges, must):
        assert outcome.verdict is Verdict.INFEASIBLE
        return
    # a weight that outweighs everything stands for `must`, dropping the vertex for `never`
    heavy = sum(weights) + 1
    pinned = [weights[v] + heavy * (v in must) for v in range(n)]
    kept = [v for v in range(n) if v not in never]
    name = {v: i for i, v in enumerate(kept)}
    rest = [(name[u], name[v]) for u, v in edges if u in name and v in name]
    best = heaviest_by_milp(len(kept), rest, [pinned[v] for v in kept])
    assert outcome.value == best - heavy * len(set(must))
    assert set(must) <= set(outcome.chosen.tolist())
    assert not set(never) & set(outcome.chosen.tolist())


@settings(max_examples=100, deadline=None)
@given(weighted_graphs())
def test_cover_and_independent_set_add_up(drawn: tuple[int, list[tuple[int, int]], list[int]]) -> None:
    n, edges, weights = drawn
    graph, array = Graph.from_edges(n, edges), np.array(weights, np.int64)
    cover = solve(VertexCover(), graph, array, Budget(), "bound", Monitor())
    independent = solve(IndependentSet(), graph, array, Budget(), "bound", Monitor())
    assert is_cover(edges, cover.chosen.tolist())
    assert cover.value == cover.bound == sum(weights) - independent.value


@settings(max_examples=150, deadline=None)
@given(weighted_graphs(), st.integers(1, 60), st.sampled_from(["bound", "stop"]))
def test_intervals_hold_the_optimum(
    drawn: tuple[int, list[tuple[int, int]], list[int]], states: int, when_over: str
) -> None:
    n, edges, weights = drawn
    graph, array = Graph.from_edges(n, edges), np.array(weights, np.int64)
    outcome = solve(IndependentSet(), graph, array, Budget(states=states), when_over, Monitor())
    assert is_independent(edges, outcome.chosen.tolist())
    assert outcome.value == array[outcome.chosen].sum()
    assert outcome.value <= heaviest_by_milp(n, edges, weights) <= outcome.bound
    assert (outcome.verdict is Verdict.PROVEN) == (outcome.value == outcome.bound)


@settings(max_examples=100, deadline=None)
@given(weighted_graphs())
def test_large_cores_give_the_same_value(drawn: tuple[int, list[tuple[int, int]], list[int]]) -> None:
    """The sparse way through a core, which keeps the whole graph's order, is exact too."""
    n, edges, weights = drawn
    graph, array = Graph.from_edges(n, edges), np.array(weights, np.int64)
    dense = solve(IndependentSet(), graph, array, Budget(), "bound", Monitor())
    limit = cores.DENSE_LIMIT
    cores.DENSE_LIMIT = 0
    try:
        sparse = solve(IndependentSet(), graph, array, Budget(), "bound", Monitor())
    finally:
        cores.DENSE_LIMIT = limit
    assert (sparse.value, sparse.bound) == (dense.value, dense.bound)
    assert is_independent(edges, sparse.chosen.tolist())


@settings(max_examples=150, deadline=None)
@given(graphs())
def test_adding_the_fill_gives_a_chordal_graph(drawn: Edges) -> None:
    n, edges = drawn
    built = build_structure(Graph.from_edges(n, edges), Budget(), Monitor())
    assert isinstance(built, Structure)
    graph = networkx_graph(n, edges)
    chordal = nx.is_chordal(graph)
    graph.add_edges_from(built.fill_edges().tolist())
    assert nx.is_chordal(graph)
    assert (built.fill == 0) == chordal
    assert built.fill_lower_bound <= built.fill


@settings(max_examples=60, deadline=None)
@given(chordal_graphs())
def test_chordal_graphs_need_no_fill_and_have_their_maximal_cliques_as_bags(drawn: Edges) -> None:
    n, edges = drawn
    built = build_structure(Graph.from_edges(n, edges), Budget(), Monitor())
    assert isinstance(built, Structure)
    cliques = list(nx.find_cliques(networkx_graph(n, edges))) if n else []
    assert built.fill == 0
    assert built.bags == built.parts == len(cliques)
    assert built.largest_bag == max(map(len, cliques), default=0)


@settings(max_examples=60, deadline=None)
@given(near_chordal_graphs())
def test_lower_bound_never_exceeds_the_edges_taken_out(drawn: Edges) -> None:
    """At most six edges were removed from a chordal graph, so putting them back is a fill."""
    built = build_structure(Graph.from_edges(*drawn), Budget(), Monitor())
    assert isinstance(built, Structure)
    assert built.fill_lower_bound <= 6
