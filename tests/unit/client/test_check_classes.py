"""Orders, cycles, cliques and partitions pass the checker exactly when they are what they are said to be."""

from __future__ import annotations

from itertools import combinations, permutations

import networkx as nx
import numpy as np
from fill_answers import consecutive_cliques, cut, is_chordless, is_consecutive, least_edits, split_clique
from fill_columns import atlas, edges_of, ints, ours
from nearchord import CheckFailed
from nearchord.checks.chordal import check_chordless_cycle, check_elimination_order
from nearchord.checks.classes import check_cliques, check_split, splittance


def passes(test, *arguments):
    try:
        test(*arguments)
    except CheckFailed:
        return False
    return True


def test_elimination_orders_pass_exactly_when_later_neighbours_are_adjacent():
    """Every order of every graph on up to five vertices, against the definition."""
    for source in atlas(5):
        graph = ours(source)
        edges = edges_of(graph)
        for order in permutations(range(graph.n)):
            at = {v: i for i, v in enumerate(order)}
            later = {v: [w for w in source[v] if at[w] > at[v]] for v in source}
            right = all(source.has_edge(*pair) for found in later.values() for pair in combinations(found, 2))
            assert passes(check_elimination_order, graph, edges, ints(order)) is right


def test_cycles_pass_exactly_when_they_have_no_chord():
    """Every sequence of different vertices of every graph on up to five."""
    for source in atlas(5):
        graph = ours(source)
        edges = edges_of(graph)
        for length in range(3, graph.n + 1):
            for cycle in permutations(range(graph.n), length):
                assert passes(check_chordless_cycle, graph, edges, ints(cycle)) is is_chordless(source, cycle)


def test_clique_lists_pass_exactly_when_they_are_all_maximal_cliques_in_consecutive_order():
    """Every order of the maximal cliques of small graphs; with one left out, enlarged, or repeated, none passes."""
    for source in atlas(5):
        graph = ours(source)
        edges = edges_of(graph)
        cliques = [sorted(clique) for clique in nx.find_cliques(source)]
        for order in permutations(cliques):
            assert passes(check_cliques, graph, edges, *listed(order)) is is_consecutive(order)
        consecutive = consecutive_cliques(source)
        for wrong in [] if consecutive is None else spoilt(consecutive, graph.n):
            assert not passes(check_cliques, graph, edges, *listed(wrong)), wrong


def listed(lists):
    start, vertex = cut(lists)
    return start, vertex.astype(np.int64)


def spoilt(cliques, n):
    for i, clique in enumerate(cliques):
        yield [*cliques[:i], *cliques[i + 1 :]]
        yield [*cliques[:i], clique, *cliques[i:]]
        yield [*cliques[:i], clique[:1], *cliques[i:]]
        for v in set(range(n)) - set(clique):
            yield [*cliques[:i], [*clique, v], *cliques[i + 1 :]]


def test_partitions_pass_exactly_when_they_are_split():
    """Every set of vertices of every graph on up to five."""
    for source in atlas(5):
        graph = ours(source)
        edges = edges_of(graph)
        accepted = [
            clique
            for size in range(graph.n + 1)
            for clique in combinations(range(graph.n), size)
            if passes(check_split, graph, edges, ints(clique))
        ]
        for clique in accepted:
            assert all(source.has_edge(*pair) for pair in combinations(clique, 2))
            assert not source.subgraph(set(source) - set(clique)).edges
        assert bool(accepted) is (split_clique(source) is not None)


def test_the_splittance_is_the_least_number_of_edits():
    """The formula of the degrees against all choices of a clique."""
    for source in atlas(6):
        assert splittance(edges_of(ours(source))) == least_edits(source)
