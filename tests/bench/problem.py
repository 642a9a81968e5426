"""A weighted conflict graph as the benchmark passes it between processes: flat arrays in a folder."""

from dataclasses import dataclass
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from bench.generators import time_windows


@dataclass(frozen=True)
class Problem:
    """``low[i] < high[i]`` uint32, sorted by low, then high; ``weights`` int64[n]."""

    n: int
    low: NDArray[np.uint32]
    high: NDArray[np.uint32]
    weights: NDArray[np.int64]

    @property
    def m(self) -> int:
        """Number of edges."""
        return self.low.size

    def canonical(self) -> tuple[NDArray[np.uint64], NDArray[np.uint32]]:
        """Row pointers uint64[n+1] and targets uint32[m], each edge in the row of its smaller end."""
        row_ptr = np.zeros(self.n + 1, np.uint64)
        row_ptr[1:] = np.cumsum(np.bincount(self.low, minlength=self.n))
        return row_ptr, self.high

    def symmetric(self) -> tuple[NDArray[np.int64], NDArray[np.uint32]]:
        """Rows with both directions of every edge, by numpy alone: lexsort and bincount.

        Row pointers int64[n+1] and neighbours uint32[2m], ascending in each row.
        """
        tails = np.concatenate((self.low, self.high))
        heads = np.concatenate((self.high, self.low))
        neighbours = heads[np.lexsort((heads, tails))]
        ptr = np.zeros(self.n + 1, np.int64)
        ptr[1:] = np.cumsum(np.bincount(tails, minlength=self.n))
        return ptr, neighbours

    def shuffled(self, seed: int) -> "Problem":
        """The same graph with its vertices numbered at random."""
        name = np.random.default_rng(seed).permutation(self.n)
        one, other = name[self.low], name[self.high]
        low, high = np.minimum(one, other), np.maximum(one, other)
        order = np.lexsort((high, low))
        weights = np.empty_like(self.weights)
        weights[name] = self.weights
        return Problem(self.n, low[order].astype(np.uint32), high[order].astype(np.uint32), weights)

    def save(self, folder: Path) -> Path:
        """Write the arrays into ``folder``; load() reads them."""
        for name in ("low", "high", "weights"):
            np.save(folder / f"{name}.npy", getattr(self, name))
        return folder

    @classmethod
    def load(cls, folder: Path) -> "Problem":
        """Read what save() wrote."""
        low, high, weights = (np.load(folder / f"{name}.npy") for name in ("low", "high", "weights"))
        return cls(weights.size, low, high, weights)


def windows(n: int, mean_degree: float, removed: int, seed: int) -> Problem:
    """Time windows with some conflicts cleared, in numbers from the seed."""
    made = time_windows(n, mean_degree, removed, seed)
    return Problem(made.n, made.low, made.high, made.weights)
