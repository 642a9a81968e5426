"""Cores too large for matrices of numbers: reductions, heuristics and a packing of disjoint cycles remain."""

from itertools import combinations

import networkx as nx
import numpy as np
import pytest
from definition import least_fill
from fill_proof import confirm
from hypothesis import HealthCheck, given, settings
from nearchord_solve import Budget, Graph, Monitor
from nearchord_solve.fill.exact import GraphFill, ProofKind, fill_of_graph, greedy, minimum_fill
from nearchord_solve.fill.exact.core import Core
from nearchord_solve.fill.exact.greedy import coarse_portfolio
from nearchord_solve.fill.exact.packing import disjoint, packing_of
from nearchord_solve.structure import Structure
from nearchord_solve.tree import build_structure
from strategies import Edges, arbitrary_graphs, graphs


@pytest.fixture
def none_small(monkeypatch: pytest.MonkeyPatch) -> None:
    """Every core counts as large."""
    monkeypatch.setattr(greedy, "MOST_DENSE", 0)


def rows(graph: nx.Graph) -> Graph:
    plain = nx.convert_node_labels_to_integers(graph)
    return Graph.from_edges(plain.number_of_nodes(), list(plain.edges))


def drawn(edges: Edges) -> nx.Graph:
    graph = nx.empty_graph(edges[0])
    graph.add_edges_from(edges[1])
    return graph


def searched(graph: Graph, memory: int | None = None) -> GraphFill:
    structure = build_structure(graph, Budget(), Monitor())
    assert isinstance(structure, Structure)
    if memory is None:
        return fill_of_graph(graph, structure, None, Monitor())
    return fill_of_graph(graph, structure, None, Monitor(), structure.held_bytes + memory)


@settings(deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(graphs())
def test_answers_are_confirmed_from_the_definitions(none_small: None, edges: Edges) -> None:
    """A minimal fill, and packings that prove the bounds: nothing else is tried."""
    part = Graph.from_edges(*edges)
    result = minimum_fill(part.ptr, part.adj, None, Monitor())
    confirm(drawn(edges), result)
    assert {piece.kind for piece in result.pieces} <= {ProofKind.PACKING, ProofKind.SEARCH}


@settings(deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(arbitrary_graphs(most=9))
def test_the_interval_holds_the_fill_number(none_small: None, edges: Edges) -> None:
    """Against a dynamic program over all elimination orders; limits are exceeded only where it is."""
    least = least_fill(*edges)
    part = Graph.from_edges(*edges)
    result = minimum_fill(part.ptr, part.adj, least, Monitor())
    assert result.lower_bound <= least <= result.upper_bound
    assert not result.over


@settings(deadline=None)
@given(graphs())
def test_cycles_of_the_packing_are_chordless_and_share_no_pair(edges: Edges) -> None:
    """Straight from the definition."""
    graph = drawn(edges)
    part = Graph.from_edges(*edges)
    core = Core.from_rows(part.ptr, part.adj)
    fill = coarse_portfolio(core, Monitor())
    assert fill is not None
    bound, cycles, multipliers = disjoint(core, fill, Monitor().cells)
    packing = packing_of(core, cycles, multipliers)
    taken: set[frozenset[int]] = set()
    for ring in np.split(packing.vertex, packing.ring[1:-1]) if packing.vertex.size else ():
        cycle = ring.tolist()
        apart = {frozenset(pair) for pair in combinations(cycle, 2) if not graph.has_edge(*pair)}
        assert len(cycle) >= 4
        assert nx.cycle_graph(len(cycle)).number_of_edges() == graph.subgraph(cycle).number_of_edges()
        assert all(graph.has_edge(u, v) for u, v in zip(cycle, [*cycle[1:], cycle[0]], strict=True))
        assert not apart & taken
        taken |= apart
    assert bool(fill.size) == bool(taken)
    assert bound == packing.vertex.size - 3 * packing.numerators.size


def test_a_long_cycle_is_proven() -> None:
    """3,000 vertices that no reduction splits: the cycle is its own packing."""
    found = searched(rows(nx.cycle_graph(3000)))
    assert found.lower_bound == found.upper_bound == 2997
    assert found.kinds == (ProofKind.PACKING,)


def test_a_large_part_that_falls_apart_is_searched_in_full() -> None:
    """A ladder of 2,400 vertices: its squares are atoms."""
    ladder = rows(nx.grid_2d_graph(2, 1200))
    found = minimum_fill(ladder.ptr, ladder.adj, None, Monitor())
    assert found.lower_bound == found.upper_bound == len(found.pieces) == 1199


def test_a_large_grid_has_a_square_for_each_bound() -> None:
    """48 x 48: disjoint squares are all of them, as no two share a diagonal."""
    (part,) = searched(rows(nx.grid_2d_graph(48, 48))).parts
    assert part.result is not None
    assert part.lower_bound == 47 * 47
    assert part.kind is ProofKind.NONE


def test_a_part_that_does_not_fit_into_memory_keeps_what_the_structure_has() -> None:
    """And a smaller one beside it is searched."""
    graph = rows(nx.disjoint_union(nx.cycle_graph(3000), nx.cycle_graph(50)))
    found = searched(graph, 1_000_000)
    assert [(part.vertices.size, part.result is None) for part in found.parts] == [(3000, True), (50, False)]
    assert found.upper_bound == 2997 + 47


def test_a_stop_leaves_an_interval(none_small: None) -> None:
    """Told to stop before it begins."""
    monitor = Monitor()
    monitor.cells[Monitor.STOP] = 1
    part = rows(nx.grid_2d_graph(5, 5))
    result = minimum_fill(part.ptr, part.adj, None, monitor)
    assert result.lower_bound <= 37 <= result.upper_bound
    assert result.proof is ProofKind.NONE
