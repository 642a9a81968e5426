"""Sets of edges that can be asked, as arrays."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

Ints = NDArray[np.int64]
Mask = NDArray[np.bool_]


class Edges:
    """Undirected edges on vertices 0 to n - 1; `u`, `v`: int64[m], the smaller end in `u`, each edge once."""

    def __init__(self, n: int, u: Ints, v: Ints) -> None:
        self.n, self.u, self.v = n, u, v
        keys = pair_keys(u, v)
        self._keys = keys if bool((keys[1:] > keys[:-1]).all()) else np.sort(keys)

    def joined(self, a: Ints, b: Ints) -> Mask:
        """For each pair a[i], b[i] whether it is an edge. O(log m) a pair."""
        if not self._keys.size:
            return np.zeros(len(a), np.bool_)
        wanted = pair_keys(a, b)
        place = np.searchsorted(self._keys, wanted)
        found: Mask = self._keys[np.minimum(place, self._keys.size - 1)] == wanted
        return found

    def with_pairs(self, u: Ints, v: Ints) -> Edges:
        """These edges and further ones, none of which is there yet."""
        return Edges(self.n, np.concatenate((self.u, u)), np.concatenate((self.v, v)))

    def degrees(self) -> Ints:
        """Neighbours of each vertex."""
        count: Ints = np.bincount(self.u, minlength=self.n) + np.bincount(self.v, minlength=self.n)
        return count


class Neighbours:
    """Neighbours of each vertex, of the edges with both ends in a set. Memory O(n + edges in the set)."""

    def __init__(self, edges: Edges, inside: Mask) -> None:
        kept = inside[edges.u] & inside[edges.v]
        u, v = edges.u[kept], edges.v[kept]
        ends = np.concatenate((u, v))
        self._of = np.concatenate((v, u))[np.argsort(ends, kind="stable")]
        self._start = np.concatenate((np.zeros(1, np.int64), np.cumsum(np.bincount(ends, minlength=edges.n))))

    def around(self, vertices: Ints) -> tuple[Ints, Ints]:
        """Positions in `vertices` and their neighbours, one entry for each neighbour."""
        counts = self._start[vertices + 1] - self._start[vertices]
        before = np.cumsum(counts) - counts
        at = np.repeat(self._start[vertices] - before, counts) + np.arange(int(counts.sum()))
        return np.repeat(np.arange(len(vertices)), counts), self._of[at]


def pair_keys(a: Ints, b: Ints) -> Ints:
    """Numbers that tell unordered pairs apart, ascending with (smaller end, larger end)."""
    low, high = np.minimum(a, b), np.maximum(a, b)
    keys: NDArray[np.uint64] = low.astype(np.uint64) << np.uint64(32) | high.astype(np.uint64)
    return keys.view(np.int64)
