"""Cycles and their cuts as flat arrays, against the definitions."""

from fractions import Fraction
from itertools import combinations, pairwise

import networkx as nx
import numpy as np
from hypothesis import given, settings
from hypothesis import strategies as st
from nearchord_solve import Graph, Monitor
from nearchord_solve.fill.exact.core import Core
from nearchord_solve.fill.exact.cuts import FINEST, Cuts, Multipliers
from nearchord_solve.fill.exact.cycles import Cycles, violated
from nearchord_solve.fill.exact.kernels.cuts import pick
from nearchord_solve.fill.exact.ragged import chained, picked, starts
from strategies import Edges, arbitrary_graphs

NOWHERE = np.empty((0, 0))


def flat(lists: list[list[int]]) -> Cycles:
    return Cycles(
        starts(np.array([len(one) for one in lists], np.int64)), np.array([v for one in lists for v in one], np.int32)
    )


def nested(cycles: Cycles) -> list[list[int]]:
    return [cycles.vertex[a:b].tolist() for a, b in pairwise(cycles.ptr.tolist())]


closed_walks = st.lists(st.lists(st.integers(0, 30), min_size=4, max_size=9, unique=True), max_size=6)


@given(closed_walks, st.data())
def test_lists_can_be_picked_and_chained(lists: list[list[int]], data: st.DataObject) -> None:
    """As nested lists would be."""
    cycles = flat(lists)
    which = data.draw(st.lists(st.integers(0, len(lists) - 1))) if lists else []
    assert nested(cycles.take(np.array(which, np.int64))) == [lists[i] for i in which]
    assert nested(cycles.joined(cycles)) == lists + lists
    start, at = picked(cycles.ptr, np.array(which, np.int64))
    assert cycles.vertex[at].tolist() == [v for i in which for v in lists[i]]
    assert chained(start, start)[-1] == 2 * at.size


@given(closed_walks, st.data())
def test_a_cycle_is_the_same_wherever_it_starts(lists: list[list[int]], data: st.DataObject) -> None:
    """Keys do not see rotation and direction, and turning undoes both."""
    moved = []
    for cycle in lists:
        at = data.draw(st.integers(0, len(cycle) - 1))
        rotated = cycle[at:] + cycle[:at]
        moved.append(rotated[::-1] if data.draw(st.booleans()) else rotated)
    if not lists:
        return
    assert flat(lists).keys().tolist() == flat(moved).keys().tolist()
    assert nested(flat(lists).turned()) == nested(flat(moved).turned())
    for cycle, turned in zip(lists, nested(flat(moved).turned()), strict=True):
        assert sorted(turned) == sorted(cycle)
        assert turned[0] == min(cycle)
        assert turned[1] < turned[-1]


def test_different_cycles_have_different_keys() -> None:
    """The three ways round four vertices."""
    assert np.unique(flat([[0, 1, 2, 3], [0, 2, 1, 3], [0, 1, 3, 2]]).keys()).size == 3


@settings(deadline=None)
@given(arbitrary_graphs(most=9))
def test_cuts_found_without_fill_are_chordless_cycles_each_once(edges: Edges) -> None:
    """At x = 0 nothing else is violated; longer ones are violated more and come first.  None only in chordal graphs."""
    graph = nx.empty_graph(edges[0])
    graph.add_edges_from(edges[1])
    part = Graph.from_edges(*edges)
    core = Core.from_rows(part.ptr, part.adj)
    found = nested(violated(core, NOWHERE, (0.5,), 10**6, Monitor().cells))
    assert bool(found) == (edges[0] > 0 and not nx.is_chordal(graph))
    assert len({tuple(cycle) for cycle in found}) == len(found)
    assert [len(cycle) for cycle in found] == sorted((len(cycle) for cycle in found), reverse=True)
    for cycle in found:
        c = len(cycle)
        assert c >= 4
        assert all(graph.has_edge(cycle[i], cycle[j]) == (j - i in (1, c - 1)) for i, j in combinations(range(c), 2))


def test_an_open_side_counts_against_the_cut() -> None:
    """The path 0 1 2 3 4 closed by the missing pair 0 4: five chords less twice the side, at least 0."""
    part = Graph.from_edges(5, [(0, 1), (1, 2), (2, 3), (3, 4)])
    cuts = Cuts.of(Core.from_rows(part.ptr, part.adj), flat([[0, 1, 2, 3, 4]]))
    entries = dict(zip(cuts.pair.tolist(), cuts.coefficient.tolist(), strict=True))
    chords = {2, 3, 5 + 3, 5 + 4, 10 + 4}
    assert entries == {**dict.fromkeys(chords, 1), 4: -2}
    assert cuts.least.tolist() == [0]


def test_multipliers_are_made_coarser_rather_than_overflowing() -> None:
    """Loads stay below 2^61, and fractions never rise above their multipliers."""
    part = Graph.from_edges(4, [(0, 1), (1, 2), (2, 3), (0, 3)])
    cuts = Cuts.of(Core.from_rows(part.ptr, part.adj), flat([[0, 1, 2, 3]]))
    for value in (0.3, 1e5, 1e12, 1e17):
        found = Multipliers.near(np.array([value]), cuts)
        exact = Fraction(int(found.numerators[0]), found.denominator)
        assert exact <= Fraction(value)
        assert float(exact) > 0.99 * value
        assert int(found.numerators[0]) * 3 <= 2**61
        assert found.denominator <= FINEST


def test_a_pair_is_not_cut_too_often() -> None:
    """Cycles whose chords are all used up are passed over, and no more are taken than asked for."""
    cycles = flat([[0, 1, 2, 3], [0, 3, 2, 1], [0, 1, 2, 4], [5, 6, 7, 8]])
    assert pick(9, cycles.ptr, cycles.vertex, 10, 1).tolist() == [0, 2, 3]
    assert pick(9, cycles.ptr, cycles.vertex, 10, 2).tolist() == [0, 1, 2, 3]
    assert pick(9, cycles.ptr, cycles.vertex, 2, 1).tolist() == [0, 2]
