"""The stages of the exact search, each against the slow oracle."""

from itertools import combinations, pairwise, product

import networkx as nx
import numpy as np
import pytest
from definition import least_fill
from fill_answers import elimination_fill
from hypothesis import given, settings
from hypothesis import strategies as st
from nearchord_solve import Graph, Monitor
from nearchord_solve.fill.exact.blocks import solve_blocks
from nearchord_solve.fill.exact.branch import CaseSearch
from nearchord_solve.fill.exact.core import Core
from nearchord_solve.fill.exact.cuts import Cuts, Multipliers, price_matrix
from nearchord_solve.fill.exact.cycles import violated
from nearchord_solve.fill.exact.engines import by_blocks, first_bounds
from nearchord_solve.fill.exact.kernels.separators import connected_order
from nearchord_solve.fill.exact.kernels.words import permuted
from nearchord_solve.fill.exact.reduce import contract_twins, decompose, reduce_core, with_safe_edges
from nearchord_solve.fill.exact.root import Bounds, cut
from nearchord_solve.fill.exact.separators import minimal_separators, potential_cliques
from nearchord_solve.fill.exact.status import Status
from nearchord_solve.fill.exact.subsets import solve_subsets, split_off_clique
from strategies import Edges, arbitrary_graphs, near_chordal_graphs

PLENTY = 10**6


def core_of(edges: Edges) -> Core:
    part = Graph.from_edges(*edges)
    return Core.from_rows(part.ptr, part.adj)


def joined(core: Core, u: int, v: int) -> bool:
    """Whether two vertices of a core are adjacent."""
    return bool(int(core.rows[u, v >> 6]) >> (v & 63) & 1)


def drawn(core: Core) -> nx.Graph:
    """The classes as vertices of a graph."""
    graph = nx.empty_graph(core.n)
    graph.add_edges_from((u, v) for u, v in combinations(range(core.n), 2) if joined(core, u, v))
    return graph


def spread(core: Core) -> Edges:
    """The graph that a core with classes stands for, its vertices renumbered."""
    owner = np.repeat(np.arange(core.n), core.sizes).tolist()
    pairs = [
        (u, v)
        for u, v in combinations(range(len(owner)), 2)
        if owner[u] == owner[v] or joined(core, owner[u], owner[v])
    ]
    return len(owner), pairs


def bounds_of(core: Core) -> Bounds:
    bounds = first_bounds(core, Monitor())
    assert bounds is not None
    return bounds


def free(core: Core) -> np.ndarray:
    """Prices that always hold."""
    return np.zeros((core.n, core.n), np.int64)


@st.composite
def sized_cores(draw: st.DrawFn) -> Core:
    """A core of up to six classes of up to three vertices, fifteen in all."""
    n, edges = draw(arbitrary_graphs(most=6))
    sizes = draw(st.lists(st.sampled_from((1, 1, 2, 3)), min_size=n, max_size=n))
    sizes = [size if sum(sizes[:v]) <= 8 else 1 for v, size in enumerate(sizes)]
    starts = np.cumsum([0, *sizes]).astype(np.int64)
    return Core(core_of((n, edges)).rows, starts, np.arange(starts[-1], dtype=np.int32))


@settings(deadline=None)
@given(arbitrary_graphs(most=9))
def test_reductions_keep_the_fill_number(edges: Edges) -> None:
    """Edges added for good plus the fill of what remains."""
    reduced = reduce_core(core_of(edges), Monitor())
    rest = sum(least_fill(*spread(core)) for core in reduced.cores)
    assert reduced.added.shape[0] + rest == least_fill(*edges)


@settings(deadline=None)
@given(near_chordal_graphs(most=12))
def test_atoms_add_up(edges: Edges) -> None:
    """Without any added edge, and each atom keeps a hole or nothing."""
    pieces = decompose(core_of(edges), Monitor())
    assert sum(least_fill(*spread(piece)) for piece in pieces) == least_fill(*edges)
    for piece in pieces:
        assert len(decompose(piece, Monitor())) == 1


@settings(deadline=None, max_examples=300)
@given(sized_cores())
def test_safe_edges_are_safe_with_sizes(core: Core) -> None:
    """Adding them costs as much as it saves."""
    filled, pairs = with_safe_edges(core, Monitor())
    assert core.cost(pairs) + least_fill(*spread(core.with_edges(pairs))) == least_fill(*spread(core))
    assert np.array_equal(filled.rows, core.with_edges(pairs).rows)


def test_a_safe_edge_is_found() -> None:
    """K_{2,3} plus a path: the two hubs miss one edge, and a single vertex sees both."""
    core = core_of((5, [(0, 2), (1, 2), (0, 3), (1, 3), (0, 4), (1, 4)]))
    assert [0, 1] in with_safe_edges(core, Monitor())[1].tolist()


def test_twins_become_one_class() -> None:
    """A complete graph is one class."""
    core = contract_twins(core_of((4, list(combinations(range(4), 2)))))
    assert (core.start.tolist(), core.member.tolist()) == ([0, 4], [0, 1, 2, 3])
    assert core.sizes.tolist() == [4]


@settings(deadline=None)
@given(sized_cores())
def test_classes_are_those_of_the_definition(core: Core) -> None:
    """Vertices with the same closed neighbours, in order of the lowest; nothing else is lost."""
    graph = drawn(core)
    twins = sorted({tuple(u for u in graph if {u, *graph[u]} == {v, *graph[v]}) for v in graph})
    found = contract_twins(core)
    groups = [sorted(m for v in group for m in core.member[core.start[v] : core.start[v + 1]]) for group in twins]
    assert [found.member[a:b].tolist() for a, b in pairwise(found.start.tolist())] == groups
    assert set(drawn(found).edges) == {
        (i, j) for i, j in combinations(range(len(twins)), 2) if graph.has_edge(twins[i][0], twins[j][0])
    }


@settings(deadline=None)
@given(sized_cores(), st.data())
def test_pairs_of_classes_stand_for_all_pairs_of_their_vertices(core: Core, data: st.DataObject) -> None:
    """The cost counts them, the lifting names them."""
    chosen = data.draw(st.lists(st.sampled_from(list(combinations(range(max(2, core.n)), 2))), unique=True))
    pairs = np.array([pair for pair in chosen if pair[1] < core.n], np.int32).reshape(-1, 2)
    groups = [core.member[a:b].tolist() for a, b in pairwise(core.start.tolist())]
    expected = [tuple(sorted(pair)) for a, b in pairs.tolist() for pair in product(groups[a], groups[b])]
    assert sorted(map(tuple, core.lift(pairs).tolist())) == sorted(expected)
    assert core.cost(pairs) == len(expected)


@settings(deadline=None)
@given(sized_cores())
def test_subsets_find_a_least_fill_or_show_that_there_is_none(core: Core) -> None:
    """With the limit at, above and below the fill number."""
    least = least_fill(*spread(core))
    cells = Monitor().cells
    for limit in (least, least + 3):
        status, pairs = solve_subsets(core, limit, cells)
        assert status is Status.FOUND
        assert core.cost(pairs) == least
    assert solve_subsets(core, least - 1, cells)[0] is Status.NONE


@settings(deadline=None)
@given(sized_cores())
def test_blocks_find_a_least_fill_or_show_that_there_is_none(core: Core) -> None:
    """With and without prices from the relaxation."""
    if core.n == 0 or not nx.is_connected(drawn(core)):
        return
    least = least_fill(*spread(core))
    bounds = bounds_of(core)
    cut(core, bounds, PLENTY, Monitor())
    base, prices = price_matrix(core, Cuts.of(core, bounds.cycles), bounds.multipliers)
    for limit in (least, least - 1):
        for price, slack in ((free(core), 0), (prices, limit * bounds.multipliers.denominator - base)):
            status, pairs = solve_blocks(core, limit, price, slack, PLENTY, Monitor().cells)
            if limit == least:
                assert status is Status.FOUND
                assert core.cost(pairs) == least
            else:
                assert status is Status.NONE


@settings(deadline=None)
@given(sized_cores())
def test_cases_close_every_gap(core: Core) -> None:
    """Branch and cut ends with the fill number below and above, and honours a limit."""
    least = least_fill(*spread(core))
    for most in (PLENTY, least - 1):
        bounds = bounds_of(core)
        relaxation = cut(core, bounds, most, Monitor())
        if not bounds.closed and bounds.lower <= most:
            assert CaseSearch(core, relaxation, bounds, most, Monitor()).run(PLENTY)
        assert bounds.lower > most or bounds.lower == bounds.upper == least
        assert bounds.lower <= least


@settings(deadline=None)
@given(arbitrary_graphs(most=8))
def test_separators_and_potential_cliques_are_all_there(edges: Edges) -> None:
    """Against their definitions over all vertex sets."""
    core = core_of(edges)
    if core.n == 0 or not nx.is_connected(drawn(core)):
        return
    rows = permuted(core.rows, connected_order(core.rows))
    graph = drawn(Core(rows, core.start, core.member))
    assert all(nx.is_connected(graph.subgraph(range(a + 1))) for a in graph)
    separators = minimal_separators(rows, PLENTY, Monitor().cells)
    assert separators is not None
    assert sorted(separators[:, 0].tolist()) == [s for s in range(1, 1 << core.n) if full_count(graph, s) >= 2]
    found = potential_cliques(rows, separators, free(core), 0, PLENTY, Monitor().cells)
    assert found is not None
    assert sorted(found[:, 0].tolist()) == [s for s in range(1, 1 << core.n) if is_potential(graph, s)]


@settings(deadline=None)
@given(arbitrary_graphs(most=8))
def test_reductions_work_across_words(edges: Edges) -> None:
    """A graph among isolated vertices, some of its own beyond the first 64, is reduced as it is by itself."""
    alone, among = core_of(edges), core_of((70, [(u + 61, v + 61) for u, v in edges[1]]))
    added = with_safe_edges(alone, Monitor())[1]
    assert np.array_equal(with_safe_edges(among, Monitor())[1], added + 61)
    pieces, moved = decompose(alone, Monitor()), decompose(among, Monitor())
    assert [piece.member.tolist() for piece in moved] == [(piece.member + 61).tolist() for piece in pieces]
    found, shifted = (violated(core, np.empty((0, 0)), (0.5,), PLENTY, Monitor().cells) for core in (alone, among))
    assert np.array_equal(shifted.ptr, found.ptr)
    assert np.array_equal(shifted.vertex, found.vertex + 61)


@settings(deadline=None)
@given(arbitrary_graphs(most=7), st.booleans())
def test_blocks_work_across_words(edges: Edges, star: bool) -> None:
    """At the end of a path of 61 vertices, or below the hub of a star: neither adds fill."""
    n, pairs = edges
    beside = [(0, v) for v in range(1, 61 + n)] if star else [*pairwise(range(61)), *([(60, 61)] if n else [])]
    core = core_of((61 + n, [*beside, *((u + 61, v + 61) for u, v in pairs)]))
    if not nx.is_connected(drawn(core)):
        return
    least = least_fill(n, pairs)
    for limit in (least, least - 1):
        status, found = solve_blocks(core, limit, free(core), 0, PLENTY, Monitor().cells)
        assert status is (Status.FOUND if limit == least else Status.NONE)
        assert core.cost(found) == (least if limit == least else 0)


def count_potential(core: Core) -> int:
    """How many potential maximal cliques are found."""
    rows = permuted(core.rows, connected_order(core.rows))
    separators = minimal_separators(rows, PLENTY, Monitor().cells)
    assert separators is not None
    found = potential_cliques(rows, separators, free(core), 0, PLENTY, Monitor().cells)
    assert found is not None
    return found.shape[0]


@settings(deadline=None, max_examples=200)
@given(arbitrary_graphs(most=8))
def test_potential_cliques_are_all_there_across_words(edges: Edges) -> None:
    """A hub above a graph joins all of its potential maximal cliques; each leaf beside makes one with the hub."""
    n, pairs = edges
    alone = core_of(edges)
    if n == 0 or not nx.is_connected(drawn(alone)):
        return
    star = core_of((61 + n, [*((0, v) for v in range(1, 61 + n)), *((u + 61, v + 61) for u, v in pairs)]))
    assert count_potential(star) == 60 + count_potential(alone)


@settings(deadline=None)
@given(sized_cores())
def test_blocks_close_the_gap_that_cutting_planes_left(core: Core) -> None:
    """With the best fill known, and with one edge more: the prices of the packing leave out nothing needed."""
    if core.n == 0 or not nx.is_connected(drawn(core)):
        return
    least = least_fill(*spread(core))
    for known in (least, least + 1):
        bounds = bounds_of(core)
        cut(core, bounds, PLENTY, Monitor())
        bounds.lower, bounds.upper = 0, known
        assert by_blocks(core, bounds, PLENTY, PLENTY, Monitor())
        assert bounds.lower == bounds.upper == least


@settings(deadline=None, max_examples=300)
@given(arbitrary_graphs(most=7), st.data())
def test_prices_never_overstate_what_a_fill_costs(edges: Edges, data: st.DataObject) -> None:
    """Whatever the multipliers, any fill costs at least the base and the prices of its pairs."""
    core = core_of(edges)
    cuts = Cuts.of(core, violated(core, np.empty((0, 0)), (0.5,), PLENTY, Monitor().cells))
    drawn_ones = data.draw(st.lists(st.integers(0, 4), min_size=cuts.count, max_size=cuts.count))
    base, prices = price_matrix(core, cuts, Multipliers(np.array(drawn_ones, np.int64), 2))
    assert (prices >= 0).all()
    assert np.array_equal(prices, prices.T)
    for order in [range(core.n), range(core.n)[::-1], data.draw(st.permutations(range(core.n)))]:
        fill = elimination_fill(drawn(core), order)
        assert 2 * len(fill) >= base + sum(int(prices[pair]) for pair in fill)


def seen_by_sides(graph: nx.Graph, chosen: int) -> tuple[set[int], list[set[int]]]:
    """A set, and what of it each component of the rest sees."""
    inside = {v for v in graph if chosen >> v & 1}
    sides = nx.connected_components(graph.subgraph(set(graph) - inside))
    return inside, [inside & {u for v in side for u in graph[v]} for side in sides]


def full_count(graph: nx.Graph, chosen: int) -> int:
    inside, seen = seen_by_sides(graph, chosen)
    return seen.count(inside)


def is_potential(graph: nx.Graph, chosen: int) -> bool:
    inside, seen = seen_by_sides(graph, chosen)
    if inside in seen:
        return False
    return all(graph.has_edge(u, v) or any({u, v} <= side for side in seen) for u, v in combinations(inside, 2))


@settings(deadline=None)
@given(arbitrary_graphs(most=9))
def test_the_largest_clique_is_largest(edges: Edges) -> None:
    """Against networkx."""
    core = core_of(edges)
    order, count = split_off_clique(core)
    graph = drawn(core)
    assert sorted(order.tolist()) == list(range(core.n))
    assert all(graph.has_edge(u, v) for u, v in combinations(order[count:].tolist(), 2))
    assert core.n - count == max(map(len, nx.find_cliques(graph)), default=0)


@pytest.mark.parametrize("engine", ["subsets", "blocks"])
def test_engines_heed_a_stop(engine: str) -> None:
    """They say so and claim nothing."""
    monitor = Monitor()
    monitor.cells[Monitor.STOP] = 1
    grid = nx.convert_node_labels_to_integers(nx.grid_2d_graph(4, 4))
    core = core_of((16, list(grid.edges)))
    if engine == "subsets":
        status, pairs = solve_subsets(core, 18, monitor.cells)
    else:
        status, pairs = solve_blocks(core, 18, free(core), 0, PLENTY, monitor.cells)
    assert status is Status.STOPPED
    assert pairs.shape == (0, 2)


def test_too_many_separators_are_declined() -> None:
    """The 4 x 4 grid has more than ten."""
    grid = nx.convert_node_labels_to_integers(nx.grid_2d_graph(4, 4))
    core = core_of((16, list(grid.edges)))
    assert solve_blocks(core, 18, free(core), 0, 10, Monitor().cells)[0] is Status.TOO_LARGE
