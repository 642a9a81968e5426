"""Exact fill of parts: answers, limits, stops, proofs."""

from collections.abc import Iterable
from itertools import product

import networkx as nx
import numpy as np
import pytest
from definition import least_fill
from fill_proof import confirm
from hypothesis import given, settings
from nearchord_solve import Graph, Monitor
from nearchord_solve.fill.exact import FillResult, Packing, PieceProof, ProofKind, fill_of_parts, minimum_fill
from strategies import arbitrary_graphs, graphs


def rows(graph: nx.Graph) -> Graph:
    return Graph.from_edges(graph.number_of_nodes(), list(graph.edges))


def fill_of(graph: nx.Graph, limit: int | None = None, monitor: Monitor | None = None) -> FillResult:
    part = rows(graph)
    return minimum_fill(part.ptr, part.adj, limit, monitor or Monitor())


def plain(graph: nx.Graph) -> nx.Graph:
    return nx.convert_node_labels_to_integers(graph)


def drawn(edges: tuple[int, list[tuple[int, int]]]) -> nx.Graph:
    graph = nx.empty_graph(edges[0])
    graph.add_edges_from(edges[1])
    return graph


@settings(deadline=None)
@given(arbitrary_graphs(most=10))
def test_fill_of_any_graph_is_least(edges: tuple[int, list[tuple[int, int]]]) -> None:
    """Against a dynamic program over all elimination orders."""
    result = fill_of(drawn(edges))
    assert result.lower_bound == result.upper_bound == least_fill(*edges)
    confirm(drawn(edges), result)


@settings(deadline=None)
@given(graphs())
def test_every_answer_is_confirmed_from_the_definitions(edges: tuple[int, list[tuple[int, int]]]) -> None:
    """Chordal after the fill, no part of it to spare, each bound as its proof says."""
    result = fill_of(drawn(edges))
    assert not result.over
    confirm(drawn(edges), result)


@pytest.mark.parametrize("graph", [nx.empty_graph(0), nx.empty_graph(5), nx.path_graph(9), nx.complete_graph(6)])
def test_chordal_graphs_need_nothing(graph: nx.Graph) -> None:
    """No fill, no pieces, proven."""
    result = fill_of(graph)
    assert result.edges.shape == (0, 2)
    assert result.edges.dtype == np.int32
    assert (result.lower_bound, result.upper_bound, result.proof, result.pieces) == (0, 0, ProofKind.PACKING, ())


def test_a_square_is_proven_by_its_own_cycle() -> None:
    """The packing of C4 is C4."""
    result = fill_of(nx.cycle_graph(4))
    (piece,) = result.pieces
    assert piece.packing is not None
    assert sorted(piece.packing.vertex.tolist()) == [0, 1, 2, 3]
    assert piece.kind is ProofKind.PACKING


def test_true_twins_stay_together_in_the_packing() -> None:
    """A square of cliques of 2, 3, 2, 4 vertices: the cheaper diagonal costs 2 * 2."""
    sizes = (2, 3, 2, 4)
    graph = nx.lexicographic_product(nx.cycle_graph(4), nx.complete_graph(4))
    graph.remove_nodes_from([(i, j) for i, j in graph if j >= sizes[i]])
    result = fill_of(plain(graph))
    assert result.upper_bound == result.lower_bound == 4
    confirm(plain(graph), result)


def test_a_limit_below_the_fill_number_ends_over_with_a_bound_above_it() -> None:
    """And a limit that suffices does not."""
    graph = plain(nx.grid_2d_graph(4, 4))
    for limit in (0, 5, 16, 17):
        result = fill_of(graph, limit)
        assert result.over
        assert limit < result.lower_bound <= 18
    for limit in (18, 30):
        result = fill_of(graph, limit)
        assert not result.over
        assert result.lower_bound == result.upper_bound == 18


def test_the_limit_is_for_all_parts_together() -> None:
    """Two hexagons need six."""
    part = rows(nx.cycle_graph(6))
    both = [(part.ptr, part.adj)] * 2
    assert all(result.over for result in fill_of_parts(both, 5, Monitor()))
    assert [result.upper_bound for result in fill_of_parts(both, 6, Monitor())] == [3, 3]


def test_a_stop_leaves_a_minimal_fill_and_a_valid_interval() -> None:
    """Told to stop before it begins."""
    monitor = Monitor()
    monitor.cells[Monitor.STOP] = 1
    graph = plain(nx.grid_2d_graph(5, 5))
    result = fill_of(graph, None, monitor)
    assert result.lower_bound <= 37 <= result.upper_bound
    assert result.proof is ProofKind.NONE
    confirm(graph, result)


def test_the_same_part_gives_the_same_answer() -> None:
    """Bit for bit, proofs included."""
    graph = plain(nx.grid_2d_graph(4, 5))
    one, other = fill_of(graph), fill_of(graph)
    assert one.edges.tobytes() == other.edges.tobytes()
    assert [written(piece) for piece in one.pieces] == [written(piece) for piece in other.pieces]


def written(piece: PieceProof) -> list[object]:
    """A proof and its tree as plain values."""
    packings = [piece.packing, *(node.packing for node in piece.tree)]
    nodes = [(node.pair, node.added, node.forbidden) for node in piece.tree]
    return [piece.kind, piece.bound, piece.vertices.tobytes(), nodes, *map(numbers, packings)]


def numbers(packing: Packing | None) -> list[object]:
    """All that a packing holds."""
    if packing is None:
        return []
    arrays = (packing.ring, packing.group, packing.vertex, packing.numerators)
    return [packing.denominator, *(array.tobytes() for array in arrays)]


def test_a_few_cases_are_given_as_a_tree() -> None:
    """The 4 x 4 grid leaves a gap of one to its best packing; cases close it, and their tree is the proof."""
    graph = plain(nx.grid_2d_graph(4, 4))
    result = fill_of(graph)
    assert result.proof is ProofKind.BRANCH
    confirm(graph, result)


@pytest.mark.parametrize(("doubled", "fill"), [([0], 18), (range(16), 4 * 18)])
def test_cases_about_classes_are_no_proof(doubled: Iterable[int], fill: int) -> None:
    """The grid with true twins in place of some vertices: a case is then about several pairs at once, which no tree can
    say, and the packing alone does not reach the bound."""
    grid = plain(nx.grid_2d_graph(4, 4))
    copies = {v: [(v, i) for i in range(1 + (v in doubled))] for v in grid}
    graph = nx.Graph(pair for u, v in grid.edges for pair in product(copies[u], copies[v]))
    graph.add_edges_from(copies[v] for v in doubled)
    graph = nx.convert_node_labels_to_integers(graph, ordering="sorted")
    result = fill_of(graph)
    assert result.lower_bound == result.upper_bound == fill
    assert result.proof is ProofKind.SEARCH
    confirm(graph, result)


def test_a_part_is_proven_as_its_weakest_piece_is() -> None:
    """A packing for the square beside the grid does not make up for the grid's tree."""
    graph = nx.disjoint_union(nx.cycle_graph(4), plain(nx.grid_2d_graph(4, 4)))
    result = fill_of(graph)
    assert {piece.kind for piece in result.pieces} == {ProofKind.PACKING, ProofKind.BRANCH}
    assert result.proof is ProofKind.BRANCH
    confirm(graph, result)


def test_the_monitor_learns_the_fill_and_the_lower_bound() -> None:
    """After the last part."""
    monitor = Monitor()
    fill_of(plain(nx.grid_2d_graph(4, 4)), None, monitor)
    assert monitor.cells[Monitor.FILL_LOWER] == monitor.cells[Monitor.FILL] == 18
