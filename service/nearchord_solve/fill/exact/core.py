"""Small weighted graphs on which the exact search works, as flat arrays.

A vertex of a core stands for a class of true twins of the part it comes from; a fill edge between two classes costs the
product of their sizes.  Pairs are int32[k, 2], smaller end first.
"""

from dataclasses import dataclass
from functools import cached_property

import numpy as np

from nearchord_solve.arrays import I32, I64, U64
from nearchord_solve.fill.exact.kernels.words import induced, lifted, set_pairs, written
from nearchord_solve.fill.exact.ragged import picked

NO_PAIRS: I32 = np.empty((0, 2), np.int32)


@dataclass(frozen=True, eq=False)
class Core:
    """A graph on vertices 0..n-1.

    ``rows`` uint64[n, W], W = ceil(n / 64), at least 1: bit u of row v says that u and v are adjacent (symmetric, no
    loops).  Vertex v stands for ``member[start[v]:start[v+1]]`` of the part, ascending: pairwise adjacent vertices
    with the same neighbours.  ``start`` int64[n+1], ``member`` int32.
    """

    rows: U64
    start: I64
    member: I32

    @classmethod
    def from_rows(cls, ptr: I64, adj: I32) -> "Core":
        """Read symmetric compressed rows, each vertex its own class.  O(n W + m).

        Rows may be read-only, and the kernel knows one type only: they are copied.
        """
        n = ptr.size - 1
        return cls(written(ptr.copy(), adj.copy()), np.arange(n + 1), np.arange(n, dtype=np.int32))

    @property
    def n(self) -> int:
        """Number of vertices (classes)."""
        return int(self.rows.shape[0])

    @cached_property
    def sizes(self) -> I64:
        """Vertices in each class: int64[n]."""
        return np.diff(self.start)

    @property
    def plain(self) -> bool:
        """Whether every class is a single vertex."""
        return self.member.size == self.n

    @cached_property
    def vertices(self) -> I32:
        """All vertices of the part that the core stands for, ascending."""
        return np.sort(self.member)

    def induced(self, kept: I32) -> "Core":
        """The core on ``kept``, ascending, renumbered in this order.  O(k W) and its edges."""
        if kept.size == self.n:
            return self
        start, at = picked(self.start, kept)
        return Core(induced(self.rows, kept), start, self.member[at])

    def with_edges(self, pairs: I32) -> "Core":
        """The same core with further edges."""
        return Core(with_pairs(self.rows.copy(), pairs), self.start, self.member)

    def weights(self, pairs: I32) -> I64:
        """Fill edges of the part that each pair of classes stands for."""
        return self.sizes[pairs[:, 0]] * self.sizes[pairs[:, 1]]

    def cost(self, pairs: I32) -> int:
        """Fill edges of the part that the pairs of classes stand for, together."""
        return int(pairs.shape[0]) if self.plain else int(self.weights(pairs).sum())

    def lift(self, pairs: I32) -> I32:
        """The pairs of the part, each with its smaller end first."""
        return lifted(pairs, self.start, self.member)


def with_pairs(rows: U64, pairs: I32) -> U64:
    """The rows after adding pairs to them, in place."""
    set_pairs(rows, pairs)
    return rows


def sorted_pairs(pairs: I32) -> I32:
    """The pairs in ascending order."""
    return np.ascontiguousarray(pairs[np.lexsort((pairs[:, 1], pairs[:, 0]))])
