"""The bound of a packing: what is common is shared, what is not adds up, and nothing proves more than is needed."""

from __future__ import annotations

import numpy as np
import pytest
from definition import least_fill, networkx_graph
from fill_columns import all_rings, edges_of, packing, rings
from hypothesis import given, settings
from hypothesis import strategies as st
from nearchord import CheckFailed, Graph
from nearchord.checks.packing import MOST_PAIRS, Packing
from strategies import arbitrary_graphs


def test_cycles_with_a_common_pair_share_it():
    """In K(2, 3) all three squares have the pair {0, 1}: thirds give 1, and so do halves and wholes, as what
    is above 1 is taken off."""
    graph = Graph.from_edges(5, [(u, v) for u in (0, 1) for v in (2, 3, 4)])
    squares = [[0, 2, 1, 3], [0, 2, 1, 4], [0, 3, 1, 4]]
    assert Packing(graph, packing(squares, [1, 1, 1], [3, 3, 3])).bound(edges_of(graph)) == 1
    assert Packing(graph, packing(squares, [1, 1, 1], [4, 4, 4])).bound(edges_of(graph)) == 1
    assert Packing(graph, packing(squares, [1, 1, 1], [9, 9, 9])).bound(edges_of(graph)) == 1
    for numerators, denominators in ([1, 1, 1], [2, 2, 2]), ([1, 1, 1], [1, 1, 1]), ([3, 2, 0], [2, 2, 1]):
        assert Packing(graph, packing(squares, numerators, denominators)).bound(edges_of(graph)) == 1


def test_a_common_side_is_no_common_pair():
    """Two squares of a ladder share an edge, which neither can use: whole shares pass, wherever the cycles begin."""
    ladder = Graph.from_edges(6, [(0, 1), (2, 3), (4, 5), (0, 2), (2, 4), (1, 3), (3, 5)])
    for first in ([2, 0, 1, 3], [0, 1, 3, 2], [3, 2, 0, 1]):
        for second in ([2, 4, 5, 3], [4, 5, 3, 2], [3, 2, 4, 5]):
            assert Packing(ladder, packing([first, second])).bound(edges_of(ladder)) == 2


def test_shares_are_exact_whatever_their_denominators():
    """Denominators whose common multiple leaves 64 bits."""
    primes = [2**31 - 1, 2**61 - 1, 2**17 - 1]
    graph = Graph.from_edges(5, [(u, v) for u in (0, 1) for v in (2, 3, 4)])
    squares = [[0, 2, 1, 3], [0, 2, 1, 4], [0, 3, 1, 4]]
    assert Packing(graph, packing(squares, [1, 1, 1], primes)).bound(edges_of(graph)) == 1
    assert Packing(graph, packing(squares, [2**31 - 1, 1, 0], primes)).bound(edges_of(graph)) == 1


def test_long_cycles_cost_no_pairs():
    """A cycle of 30,000 vertices has more pairs than may be looked at, but shares none of them."""
    n = 30_000
    assert n * (n - 3) // 2 > MOST_PAIRS
    graph = Graph.from_arrays(n, np.arange(n), np.roll(np.arange(n), -1))
    assert Packing(graph, packing([list(range(n))])).bound(edges_of(graph)) == n - 3


@settings(deadline=None, max_examples=100)
@given(drawn=arbitrary_graphs(7), data=st.data())
def test_no_packing_proves_more_than_the_least_fill(drawn, data):
    """Whatever rings and shares, open sides and large groups too: what passes is a bound."""
    n, pairs = drawn
    graph = Graph.from_edges(n, pairs)
    found = list(all_rings(networkx_graph(n, pairs)))
    if not found:
        return
    taken = data.draw(st.lists(st.sampled_from(found), min_size=1, max_size=8))
    denominator = data.draw(st.integers(1, 4))
    numerators = [data.draw(st.integers(0, 2 * denominator)) for _ in taken]
    bound = Packing(graph, rings(taken, numerators, [denominator] * len(taken))).bound(edges_of(graph))
    assert bound <= least_fill(n, pairs)


def test_groups_stand_for_all_their_cycles():
    """Four groups of two, neighbours joined: every fill of it makes two opposite groups a clique to each other."""
    graph = Graph.from_edges(
        8, [(u, v) for u in range(8) for v in range(u) if u // 2 != v // 2 and (u // 2 - v // 2) % 2]
    )
    four = [[0, 1], [2, 3], [4, 5], [6, 7]]
    assert Packing(graph, rings([four], [4])).bound(edges_of(graph)) == 4
    assert Packing(graph, rings([four], [5])).bound(edges_of(graph)) == 3


def test_open_sides_take_their_part_of_a_load():
    """The pentagon cut at a chord: a square that pays for its open side with the load of a cycle that pays for it."""
    pentagon = Graph.from_edges(5, [(0, 1), (1, 2), (2, 3), (3, 4), (0, 4)])
    opened = rings([[[v] for v in range(5)], [[0], [2], [3], [4]]], [1, 1])
    assert Packing(pentagon, opened).bound(edges_of(pentagon)) == 0 + 2 - 2
    partly = Graph.from_edges(5, [(0, 1), (1, 2), (2, 3), (0, 3)])
    with pytest.raises(CheckFailed, match="group 0 of ring 0 of the packing is neither joined to the next one"):
        Packing(partly, rings([[[0], [1, 4], [2], [3]]])).bound(edges_of(partly))
