"""Oracles written from the definitions, slow and plain.  They share no code with the solver."""

from collections.abc import Callable, Iterable, Sequence
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


def heaviest_with_pins(
    n: int, edges: Pairs, weights: Sequence[int], must: Iterable[int] = (), never: Iterable[int] = ()
) -> int | None:
    """Weight of the heaviest independent set with all of ``must`` and nothing of ``never``; None without one."""
    edges, inside, outside = list(edges), set(must), set(never)
    if inside & outside or not is_independent(edges, inside):
        return None
    gone = inside | outside
    for u, v in edges:
        if u in inside or v in inside:
            gone |= {u, v}
    left = [v for v in range(n) if v not in gone]
    name = {v: i for i, v in enumerate(left)}
    rest = [(name[u], name[v]) for u, v in edges if u in name and v in name]
    best = heaviest_independent(len(left), rest, [weights[v] for v in left])
    return best + sum(weights[v] for v in inside)


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


def is_clique(edges: Pairs, chosen: Iterable[int]) -> bool:
    """All pairs of ``chosen`` are edges."""
    pairs = {frozenset(pair) for pair in edges}
    return all(frozenset(pair) in pairs for pair in combinations(chosen, 2))


def is_forest(edges: Pairs, chosen: Iterable[int]) -> bool:
    """No cycle of G lies inside ``chosen``."""
    root = {v: v for v in chosen}

    def find(v: int) -> int:
        while root[v] != v:
            v = root[v]
        return v

    for u, v in edges:
        if u in root and v in root:
            if find(u) == find(v):
                return False
            root[find(u)] = find(v)
    return True


def is_colourable(edges: Pairs, chosen: Iterable[int], colours: int) -> bool:
    """``chosen`` splits into so many sets without an edge inside; tries all ways."""
    rows = networkx_graph(max(chosen, default=-1) + 1, [])
    rows.add_edges_from(edges)
    vertices = list(chosen)

    def extends(place: int, given: dict[int, int]) -> bool:
        if place == len(vertices):
            return True
        v = vertices[place]
        used = max(given.values(), default=-1)
        taken = {given[u] for u in rows[v] if u in given}
        return any(
            extends(place + 1, {**given, v: colour}) for colour in range(min(colours, used + 2)) if colour not in taken
        )

    return extends(0, {})


def largest_by_trial(
    n: int, edges: Pairs, weights: Sequence[int], holds: Callable[[Pairs, Sequence[int]], bool],
    must: Iterable[int] = (), never: Iterable[int] = (),
) -> int | None:  # fmt: skip
    """Weight of the heaviest set with a hereditary property, by growing all sets that have it; None if none does."""
    best = None
    needed, barred = set(must), set(never)
    open_sets: list[tuple[int, list[int]]] = [(0, [])]
    while open_sets:
        v, chosen = open_sets.pop()
        if v == n:
            weight = sum(weights[u] for u in chosen)
            best = weight if best is None else max(best, weight)
            continue
        if v not in needed:
            open_sets.append((v + 1, chosen))
        if v not in barred and holds(edges, [*chosen, v]):
            open_sets.append((v + 1, [*chosen, v]))
    return best


def all_independent(n: int, edges: Pairs, weights: Sequence[int]) -> list[tuple[int, frozenset[int]]]:
    """All independent sets with their weights, the heaviest first."""
    later = [0] * n
    for u, v in edges:
        later[min(u, v)] |= 1 << max(u, v)
    found = []
    open_sets: list[tuple[int, int, tuple[int, ...], int]] = [(0, 0, (), (1 << n) - 1)]
    while open_sets:
        v, value, chosen, allowed = open_sets.pop()
        if v == n:
            found.append((value, frozenset(chosen)))
            continue
        open_sets.append((v + 1, value, chosen, allowed))
        if allowed >> v & 1:
            open_sets.append((v + 1, value + weights[v], (*chosen, v), allowed & ~later[v]))
    return sorted(found, key=lambda one: -one[0])
