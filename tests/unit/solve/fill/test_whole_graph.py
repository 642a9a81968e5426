"""Exact fill of whole graphs, localised to their parts."""

import networkx as nx
import numpy as np
import pytest
from bench.generators import time_windows
from definition import least_fill
from fill_proof import confirm, is_chordal, spare
from hypothesis import given, settings
from nearchord_solve import Budget, Graph, Monitor
from nearchord_solve.fill.exact import FillResult, GraphFill, ProofKind, fill_of_graph, whole
from nearchord_solve.structure import Structure
from nearchord_solve.tree import build_structure
from strategies import Edges, graphs, near_chordal_graphs


def solved(graph: nx.Graph, limit: int | None = None) -> GraphFill:
    return searched(Graph.from_edges(graph.number_of_nodes(), list(graph.edges)), limit)


def searched(graph: Graph, limit: int | None = None) -> GraphFill:
    structure = build_structure(graph, Budget(), Monitor())
    assert isinstance(structure, Structure)
    return fill_of_graph(graph, structure, limit, Monitor())


def drawn(edges: Edges) -> nx.Graph:
    graph = nx.empty_graph(edges[0])
    graph.add_edges_from(edges[1])
    return graph


@settings(deadline=None)
@given(graphs())
def test_fill_of_the_whole_is_a_minimal_fill(edges: Edges) -> None:
    """In vertices of the graph; each part is confirmed from the definitions."""
    graph = drawn(edges)
    found = solved(graph)
    fill = [tuple(pair) for pair in found.edges.tolist()]
    assert is_chordal(graph, fill)
    assert not spare(graph, fill)
    for part in found.parts:
        assert part.result is not None
        inside = nx.convert_node_labels_to_integers(graph.subgraph(part.vertices.tolist()), ordering="sorted")
        confirm(inside, part.result)


@settings(deadline=None)
@given(near_chordal_graphs(most=11))
def test_fill_of_the_whole_is_least(edges: Edges) -> None:
    """Against the dynamic program over elimination orders of the whole graph."""
    found = solved(drawn(edges))
    assert found.lower_bound == found.upper_bound == least_fill(*edges)


@settings(deadline=None)
@given(near_chordal_graphs(most=20, removed=0))
def test_chordal_graphs_have_no_parts_with_fill(edges: Edges) -> None:
    """Nothing to search."""
    found = solved(drawn(edges))
    assert found.parts == ()
    assert found.upper_bound == found.lower_bound == 0


def test_fill_never_exceeds_the_number_of_removed_conflicts() -> None:
    """Time windows are chordal before: putting the removed pairs back is one fill."""
    for seed in range(3):
        windows = time_windows(2000, 20.0, 100, seed)
        graph = Graph.from_canonical(windows.n, *windows.canonical())
        found = searched(graph)
        assert found.lower_bound == found.upper_bound <= 100
        assert set(found.kinds) == {ProofKind.PACKING}


def test_the_limit_is_for_the_whole_graph() -> None:
    """Three squares, apart."""
    squares = nx.disjoint_union_all([nx.cycle_graph(4)] * 3)
    assert solved(squares, 2).over
    assert solved(squares, 2).lower_bound == 3
    assert not solved(squares, 3).over


def test_a_stop_before_the_search_leaves_the_fill_of_the_structure() -> None:
    """The caller has a fill and a lower bound at any time."""
    square = Graph.from_edges(4, [(0, 1), (1, 2), (2, 3), (0, 3)])
    structure = build_structure(square, Budget(), Monitor())
    assert isinstance(structure, Structure)
    monitor = Monitor()
    monitor.cells[Monitor.STOP] = 1
    found = fill_of_graph(square, structure, None, monitor)
    assert [part.result for part in found.parts] == [None]
    assert found.upper_bound == found.lower_bound == 1


def test_the_fill_of_the_structure_stands_where_the_search_finds_none_as_small(monkeypatch: pytest.MonkeyPatch) -> None:
    """A search that was stopped early may have nothing better than joining all pairs."""
    every = np.array([(0, 2), (0, 3), (1, 3), (1, 4), (2, 4)], np.int32)
    poor = FillResult(every, 1, 5, ProofKind.NONE, (), False)
    monkeypatch.setattr(whole, "fill_of_parts", lambda *_: [poor])
    found = solved(nx.cycle_graph(5))
    assert found.upper_bound == found.parts[0].edges.shape[0] == 2
    assert is_chordal(nx.cycle_graph(5), [tuple(pair) for pair in found.edges.tolist()])


def test_edges_are_sorted_pairs_of_the_graph() -> None:
    """Dtype and order are part of the contract."""
    found = solved(nx.disjoint_union(nx.path_graph(3), nx.cycle_graph(5)))
    assert found.edges.dtype == np.int32
    assert found.edges.shape == (2, 2)
    assert (found.edges >= 3).all()
