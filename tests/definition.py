"""Oracles written from the definitions, slow and plain.  They share no code with the solver."""

from collections.abc import Iterable, Sequence
from itertools import combinations

import networkx as nx

Pairs = Iterable[tuple[int, int]]


def networkx_graph(n: int, edges: Pairs) -> nx.Graph:
    """The graph as a networkx graph on 0..n-1."""
    graph = nx.Graph()
    graph.add_nodes_from(range(n))
    graph.add_edges_from(edges)
    return graph


def is_independent(edges: Pairs, chosen: Iterable[int]) -> bool:
    """No edge has both ends in ``chosen``."""
    inside = set(chosen)
    return not any(u in inside and v in inside for u, v in edges)


def is_cover(edges: Pairs, chosen: Iterable[int]) -> bool:
    """Every edge has an end in ``chosen``."""
    inside = set(chosen)
    return all(u in inside or v in inside for u, v in edges)


def heaviest_independent(n: int, edges: Pairs, weights: Sequence[int]) -> int:
    """Weight of the heaviest independent set, by trying all."""
    later = [0] * n
    for u, v in edges:
        later[min(u, v)] |= 1 << max(u, v)
    best = 0
    open_sets = [(0, 0, (1 << n) - 1)]
    while open_sets:
        v, value, allowed = open_sets.pop()
        while v < n and not allowed >> v & 1:
            v += 1
        if v == n:
            best = max(best, value)
            continue
        open_sets.append((v + 1, value, allowed))
        open_sets.append((v + 1, value + weights[v], allowed & ~later[v]))
    return best


def least_fill(n: int, edges: Pairs) -> int:
    """Least number of edges whose addition makes the graph chordal: dynamic program over eliminated sets.

    The fill of eliminating v after the set S is the number of non-adjacent pairs it joins; it depends on S
    only as a set, since u and v are joined when a path through S links them.
    """
    neighbours = [0] * n
    for u, v in edges:
        neighbours[u] |= 1 << v
        neighbours[v] |= 1 << u

    def reach(v: int, gone: int) -> int:
        seen, border, queue = 1 << v, 0, [v]
        while queue:
            fresh = neighbours[queue.pop()] & ~seen
            seen |= fresh
            border |= fresh & ~gone
            inner = fresh & gone
            queue.extend(w for w in range(n) if inner >> w & 1)
        return border

    least = {0: 0}
    for _ in range(n):
        following: dict[int, int] = {}
        for gone, cost in least.items():
            for v in range(n):
                if gone >> v & 1:
                    continue
                # pairs {v, w} are counted when v goes, if they are no edge of the graph
                added = bin(reach(v, gone) & ~neighbours[v]).count("1")
                key = gone | 1 << v
                following[key] = min(following.get(key, cost + added), cost + added)
        least = following
    return least[(1 << n) - 1]


def cliques_of_two_or_more(n: int, edges: Pairs) -> int:
    """Number of cliques with at least two vertices, by trying all subsets."""
    linked = {frozenset(pair) for pair in edges}
    return sum(
        all(frozenset(pair) in linked for pair in combinations(subset, 2))
        for size in range(2, n + 1)
        for subset in combinations(range(n), size)
    )
