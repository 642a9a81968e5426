"""The stages of the exact search, each against the slow oracle."""

from itertools import combinations

import networkx as nx
import numpy as np
import pytest
from definition import least_fill
from hypothesis import given, settings
from hypothesis import strategies as st
from nearchord_solve import Graph, Monitor
from nearchord_solve.fill.exact.blocks import solve_blocks
from nearchord_solve.fill.exact.branch import CaseSearch
from nearchord_solve.fill.exact.core import Core, components, is_clique, mask_of, members, missing
from nearchord_solve.fill.exact.engines import first_bounds
from nearchord_solve.fill.exact.packing import prices
from nearchord_solve.fill.exact.reduce import contract_twins, decompose, reduce_core, safe_edges
from nearchord_solve.fill.exact.root import cut
from nearchord_solve.fill.exact.separators import connected_order, minimal_separators, potential_cliques
from nearchord_solve.fill.exact.status import Status
from nearchord_solve.fill.exact.subsets import largest_clique, solve_subsets
from nearchord_solve.fill.exact.words import masks_of, rows_of
from strategies import Edges, arbitrary_graphs, near_chordal_graphs

PLENTY = 10**6


def core_of(edges: Edges) -> Core:
    part = Graph.from_edges(*edges)
    return Core.from_rows(part.ptr, part.adj)


def spread(core: Core) -> Edges:
    """The graph that a core with classes stands for, its vertices renumbered."""
    owner = [a for a in range(core.n) for _ in core.classes[a]]
    pairs = [
        (u, v)
        for u, v in combinations(range(len(owner)), 2)
        if owner[u] == owner[v] or core.adj[owner[u]] >> owner[v] & 1
    ]
    return len(owner), pairs


@st.composite
def sized_cores(draw: st.DrawFn) -> Core:
    """A core of up to six classes of up to three vertices, fifteen in all."""
    n, edges = draw(arbitrary_graphs(most=6))
    sizes = draw(st.lists(st.sampled_from((1, 1, 2, 3)), min_size=n, max_size=n))
    sizes = [size if sum(sizes[:v]) <= 8 else 1 for v, size in enumerate(sizes)]
    starts = np.concatenate(([0], np.cumsum(sizes))).astype(int).tolist() if n else [0]
    return Core(core_of((n, edges)).adj, [tuple(range(starts[v], starts[v + 1])) for v in range(n)])


@settings(deadline=None)
@given(arbitrary_graphs(most=9))
def test_reductions_keep_the_fill_number(edges: Edges) -> None:
    """Edges added for good plus the fill of what remains."""
    reduced = reduce_core(core_of(edges), Monitor())
    rest = sum(least_fill(*spread(core)) for core in reduced.cores)
    assert len(reduced.added) + rest == least_fill(*edges)


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
    pairs = safe_edges(core)
    assert core.cost(pairs) + least_fill(*spread(core.with_edges(pairs))) == least_fill(*spread(core))


def test_a_safe_edge_is_found() -> None:
    """K_{2,3} plus a path: the two hubs miss one edge, and a single vertex sees both."""
    core = core_of((5, [(0, 2), (1, 2), (0, 3), (1, 3), (0, 4), (1, 4)]))
    assert (0, 1) in safe_edges(core)


def drawn(edges: Edges) -> nx.Graph:
    graph = nx.empty_graph(edges[0])
    graph.add_edges_from(edges[1])
    return graph


def test_twins_become_one_class() -> None:
    """A complete graph is one class."""
    core = contract_twins(core_of((4, list(combinations(range(4), 2)))))
    assert core.classes == [(0, 1, 2, 3)]
    assert core.sizes == [4]


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


def connected(core: Core) -> bool:
    return len(list(components(core.adj, core.everything))) == 1


@settings(deadline=None)
@given(sized_cores())
def test_blocks_find_a_least_fill_or_show_that_there_is_none(core: Core) -> None:
    """With and without prices from the relaxation."""
    if not connected(core):
        return
    least = least_fill(*spread(core))
    bounds = first_bounds(core, Monitor())
    cut(core, bounds, PLENTY, Monitor())
    for base, listed in ((0, {}), prices(core, bounds.cycles, bounds.numerators)):
        status, pairs = solve_blocks(core, least, listed, base, PLENTY, Monitor().cells)
        assert status is Status.FOUND
        assert core.cost(pairs) == least
        if least:
            assert solve_blocks(core, least - 1, listed, base, PLENTY, Monitor().cells)[0] is Status.NONE


@settings(deadline=None)
@given(sized_cores())
def test_cases_close_every_gap(core: Core) -> None:
    """Branch and cut ends with the fill number below and above, and honours a limit."""
    least = least_fill(*spread(core))
    for most in (PLENTY, least - 1):
        bounds = first_bounds(core, Monitor())
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
    if core.n == 0 or not connected(core):
        return
    order = connected_order(core.adj)
    place = {v: i for i, v in enumerate(order)}
    adj = [mask_of(place[u] for u in members(core.adj[v])) for v in order]
    separators = minimal_separators(adj, core.everything, PLENTY, Monitor().cells)
    assert separators is not None
    assert set(separators) == {s for s in range(1, 1 << core.n) if full_count(adj, s) >= 2}
    rows = rows_of(adj)
    sets = np.array([[s] for s in separators], np.uint64).reshape(-1, 1)
    none = np.zeros((core.n, core.n), np.int64)
    found = potential_cliques(rows, sets, none, 0, PLENTY, Monitor().cells)
    assert found is not None
    assert sorted(masks_of(found)) == [s for s in range(1, 1 << core.n) if is_potential(adj, s)]


def full_count(adj: list[int], chosen: int) -> int:
    return sum(seen_by(adj, part) == chosen for part in components(adj, ((1 << len(adj)) - 1) & ~chosen))


def seen_by(adj: list[int], part: int) -> int:
    seen = 0
    for v in members(part):
        seen |= adj[v]
    return seen & ~part


def is_potential(adj: list[int], chosen: int) -> bool:
    parts = [seen_by(adj, part) for part in components(adj, ((1 << len(adj)) - 1) & ~chosen)]
    if chosen in parts:
        return False
    return all(any(s >> u & 1 and s >> v & 1 for s in parts) for u, v in missing(adj, chosen))


@settings(deadline=None)
@given(arbitrary_graphs(most=9))
def test_the_largest_clique_is_largest(edges: Edges) -> None:
    """Against networkx."""
    core = core_of(edges)
    found = largest_clique(core)
    assert is_clique(core.adj, found)
    assert found.bit_count() == max(map(len, nx.find_cliques(drawn(edges))), default=0)


@pytest.mark.parametrize("solve", [solve_subsets, lambda core, k, cells: solve_blocks(core, k, {}, 0, PLENTY, cells)])
def test_engines_heed_a_stop(solve: object) -> None:
    """They say so and claim nothing."""
    monitor = Monitor()
    monitor.cells[Monitor.STOP] = 1
    grid = nx.convert_node_labels_to_integers(nx.grid_2d_graph(4, 4))
    assert solve(core_of((16, list(grid.edges))), 18, monitor.cells) == (Status.STOPPED, [])  # type: ignore[operator]


def test_too_many_separators_are_declined() -> None:
    """The 4 x 4 grid has more than ten."""
    grid = nx.convert_node_labels_to_integers(nx.grid_2d_graph(4, 4))
    core = core_of((16, list(grid.edges)))
    assert solve_blocks(core, 18, {}, 0, 10, Monitor().cells)[0] is Status.TOO_LARGE
