"""Recognition of chordal, interval and split graphs, with what confirms each answer."""

from itertools import combinations

import networkx as nx
import numpy as np
import pytest
from hypothesis import given, settings
from nearchord_solve import Graph, Monitor
from nearchord_solve.recognise import Interval, recognise_chordal, recognise_interval, recognise_split
from strategies import Edges, arbitrary_graphs, chordal_graphs, graphs, window_graphs


def drawn(edges: Edges) -> nx.Graph:
    graph = nx.empty_graph(edges[0])
    graph.add_edges_from(edges[1])
    return graph


def graph_of(graph: nx.Graph) -> Graph:
    return Graph.from_edges(graph.number_of_nodes(), list(graph.edges))


def confirm_order(graph: nx.Graph, order: list[int]) -> None:
    """Every vertex sees a clique among the later ones."""
    assert sorted(order) == list(range(graph.number_of_nodes()))
    place = {v: i for i, v in enumerate(order)}
    for v in order:
        later = [u for u in graph[v] if place[u] > place[v]]
        assert all(graph.has_edge(a, b) for a, b in combinations(later, 2))


def confirm_cycle(graph: nx.Graph, cycle: list[int]) -> None:
    """A cycle of at least four vertices, adjacent exactly where they follow each other."""
    c = len(cycle)
    assert c >= 4
    assert len(set(cycle)) == c
    for i, j in combinations(range(c), 2):
        assert graph.has_edge(cycle[i], cycle[j]) == (j - i in (1, c - 1))


def confirm_cliques(graph: nx.Graph, found: Interval) -> None:
    """All maximal cliques, and each vertex in consecutive ones."""
    assert found.ptr is not None
    assert found.vertex is not None
    cliques = [found.vertex[a:b].tolist() for a, b in zip(found.ptr[:-1], found.ptr[1:], strict=True)]
    assert sorted(cliques) == sorted(sorted(clique) for clique in nx.find_cliques(graph))
    for v in graph:
        at = [i for i, clique in enumerate(cliques) if v in clique]
        assert at == list(range(at[0], at[-1] + 1))


def asteroidal(graph: nx.Graph) -> bool:
    """Whether three vertices exist, each two joined by a path that avoids the neighbourhood of the third."""

    def linked(a: int, b: int, away: int) -> bool:
        rest = graph.copy()
        rest.remove_nodes_from([away, *graph[away]])
        return a in rest and b in rest and nx.has_path(rest, a, b)

    return any(linked(a, b, c) and linked(b, c, a) and linked(a, c, b) for a, b, c in combinations(graph, 3))


@settings(deadline=None)
@given(graphs())
def test_chordal_or_a_chordless_cycle(edges: Edges) -> None:
    """Either way the answer confirms itself, and agrees with networkx."""
    graph = drawn(edges)
    found = recognise_chordal(graph_of(graph), Monitor())
    assert found is not None
    if found.chordal:
        assert found.order is not None
        confirm_order(graph, found.order.tolist())
    else:
        assert found.cycle is not None
        confirm_cycle(graph, found.cycle.tolist())
    assert found.chordal == (edges[0] == 0 or nx.is_chordal(graph))


@settings(deadline=None)
@given(chordal_graphs(most=14))
def test_a_chordal_graph_is_interval_without_asteroidal_triples_only(edges: Edges) -> None:
    """Lekkerkerker and Boland, Fund. Math. 51 (1962) 45-64: interval = chordal without asteroidal triple."""
    graph = drawn(edges)
    found = recognise_interval(graph_of(graph), Monitor())
    assert found is not None
    assert found.interval != asteroidal(graph)
    if found.interval:
        confirm_cliques(graph, found)


@settings(deadline=None)
@given(window_graphs())
def test_overlaps_of_windows_are_interval_graphs(edges: Edges) -> None:
    """With a consecutive order of all maximal cliques."""
    found = recognise_interval(graph_of(drawn(edges)), Monitor())
    assert found is not None
    assert found.interval
    confirm_cliques(drawn(edges), found)


@pytest.mark.parametrize("legs", [2, 3])
def test_a_spider_is_interval_with_short_legs_only(legs: int) -> None:
    """A star whose three rays are subdivided has an asteroidal triple; with two such rays it has none."""
    spider = nx.Graph([(0, i) for i in (1, 2, 3)] + [(i, i + 3) for i in (1, 2, 3)[:legs]])
    found = recognise_interval(graph_of(nx.convert_node_labels_to_integers(spider)), Monitor())
    assert found is not None
    assert found.interval == (legs == 2)


@settings(deadline=None)
@given(arbitrary_graphs(most=6))
def test_splittance_is_the_distance_to_the_nearest_split_graph(edges: Edges) -> None:
    """Against all partitions: missing edges inside the clique plus edges inside the rest."""
    graph = drawn(edges)
    n = edges[0]
    found = recognise_split(graph_of(graph))
    assert found.splittance == min(
        sum(graph.has_edge(u, v) != (chosen >> u & 1) for u, v in combinations(range(n), 2) if same_side(chosen, u, v))
        for chosen in range(1 << n)
    )
    if found.split:
        assert found.clique is not None
        assert found.independent is not None
        assert sorted([*found.clique.tolist(), *found.independent.tolist()]) == list(range(n))
        assert all(graph.has_edge(u, v) for u, v in combinations(found.clique.tolist(), 2))
        assert not any(graph.has_edge(u, v) for u, v in combinations(found.independent.tolist(), 2))


def same_side(chosen: int, u: int, v: int) -> bool:
    return chosen >> u & 1 == chosen >> v & 1


def test_recognition_heeds_a_stop() -> None:
    """No answer then."""
    monitor = Monitor()
    monitor.cells[Monitor.STOP] = 1
    square = graph_of(nx.cycle_graph(4))
    assert recognise_chordal(square, monitor) is None
    assert recognise_interval(graph_of(nx.path_graph(4)), monitor) is None


def test_a_hole_is_found_in_a_long_ladder_of_squares() -> None:
    """The witness search looks into one part and finds a square."""
    graph = nx.convert_node_labels_to_integers(nx.ladder_graph(300))
    found = recognise_chordal(graph_of(graph), Monitor())
    assert found is not None
    assert found.cycle is not None
    assert found.cycle.dtype == np.int32
    confirm_cycle(graph, found.cycle.tolist())
