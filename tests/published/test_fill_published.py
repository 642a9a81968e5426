"""Minimum fill against values from outside the project."""

import os
from math import comb

import networkx as nx
import pytest
from definition import least_fill
from fill_proof import confirm
from nearchord_solve import Graph, Monitor
from nearchord_solve.fill.exact import FillResult, ProofKind, minimum_fill
from networkx.generators.atlas import graph_atlas_g
from published.reference_graphs import SHARED

# Recomputed by two independent general-purpose methods before this project.
NAMED = {
    "4x4 grid": (nx.grid_2d_graph(4, 4), 18),
    "4x5 grid": (nx.grid_2d_graph(4, 5), 25),
    "Petersen": (nx.petersen_graph(), 12),
    "cube": (nx.hypercube_graph(3), 6),
    "Q4": (nx.hypercube_graph(4), 27),
    "octahedron": (nx.octahedral_graph(), 2),
    "icosahedron": (nx.icosahedral_graph(), 19),
    "dodecahedron": (nx.dodecahedral_graph(), 39),
    "Heawood": (nx.heawood_graph(), 21),
    "Moebius-Kantor": (nx.moebius_kantor_graph(), 27),
    "Pappus": (nx.pappus_graph(), 33),
    "Desargues": (nx.desargues_graph(), 39),
    "Frucht": (nx.frucht_graph(), 12),
    "Franklin": (nx.LCF_graph(12, [5, -5], 6), 15),
    "Chvatal": (nx.chvatal_graph(), 19),
    "Clebsch": (nx.Graph([(a, a ^ d) for a in range(16) for d in (1, 2, 4, 8, 15)]), 40),
    "Shrikhande": (
        nx.Graph(
            ((a, b), ((a + x) % 4, (b + y) % 4))
            for a in range(4)
            for b in range(4)
            for x, y in ((1, 0), (0, 1), (1, 1))
        ),
        38,
    ),
    "4x4 rook": (nx.line_graph(nx.complete_bipartite_graph(4, 4)), 38),
    "Mycielski 3": (nx.mycielski_graph(4), 10),
    "Mycielski 4": (nx.mycielski_graph(5), 46),
}

# Proved by cutting planes before this project: huck .. fpsol2.i.1.  david and mulsol.i.1: best fill found before; the
# packings found here prove them.
COLOURING = {
    "huck": 5,
    "jean": 16,
    "anna": 47,
    "miles250": 53,
    "david": 64,
    "mulsol.i.1": 142,
    "zeroin.i.1": 218,
    "fpsol2.i.1": 204,
}


def fill_of(graph: nx.Graph) -> FillResult:
    part = Graph.from_edges(graph.number_of_nodes(), list(graph.edges))
    return minimum_fill(part.ptr, part.adj, None, Monitor())


def least(graph: nx.Graph) -> int:
    """The fill number, confirmed."""
    plain = nx.convert_node_labels_to_integers(graph)
    result = fill_of(plain)
    confirm(plain, result)
    assert result.lower_bound == result.upper_bound
    return result.upper_bound


def queen(k: int) -> nx.Graph:
    """Squares of a k x k board, joined when a queen moves from one to the other."""
    squares = [(i, j) for i in range(k) for j in range(k)]
    graph = nx.Graph()
    graph.add_edges_from(
        (a, b)
        for a in squares
        for b in squares
        if a < b and (a[0] == b[0] or a[1] == b[1] or abs(a[0] - b[0]) == abs(a[1] - b[1]))
    )
    return graph


def test_all_atlas_graphs_against_brute_force() -> None:
    """All 1,253 graphs on up to seven vertices (Read and Wilson, An Atlas of Graphs, as networkx has them)."""
    atlas = graph_atlas_g()
    assert len(atlas) == 1253
    for graph in atlas:
        assert least(graph) == least_fill(graph.number_of_nodes(), graph.edges), graph.name


@pytest.mark.parametrize("name", NAMED)
def test_named_graphs(name: str) -> None:
    """Values recomputed by two independent general-purpose methods."""
    graph, fill = NAMED[name]
    assert least(graph) == fill


@pytest.mark.parametrize(("k", "fill"), [(3, 5), (4, 26), (5, 93)])
def test_queen_graphs(k: int, fill: int) -> None:
    """As above."""
    assert least(queen(k)) == fill


@pytest.mark.parametrize("n", range(4, 12))
def test_a_cycle_needs_three_less_than_its_length(n: int) -> None:
    """A triangulated polygon."""
    assert least(nx.cycle_graph(n)) == n - 3


@pytest.mark.parametrize(("a", "b"), [(2, 2), (2, 5), (3, 3), (3, 6), (4, 5), (6, 6)])
def test_complete_bipartite_graphs_fill_the_smaller_side(a: int, b: int) -> None:
    """One side must become a clique."""
    assert least(nx.complete_bipartite_graph(a, b)) == min(comb(a, 2), comb(b, 2))


@pytest.mark.parametrize("sizes", [(2, 2, 2), (1, 3, 4), (2, 3, 3), (3, 3, 4, 5)])
def test_complete_multipartite_graphs_fill_all_sides_but_the_largest(sizes: tuple[int, ...]) -> None:
    """All sides but one must become cliques."""
    assert least(nx.complete_multipartite_graph(*sizes)) == sum(comb(s, 2) for s in sizes) - comb(max(sizes), 2)


@pytest.mark.parametrize("n", range(5, 11))
def test_complements_of_cycles(n: int) -> None:
    """n - 3, recomputed for n = 5..10."""
    assert least(nx.complement(nx.cycle_graph(n))) == n - 3


@pytest.mark.parametrize("n", range(5, 8))
def test_wheels(n: int) -> None:
    """The rim on n - 1 vertices needs n - 4."""
    assert least(nx.wheel_graph(n)) == n - 4


@pytest.mark.parametrize("n", range(2, 12))
def test_ladders(n: int) -> None:
    """2 x n grid: one for each square."""
    assert least(nx.grid_2d_graph(2, n)) == n - 1


@pytest.mark.parametrize("n", range(3, 9))
def test_grids_of_three_rows(n: int) -> None:
    """3 x n grid: 4n - 7, recomputed for n = 3..8."""
    assert least(nx.grid_2d_graph(3, n)) == 4 * n - 7


@pytest.mark.parametrize("name", COLOURING)
def test_colouring_benchmark_graphs_are_proven_by_packings(name: str) -> None:
    """Graphs of the Second DIMACS Challenge on colouring."""
    path = SHARED / "graphs" / f"{name}.col"
    if not path.exists() and os.environ.get("CI") != "true":
        pytest.skip(f"{path} is not there; set NEARCHORD_SHARED_DATA to the folder that holds it")
    graph = nx.Graph()
    for line in path.read_text().splitlines():
        words = line.split()
        if words[:1] == ["p"]:
            graph.add_nodes_from(range(int(words[2])))
        elif words[:1] == ["e"] and words[1] != words[2]:
            graph.add_edge(int(words[1]) - 1, int(words[2]) - 1)
    result = fill_of(graph)
    assert result.lower_bound == result.upper_bound == COLOURING[name]
    assert result.proof is ProofKind.PACKING
    confirm(graph, result)
