"""Small weighted graphs on which the exact search works, with vertex sets as bit masks.

A core has at most a few thousand vertices.  Vertex sets are Python integers (bit v = vertex v): one machine
word for 60 vertices, and set operations at memory speed beyond.  A vertex of a core stands for a class of true
twins of the part it comes from; a fill edge between two classes costs the product of their sizes.
"""

from collections.abc import Iterator, Sequence
from dataclasses import dataclass, field

import numpy as np

from nearchord_solve.arrays import I32, I64

Pair = tuple[int, int]
Mask = int


def members(mask: Mask) -> Iterator[int]:
    """Vertices of a set, ascending."""
    while mask:
        low = mask & -mask
        yield low.bit_length() - 1
        mask ^= low


@dataclass(frozen=True, eq=False)
class Core:
    """A graph on vertices 0..n-1 given by neighbour masks (symmetric, without the vertex itself).

    ``classes[v]`` are the vertices of the part that v stands for, ascending; they are pairwise adjacent and have
    the same neighbours.  ``sizes[v]`` is their number.
    """

    adj: list[Mask]
    classes: list[tuple[int, ...]]
    sizes: list[int] = field(init=False)

    def __post_init__(self) -> None:
        object.__setattr__(self, "sizes", [len(c) for c in self.classes])

    @classmethod
    def from_rows(cls, ptr: I64, adj: I32) -> "Core":
        """Read symmetric compressed rows, each vertex its own class."""
        n = ptr.size - 1
        masks = [0] * n
        for v in range(n):
            for u in adj[ptr[v] : ptr[v + 1]].tolist():
                masks[v] |= 1 << u
        return cls(masks, [(v,) for v in range(n)])

    @property
    def n(self) -> int:
        """Number of vertices (classes)."""
        return len(self.adj)

    @property
    def everything(self) -> Mask:
        """All vertices."""
        return (1 << len(self.adj)) - 1

    def induced(self, kept: Mask) -> "Core":
        """The core on ``kept``, renumbered in ascending order."""
        old = list(members(kept))
        new = {v: i for i, v in enumerate(old)}
        adj = [mask_of(new[u] for u in members(self.adj[v] & kept)) for v in old]
        return Core(adj, [self.classes[v] for v in old])

    def with_edges(self, pairs: Sequence[Pair]) -> "Core":
        """The same core with further edges."""
        return Core(joined(self.adj, pairs), self.classes)

    def cost(self, pairs: Sequence[Pair]) -> int:
        """Fill edges of the part that the pairs of classes stand for."""
        return sum(self.sizes[a] * self.sizes[b] for a, b in pairs)

    def lift(self, pairs: Sequence[Pair]) -> list[Pair]:
        """The pairs of the part, each with its smaller end first."""
        return [(min(u, v), max(u, v)) for a, b in pairs for u in self.classes[a] for v in self.classes[b]]


def mask_of(vertices: Iterator[int] | Sequence[int]) -> Mask:
    """The set of the given vertices."""
    mask = 0
    for v in vertices:
        mask |= 1 << v
    return mask


def joined(adj: Sequence[Mask], pairs: Sequence[Pair]) -> list[Mask]:
    """Neighbour masks after adding ``pairs``."""
    rows = list(adj)
    for a, b in pairs:
        rows[a] |= 1 << b
        rows[b] |= 1 << a
    return rows


def reach(adj: Sequence[Mask], start: Mask, within: Mask) -> Mask:
    """Vertices of ``within`` joined to ``start`` (a subset of it) by paths inside ``within``."""
    found = frontier = start
    while frontier:
        grown = 0
        for v in members(frontier):
            grown |= adj[v]
        frontier = grown & within & ~found
        found |= frontier
    return found


def components(adj: Sequence[Mask], within: Mask) -> Iterator[Mask]:
    """Components of the graph induced on ``within``, by lowest vertex."""
    while within:
        part = reach(adj, within & -within, within)
        yield part
        within &= ~part


def around(adj: Sequence[Mask], inside: Mask) -> Mask:
    """Neighbours of a set, outside it."""
    seen = 0
    for v in members(inside):
        seen |= adj[v]
    return seen & ~inside


def missing(adj: Sequence[Mask], inside: Mask) -> list[Pair]:
    """Non-adjacent pairs inside a set, lexicographic."""
    return [(a, b) for a in members(inside) for b in members(inside & ~adj[a] & ~((2 << a) - 1))]


def is_clique(adj: Sequence[Mask], inside: Mask) -> bool:
    """Whether all pairs inside are adjacent."""
    return all(not inside & ~adj[v] & ~(1 << v) for v in members(inside))


def pair_array(pairs: Sequence[Pair]) -> I32:
    """The pairs sorted, as int32[k, 2]."""
    return np.array(sorted(pairs), np.int32).reshape(-1, 2)
