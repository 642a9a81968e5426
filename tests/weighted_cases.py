"""Graphs with weights and pins for tests of whatever is asked about independent sets."""

import random

import networkx as nx
from definition import heaviest_with_pins

Pairs = list[tuple[int, int]]


def random_case(seed: int, most: int) -> tuple[int, Pairs, list[int], list[int], list[int]]:
    """Windows, trees of cliques or any pairs, some edges taken out, with small and large weights and some pins."""
    draw = random.Random(seed)
    n = draw.randint(1, most)
    pairs = [(u, v) for v in range(n) for u in range(v)]
    if seed % 3 == 0:
        spans = [(start := draw.uniform(0, n), start + draw.uniform(0, 8)) for _ in range(n)]
        pairs = [(u, v) for u, v in pairs if spans[u][0] <= spans[v][1] and spans[v][0] <= spans[u][1]]
    elif seed % 3 == 1:
        cliques: list[list[int]] = [[]]
        for v in range(n):
            cliques.append([*(u for u in draw.choice(cliques) if draw.random() < 0.8), v])
        pairs = [(u, cliques[v + 1][-1]) for v in range(n) for u in cliques[v + 1][:-1]]
    else:
        share = draw.random()
        pairs = [pair for pair in pairs if draw.random() < share]
    edges = sorted(draw.sample(pairs, max(0, len(pairs) - draw.randint(0, 6))))
    weights = [draw.choice([0, 1, 2, 3, draw.randint(0, 100)]) for _ in range(n)]
    must: list[int] = []
    for v in draw.sample(range(n), min(n, draw.randint(0, 2))):
        if heaviest_with_pins(n, edges, weights, [*must, v]) is not None:
            must.append(v)
    free = [v for v in range(n) if v not in must]
    return n, edges, weights, must, draw.sample(free, min(len(free), draw.randint(0, 2)))


def large_cases() -> dict[str, tuple[int, Pairs]]:
    """Graphs with deep trees of bags, wide bags, and much fill."""
    hub = [(u, v) for v in range(40) for u in range(v)]
    pendants = [(u, 40 + p) for p in range(120) for u in random.Random(p).sample(range(40), 1 + p % 4)]
    return {
        "hub with pendants": (160, sorted(hub + pendants)),
        "grid": (49, sorted(nx.convert_node_labels_to_integers(nx.grid_2d_graph(7, 7)).edges)),
        "cycle": (60, sorted((min(v, (v + 1) % 60), max(v, (v + 1) % 60)) for v in range(60))),
        "queen": (25, queen_edges(5)),
        "sparse": (60, sorted(nx.gnm_random_graph(60, 90, seed=3).edges)),
        "ring of ties": (90, sorted(nx.circulant_graph(90, [1, 2, 3]).edges)),
    }


def queen_edges(size: int) -> Pairs:
    """Squares of a board that a queen reaches from each other."""
    cells = [(r, c) for r in range(size) for c in range(size)]
    return sorted(
        (i, j)
        for j, (r, c) in enumerate(cells)
        for i, (s, d) in enumerate(cells[:j])
        if r == s or c == d or abs(r - s) == abs(c - d)
    )
