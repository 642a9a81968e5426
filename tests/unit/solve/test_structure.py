"""Triangulation, cores, bags and their figures."""

import random

import networkx as nx
import numpy as np
import pytest
from definition import cliques_of_two_or_more, least_fill, networkx_graph
from nearchord_solve import Budget, Graph, Monitor
from nearchord_solve.fill import cores
from nearchord_solve.fill.kernels import dense
from nearchord_solve.kernels import cliques
from nearchord_solve.kernels.layout import ADHESION_FILL, BAG_FILL, STATES
from nearchord_solve.order import Ranking, Unfinished, eliminate, rank_by_degree
from nearchord_solve.tree import Structure, build_structure

CELLS = np.zeros(16, np.int64)


def effort(words: int = 10**9) -> np.ndarray:
    """So much effort."""
    return np.array([words])


def structure_of(n: int, edges: list[tuple[int, int]]) -> Structure:
    """Structure within the default budget."""
    built = build_structure(Graph.from_edges(n, edges), Budget(), Monitor())
    assert isinstance(built, Structure)
    return built


def random_graph(n: int, density: float, seed: int) -> list[tuple[int, int]]:
    """Edges of a random graph."""
    rng = random.Random(seed)
    return [(u, v) for v in range(n) for u in range(v) if rng.random() < density]


def filled(n: int, edges: list[tuple[int, int]], structure: Structure) -> nx.Graph:
    """G with its fill."""
    graph = networkx_graph(n, edges)
    graph.add_edges_from(structure.fill_edges().tolist())
    return graph


@pytest.mark.parametrize("seed", range(20))
@pytest.mark.parametrize("density", [0.1, 0.3, 0.6])
def test_fill_makes_the_graph_chordal_and_none_of_it_can_go(seed: int, density: float) -> None:
    n, edges = 18, random_graph(18, density, seed)
    structure = structure_of(n, edges)
    fill = structure.fill_edges().tolist()
    assert len(fill) == structure.fill
    assert not set(map(tuple, fill)) & set(edges)
    graph = filled(n, edges, structure)
    assert nx.is_chordal(graph)
    for u, v in fill:
        graph.remove_edge(u, v)
        assert not nx.is_chordal(graph)
        graph.add_edge(u, v)


@pytest.mark.parametrize("seed", range(20))
def test_thinning_handles_the_case_that_one_pass_misses(seed: int) -> None:
    """A triangulation with many needless pairs becomes minimal, whatever the order of the pairs."""
    n = 9
    edges = random_graph(n, 0.35, seed)
    real = np.zeros((n, 1), np.uint64)
    full = np.zeros((n, 1), np.uint64)
    for u, v in edges:
        dense.set_pair(real, u, v)
    for v in range(n):
        for u in range(v):
            dense.set_pair(full, u, v)
    pairs = dense.list_fill(real, full)
    np.random.default_rng(seed).shuffle(pairs)
    count, finished = dense.thin(full, pairs, effort(), CELLS)
    assert finished
    graph = networkx_graph(n, edges)
    graph.add_edges_from(pairs[:count].tolist())
    assert nx.is_chordal(graph)
    for u, v in pairs[:count].tolist():
        graph.remove_edge(u, v)
        assert not nx.is_chordal(graph)
        graph.add_edge(u, v)


@pytest.mark.parametrize("words", [0, 3, 20])
def test_thinning_that_runs_out_of_effort_leaves_a_triangulation(words: int) -> None:
    n = 9
    edges = random_graph(n, 0.35, 4)
    real = np.zeros((n, 1), np.uint64)
    full = np.zeros((n, 1), np.uint64)
    for v in range(n):
        for u in range(v):
            dense.set_pair(full, u, v)
    for u, v in edges:
        dense.set_pair(real, u, v)
    pairs = dense.list_fill(real, full)
    count, finished = dense.thin(full, pairs, effort(words), CELLS)
    assert not finished
    assert sorted(map(tuple, pairs[:count].tolist())) == sorted(map(tuple, dense.list_fill(real, full).tolist()))
    graph = networkx_graph(n, edges)
    graph.add_edges_from(pairs[:count].tolist())
    assert nx.is_chordal(graph)


@pytest.mark.parametrize("method", [dense.fill_by_degree, dense.fill_by_missing])
@pytest.mark.parametrize("n", [7, 70, 130])
def test_greedy_orders_triangulate(method: object, n: int) -> None:
    edges = random_graph(n, 6 / n, 3)
    real = np.zeros((n, (n + 63) // 64), np.uint64)
    full = np.empty_like(real)
    for u, v in edges:
        dense.set_pair(real, u, v)
    assert method(real, full, effort(), CELLS)  # type: ignore[operator]
    graph = networkx_graph(n, edges)
    graph.add_edges_from(dense.list_fill(real, full).tolist())
    assert nx.is_chordal(graph)


def test_greedy_by_missing_pairs_keeps_its_counts_right() -> None:
    """Its choices are those of counting all missing pairs anew at each step."""
    n, edges = 20, random_graph(20, 0.25, 11)
    real = np.zeros((n, 1), np.uint64)
    full = np.empty_like(real)
    for u, v in edges:
        dense.set_pair(real, u, v)
    dense.fill_by_missing(real, full, effort(), CELLS)
    graph, fill = networkx_graph(n, edges), set()
    while graph:

        def missing(v: int) -> list[tuple[int, int]]:
            around = sorted(graph[v])
            return [(a, b) for i, a in enumerate(around) for b in around[i + 1 :] if not graph.has_edge(a, b)]

        v = min(sorted(graph), key=lambda v: len(missing(v)))
        fill.update(missing(v))
        graph.add_edges_from(missing(v))
        graph.remove_node(v)
    assert sorted(map(tuple, dense.list_fill(real, full).tolist())) == sorted(fill)


@pytest.mark.parametrize("seed", range(40))
def test_lower_bound_never_exceeds_the_least_fill(seed: int) -> None:
    n = 8
    edges = random_graph(n, 0.2 + seed % 5 / 10, seed)
    structure = structure_of(n, edges)
    least = least_fill(n, edges)
    assert structure.fill_lower_bound <= least <= structure.fill
    assert (structure.fill_lower_bound == 0) == (least == 0)


@pytest.mark.parametrize("n", [4, 5, 9, 30])
def test_fill_and_lower_bound_of_a_cycle_meet(n: int) -> None:
    """A chordless cycle needs n - 3 chords."""
    structure = structure_of(n, [(v, v + 1) for v in range(n - 1)] + [(0, n - 1)])
    assert structure.fill == structure.fill_lower_bound == n - 3


@pytest.mark.parametrize("seed", range(30))
def test_bags_hold_all_edges_and_each_vertex_hangs_together(seed: int) -> None:
    """The forest of a core is a clique tree: every pair in a bag, and bags of a vertex connected."""
    n, edges = 20, random_graph(20, 0.15 + seed % 4 / 20, seed)
    structure = structure_of(n, edges)
    forest, order = structure.forest, structure.numbering.order
    graph = filled(n, edges, structure)
    vertex = order[forest.slot_place]
    for b in range(forest.bag_kind.size):
        bag = vertex[forest.bag_slot[forest.bag_ptr[b] : forest.bag_ptr[b + 1]]].tolist()
        adhesion = bag[: forest.bag_adhesion[b]]
        assert all(graph.has_edge(u, v) for i, u in enumerate(bag) for v in bag[:i])
        real = networkx_graph(n, edges)
        lacks = [any(not real.has_edge(u, v) for i, u in enumerate(x) for v in x[:i]) for x in (bag, adhesion)]
        assert [bool(forest.bag_kind[b] & BAG_FILL), bool(forest.bag_kind[b] & ADHESION_FILL)] == lacks
        above = forest.bag_above[b]
        assert above < b
        if above >= 0:
            upper = vertex[forest.bag_slot[forest.bag_ptr[above] : forest.bag_ptr[above + 1]]].tolist()
            assert set(adhesion) <= set(upper)
    homes = [
        int(v)
        for b in range(forest.bag_kind.size)
        for v in vertex[forest.bag_slot[forest.bag_ptr[b] + forest.bag_adhesion[b] : forest.bag_ptr[b + 1]]]
    ]
    assert sorted(homes) == sorted(order[structure.cores.place].tolist())


@pytest.mark.parametrize("seed", range(10))
def test_large_cores_take_the_sparse_way_and_say_the_same(seed: int, monkeypatch: pytest.MonkeyPatch) -> None:
    n, edges = 18, random_graph(18, 0.2, seed)
    monkeypatch.setattr(cores, "DENSE_LIMIT", 0)
    structure = structure_of(n, edges)
    assert nx.is_chordal(filled(n, edges, structure))
    assert structure.fill == structure.numbering.fill.size


@pytest.mark.parametrize("seed", range(30))
def test_states_of_a_bag_are_its_independent_sets_and_within_the_bound(seed: int) -> None:
    """b vertices and f = d(d-1)/2 + l fill edges, l < d: at most 2^d + 2^l + b - d - 1 states."""
    b = 9
    fill = random_graph(b, 0.1 + seed % 9 / 10, seed)
    ptr = np.zeros(b + 1, np.int64)
    ptr[1:] = np.cumsum([sum(v == upper for _, upper in fill) for v in range(b)])
    lower = np.array([u for u, _ in fill], np.int32)
    where = np.full(b, -1, np.int32)
    slots, rows, edges = cliques.touched(np.arange(b, dtype=np.int32), 0, b, ptr, lower, where)
    count = cliques.count_cliques(rows, slots.size, edges, 10**6, CELLS)
    assert edges == len(fill)
    assert (where == -1).all()
    assert count == cliques_of_two_or_more(b, fill)
    d = int((1 + (1 + 8 * edges) ** 0.5) / 2)
    rest = edges - d * (d - 1) // 2
    assert 1 + b + count <= 2**d + 2**rest + b - d - 1


def test_states_without_triangles_are_bag_plus_fill() -> None:
    """The square of 0-1-2-3 has bags of three with one fill edge each: 1 + 3 + 1 states twice."""
    structure = structure_of(4, [(0, 1), (1, 2), (2, 3), (0, 3)])
    assert structure.states == 10
    assert structure.largest_bag == 3
    assert (structure.bags, structure.parts, structure.fill_cores) == (2, 1, 1)


def test_counting_states_ends_above_the_budget() -> None:
    """An empty bag of 30 vertices has 2^30 independent sets; they are not counted one by one."""
    edges = [(u, v) for u in range(30) for v in range(30, 60)]
    built = build_structure(Graph.from_edges(60, edges), Budget(states=1000), Monitor())
    assert isinstance(built, Structure)
    assert built.forest.figures[0, STATES] == 1001


def test_a_chordal_graph_has_no_core_and_counts_its_cliques() -> None:
    structure = structure_of(5, [(0, 1), (1, 2), (0, 2), (2, 3)])
    assert (structure.fill, structure.fill_lower_bound, structure.fill_cores, structure.states) == (0, 0, 0, 0)
    assert (structure.bags, structure.parts, structure.largest_bag) == (3, 3, 3)


def test_two_squares_sharing_a_vertex_are_two_cores() -> None:
    edges = [(0, 1), (1, 2), (2, 3), (0, 3), (3, 4), (4, 5), (5, 6), (3, 6)]
    structure = structure_of(7, edges)
    assert (structure.fill_cores, structure.fill, structure.fill_lower_bound) == (2, 2, 2)


@pytest.mark.parametrize("n", [1, 12, 80])
@pytest.mark.parametrize("seed", range(6))
def test_order_by_degree_counts_each_vertex_once_and_fills_what_elimination_fills(n: int, seed: int) -> None:
    edges = random_graph(n, min(1.0, 4 / n), seed)
    graph = Graph.from_edges(n, edges)
    ranking = rank_by_degree(graph, 10**6, Monitor())
    assert isinstance(ranking, Ranking)
    assert sorted(ranking.order.tolist()) == list(range(n))
    numbering = eliminate(ranking, 10**6, Monitor())
    assert not isinstance(numbering, Unfinished)
    left, fill = networkx_graph(n, edges), 0
    for v in reversed(ranking.order.tolist()):
        around = list(left[v])
        missing = [(a, b) for i, a in enumerate(around) for b in around[:i] if not left.has_edge(a, b)]
        left.add_edges_from(missing)
        left.remove_node(v)
        fill += len(missing)
    assert numbering.fill.size == fill


def test_order_by_degree_follows_least_degrees_closely() -> None:
    """Degrees are upper bounds, so the fill is about that of exact minimum degree: grid 12 x 12."""
    grid = nx.convert_node_labels_to_integers(nx.grid_2d_graph(12, 12))
    graph = Graph.from_edges(144, grid.edges)
    ranking = rank_by_degree(graph, 10**6, Monitor())
    assert isinstance(ranking, Ranking)
    numbering = eliminate(ranking, 10**6, Monitor())
    assert not isinstance(numbering, Unfinished)
    real = np.zeros((144, 3), np.uint64)
    full = np.empty_like(real)
    for u, v in grid.edges:
        dense.set_pair(real, u, v)
    dense.fill_by_degree(real, full, effort(), CELLS)
    assert numbering.fill.size <= 1.25 * len(dense.list_fill(real, full))


def test_a_long_strip_in_natural_order_is_settled() -> None:
    """Maximum cardinality search fills a long strip badly; minimum degree keeps its bags small."""
    x = np.arange(6 * 4000).reshape(4000, 6)
    one = np.concatenate((x[:, :-1].ravel(), x[:-1].ravel(), x[:-1, :-1].ravel()))
    other = np.concatenate((x[:, 1:].ravel(), x[1:].ravel(), x[1:, 1:].ravel()))
    structure = structure_of(x.size, list(zip(one.tolist(), other.tolist(), strict=True)))
    assert structure.largest_bag <= 20
    assert structure.fitting(Budget()).all()


def test_order_by_degree_gives_up_when_its_cliques_grow_too_large() -> None:
    edges = random_graph(60, 0.3, 1)
    assert rank_by_degree(Graph.from_edges(60, edges), 5, Monitor()) is Unfinished.TOO_LARGE


def test_what_hangs_from_a_core_by_a_clique_stays_outside() -> None:
    """A square with a long chain of triangles before and behind: the core is the square alone."""
    chain = [(v, v + step) for v in range(40) for step in (1, 2)]
    square = [(20, 50), (50, 51), (51, 52), (20, 52)]
    tail = [(51, 60), *((v, v + 1) for v in range(60, 90))]
    structure = structure_of(91, chain + square + tail)
    assert structure.cores.place.size <= 4
    assert structure.forest.slot_place.size <= 4
    assert structure.fill == 1
