"""Hypothesis strategies for graphs; every property test draws its graphs from here.

A drawn graph is a pair (n, edges) with 0-based pairs u < v, ascending, so that tests can build whatever form
they need from it.
"""

from collections.abc import Sequence

from hypothesis import strategies as st

Edges = tuple[int, list[tuple[int, int]]]

MOST_WEIGHT_EACH = 1000


@st.composite
def arbitrary_graphs(draw: st.DrawFn, most: int = 12) -> Edges:
    """Any graph on up to ``most`` vertices."""
    n = draw(st.integers(0, most))
    pairs = [(u, v) for v in range(n) for u in range(v)]
    kept = draw(st.lists(st.booleans(), min_size=len(pairs), max_size=len(pairs)))
    return n, sorted(pair for pair, keep in zip(pairs, kept, strict=True) if keep)


@st.composite
def chordal_graphs(draw: st.DrawFn, most: int = 16) -> Edges:
    """A chordal graph: each vertex is joined to a part of a clique made before, then names are shuffled."""
    n = draw(st.integers(0, most))
    cliques: list[list[int]] = [[]]
    edges: set[tuple[int, int]] = set()
    for v in range(n):
        base = cliques[draw(st.integers(0, len(cliques) - 1))]
        earlier = [u for u in base if draw(st.booleans())] if base else []
        edges.update((u, v) for u in earlier)
        cliques.append([*earlier, v])
    return _renamed(draw, n, edges)


@st.composite
def window_graphs(draw: st.DrawFn, most: int = 24) -> Edges:
    """An interval graph: overlaps of time windows."""
    n = draw(st.integers(0, most))
    starts = [draw(st.integers(0, 40)) for _ in range(n)]
    ends = [start + draw(st.integers(0, 15)) for start in starts]
    edges = {(u, v) for v in range(n) for u in range(v) if starts[u] <= ends[v] and starts[v] <= ends[u]}
    return _renamed(draw, n, edges)


@st.composite
def near_chordal_graphs(draw: st.DrawFn, most: int = 24, removed: int = 6) -> Edges:
    """A chordal or window graph with up to ``removed`` edges taken out."""
    n, edges = draw(st.one_of(chordal_graphs(most), window_graphs(most)))
    for _ in range(draw(st.integers(0, removed))):
        if edges:
            edges.pop(draw(st.integers(0, len(edges) - 1)))
    return n, edges


def graphs() -> st.SearchStrategy[Edges]:
    """A graph of any kind."""
    return st.one_of(arbitrary_graphs(), chordal_graphs(), window_graphs(), near_chordal_graphs())


@st.composite
def weighted_graphs(draw: st.DrawFn) -> tuple[int, list[tuple[int, int]], list[int]]:
    """A graph of any kind with vertex weights, zero included."""
    n, edges = draw(graphs())
    weights = draw(st.lists(st.integers(0, MOST_WEIGHT_EACH), min_size=n, max_size=n))
    return n, edges, weights


def _renamed(draw: st.DrawFn, n: int, edges: set[tuple[int, int]]) -> Edges:
    names: Sequence[int] = draw(st.permutations(range(n)))
    return n, sorted((min(names[u], names[v]), max(names[u], names[v])) for u, v in edges)
