"""Numbers of chordal, interval and split graphs by number of vertices."""

from collections import Counter
from collections.abc import Iterator
from functools import cache
from itertools import permutations
from math import factorial

import networkx as nx
import pytest
from nearchord_solve import Graph, Monitor
from nearchord_solve.recognise import recognise_chordal, recognise_interval, recognise_split
from networkx.generators.atlas import graph_atlas_g

# n = 1..7.  Ids of the On-Line Encyclopedia of Integer Sequences where the sequence was seen there; the other rows are
# recomputed by brute force over the atlas.  A048193 is named from memory.
UNLABELLED = {
    "chordal": [1, 2, 4, 10, 27, 94, 393],  # A048193
    "connected chordal": [1, 1, 2, 5, 15, 58, 272],  # A048192
    "interval": [1, 2, 4, 10, 27, 92, 369],
    "connected interval": [1, 1, 2, 5, 15, 56, 250],
    "split": [1, 2, 4, 9, 21, 56, 164],  # A048194
}
LABELLED = {
    "chordal": [1, 2, 8, 61, 822, 18154, 617675],  # A058862
    "connected chordal": [1, 1, 4, 35, 541, 13302, 489287],  # A007134
    "interval": [1, 2, 8, 61, 822, 17914, 571475],
    "connected interval": [1, 1, 4, 35, 541, 13062, 444767],
    "split": [1, 2, 8, 58, 632, 9654, 202484],  # A179534
}


def classes(graph: nx.Graph) -> Iterator[str]:
    """The classes above that a graph belongs to."""
    plain = Graph.from_edges(graph.number_of_nodes(), list(graph.edges))
    chordal = recognise_chordal(plain, Monitor())
    assert chordal is not None
    if chordal.chordal:
        yield "chordal"
        interval = recognise_interval(plain, Monitor())
        assert interval is not None
        if interval.interval:
            yield "interval"
    if recognise_split(plain).split:
        yield "split"


@cache
def counts() -> tuple[Counter[tuple[str, int]], Counter[tuple[str, int]]]:
    """Unlabelled and labelled numbers: a graph stands for n! / automorphisms labelled ones."""
    unlabelled: Counter[tuple[str, int]] = Counter()
    labelled: Counter[tuple[str, int]] = Counter()
    for graph in graph_atlas_g()[1:]:
        n = graph.number_of_nodes()
        names = list(classes(graph))
        if nx.is_connected(graph):
            names += [f"connected {name}" for name in names if name != "split"]
        share = factorial(n) // automorphisms(graph) if names else 0
        for name in names:
            unlabelled[name, n] += 1
            labelled[name, n] += share
    return unlabelled, labelled


def automorphisms(graph: nx.Graph) -> int:
    """Number of renamings that map edges to edges, by trying those that keep degrees."""
    edges = {frozenset(edge) for edge in graph.edges}
    by_degree: dict[int, list[int]] = {}
    for v, degree in graph.degree:
        by_degree.setdefault(degree, []).append(v)
    images: list[dict[int, int]] = [{}]
    for group in by_degree.values():
        images = [
            image | dict(zip(group, order, strict=True))
            for image in images
            for order in permutations(group)
            if keeps(edges, image | dict(zip(group, order, strict=True)))
        ]
    return len(images)


def keeps(edges: set[frozenset[int]], image: dict[int, int]) -> bool:
    """Whether adjacency among the vertices mapped so far is kept (edges to edges is enough for a bijection)."""
    return all(frozenset(image[v] for v in edge) in edges for edge in edges if all(v in image for v in edge))


@pytest.mark.parametrize("name", UNLABELLED)
def test_unlabelled_counts(name: str) -> None:
    """All graphs on up to seven vertices, from the atlas (Read and Wilson)."""
    unlabelled, _ = counts()
    assert [unlabelled[name, n] for n in range(1, 8)] == UNLABELLED[name]


@pytest.mark.parametrize("name", LABELLED)
def test_labelled_counts(name: str) -> None:
    """Through the numbers of automorphisms."""
    _, labelled = counts()
    assert [labelled[name, n] for n in range(1, 8)] == LABELLED[name]
