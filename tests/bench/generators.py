"""Seeded generators of large conflict graphs, numpy only.

Time windows: each request holds one window of time; two requests are in conflict when their windows meet.
Such graphs are interval graphs, hence chordal; removing conflicts (cleared pairs) takes them a little way off.
"""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray


@dataclass(frozen=True)
class Windows:
    """A generated graph: edges ``low[i] < high[i]`` (uint32, sorted by low, then high) and int64 weights."""

    n: int
    low: NDArray[np.uint32]
    high: NDArray[np.uint32]
    weights: NDArray[np.int64]

    def canonical(self) -> tuple[NDArray[np.uint64], NDArray[np.uint32]]:
        """Row pointers uint64[n+1] and targets uint32[m], each edge in the row of its smaller end."""
        row_ptr = np.zeros(self.n + 1, np.uint64)
        row_ptr[1:] = np.cumsum(np.bincount(self.low, minlength=self.n))
        return row_ptr, self.high


def time_windows(n: int, mean_degree: float, removed: int, seed: int) -> Windows:
    """``n`` windows on a line with about ``n * mean_degree / 2`` conflicts, of which ``removed`` are cleared.

    Starts are uniform, lengths are between half and one and a half times the mean; vertices are numbered at
    random.  Deterministic in ``seed``.
    """
    random = np.random.default_rng(seed)
    mean_length = mean_degree / 2 / n
    start = np.sort(random.random(n))
    end = start + random.uniform(0.5, 1.5, n) * mean_length
    beyond = np.searchsorted(start, end, side="right")
    counts = np.maximum(beyond - np.arange(n) - 1, 0)
    first = np.repeat(np.arange(n), counts)
    offset = np.arange(counts.sum()) - np.repeat(np.cumsum(counts) - counts, counts)
    second = first + 1 + offset
    kept = np.ones(first.size, bool)
    kept[random.choice(first.size, min(removed, first.size), replace=False)] = False
    name = random.permutation(n)
    one, other = name[first[kept]], name[second[kept]]
    low, high = np.minimum(one, other), np.maximum(one, other)
    order = np.argsort(low * np.int64(n) + high)
    weights = random.integers(1, 1000, n)
    return Windows(n, low[order].astype(np.uint32), high[order].astype(np.uint32), weights)
