"""Cuts: cycles that need chords.

Let C be a cycle on c >= 4 vertices of which no chord is an edge of the graph, and let K of its sides be non-edges.
A triangulation that contains all K sides contains c - 3 chords of C (a triangulated c-gon has that many), so with
x = 1 on fill edges and 0 elsewhere

    sum of x over the chords of C  >=  (c - 3) (1 - sum over the K sides of (1 - x)).

For K = 0 these are the chordless cycles of the graph.  The separation looks for violated cuts at a point x: all
4-cycles exactly, longer ones among shortest paths in the graph with the pairs of x >= some threshold added.
"""

from dataclasses import dataclass

import numpy as np

from nearchord_solve.arrays import F64, I32, I64, U64
from nearchord_solve.fill.exact.core import Core
from nearchord_solve.fill.exact.kernels.chordless import four_cycles, long_cycles, presence, round_up
from nearchord_solve.fill.exact.keys import mixed
from nearchord_solve.fill.exact.ragged import chained, picked

LEAST_VIOLATION = 1e-4
TOLD_APART = 6  # vertices by which cycles are ordered
NEGLIGIBLE = 1e9  # violations are told apart up to one over this


@dataclass(frozen=True, eq=False)
class Cycles:
    """Cycle i is ``vertex[ptr[i]:ptr[i+1]]``, int32."""

    ptr: I64
    vertex: I32

    @classmethod
    def none(cls) -> "Cycles":
        """No cycles."""
        return cls(np.zeros(1, np.int64), np.empty(0, np.int32))

    @property
    def count(self) -> int:
        """Number of cycles."""
        return self.ptr.size - 1

    def take(self, which: I64) -> "Cycles":
        """Some of them."""
        ptr, at = picked(self.ptr, which)
        return Cycles(ptr, self.vertex[at])

    def joined(self, others: "Cycles") -> "Cycles":
        """These and then the others."""
        return Cycles(chained(self.ptr, others.ptr), np.concatenate((self.vertex, others.vertex)))

    def turned(self) -> "Cycles":
        """Each from its lowest vertex on to the lower one of the two beside it."""
        begin, size = self.ptr[:-1], np.diff(self.ptr)
        places = np.arange(self.vertex.size)
        low = np.repeat(np.minimum.reduceat(self.vertex, begin), size) == self.vertex
        at = places[low] - begin
        after, before = self.vertex[begin + (at + 1) % size], self.vertex[begin + (at - 1) % size]
        step = np.where(after < before, 1, -1)
        offset = places - np.repeat(begin, size)
        turned = np.repeat(begin, size) + (np.repeat(at, size) + np.repeat(step, size) * offset) % np.repeat(size, size)
        return Cycles(self.ptr, self.vertex[turned])

    def keys(self) -> U64:
        """A number for each cycle that is the same wherever it starts and whichever way it goes.

        The sum of mixed numbers of its sides.  Should two cycles ever share one, the search takes them for the same:
        it misses a cut, and no bound rests on cuts that are missing.
        """
        if not self.count:
            return np.empty(0, np.uint64)
        after = np.arange(1, self.vertex.size + 1)
        after[self.ptr[1:] - 1] = self.ptr[:-1]
        one, other = self.vertex, self.vertex[after]
        sides = np.minimum(one, other).astype(np.uint64) << np.uint64(32) | np.maximum(one, other).astype(np.uint64)
        return np.add.reduceat(mixed(sides), self.ptr[:-1])


def violated(core: Core, x: F64, thresholds: tuple[float, ...], enough: int, cells: I64) -> Cycles:
    """Cycles whose cuts are violated at ``x`` float64[n, n] (symmetric, 0 on edges), the worst first.

    ``x`` of shape (0, 0) stands for 0 everywhere.  Thresholds are tried in turn until ``enough`` are found.
    """
    present = presence(core.rows, x)
    squares, gain = four_cycles(core.rows, present, LEAST_VIOLATION)
    found = Cycles(4 * np.arange(squares.shape[0] + 1), squares.ravel())
    seen = core.rows[:0]
    for threshold in thresholds:
        if found.count >= enough and np.unique(found.keys()).size >= enough:
            break
        rounded = core.rows.copy()
        round_up(present, threshold, rounded)
        if np.array_equal(rounded, seen):
            continue
        seen = rounded
        flat, ends, gains = long_cycles(rounded, present, LEAST_VIOLATION, cells)
        longer = Cycles(np.concatenate((np.zeros(1, np.int64), ends)), flat)
        found, gain = found.joined(longer), np.concatenate((gain, gains))
    return _ordered(found, gain)


def _ordered(cycles: Cycles, gain: F64) -> Cycles:
    """Each cycle once, the most violated first; ties by their first vertices, then by key."""
    if not cycles.count:
        return cycles
    keys, first = np.unique(cycles.keys(), return_index=True)
    cycles, gain = cycles.take(first).turned(), gain[first]
    sizes = np.diff(cycles.ptr)
    places = cycles.ptr[:-1, None] + np.arange(TOLD_APART)
    begins = np.where(np.arange(TOLD_APART) < sizes[:, None], cycles.vertex[places % cycles.vertex.size], -1)
    order = np.lexsort((keys, *begins.T[::-1], -np.round(gain * NEGLIGIBLE)))
    return cycles.take(order)
