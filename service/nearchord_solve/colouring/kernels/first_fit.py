"""Giving each vertex, in a given sequence, the lowest time that its neighbours leave free.

The time of a vertex is a list of intervals.  Along a sequence in which the earlier neighbours of every vertex form a
clique this is optimal: a vertex ends no later than its own demand and those of that clique together.  Each vertex
brings at most one boundary that was not there before, the end of its last interval, because all others are boundaries
of neighbours.
"""

from typing import NamedTuple

import numpy as np

from nearchord_solve.kernels.cells import POLL, STEP, STOP
from nearchord_solve.kernels.compiled import I32, I64, U8, kernel
from nearchord_solve.kernels.grow import grown64

DONE, STOPPED, PLANNED, OVER, FULL = 0, 1, 2, 3, 4


class Times(NamedTuple):
    """The intervals given so far.  Vertex v has ``start[first[v]+i]``..``end[first[v]+i]`` for i below ``pieces[v]``;
    ``pieces`` is -1 where none was given.  ``log``: the vertices in the order in which they got theirs."""

    first: I64  # [n]
    pieces: I64  # [n]
    start: I64
    end: I64
    log: I32  # [n]


@kernel
def sort_intervals(start: I64, end: I64, size: int) -> None:
    """Sort the first ``size`` intervals by their start (Shell's method with gaps halved).  In place."""
    gap = size >> 1
    while gap > 0:
        for i in range(gap, size):
            low = start[i]
            high = end[i]
            j = i
            while j >= gap and start[j - gap] > low:
                start[j] = start[j - gap]
                end[j] = end[j - gap]
                j -= gap
            start[j] = low
            end[j] = high
        gap >>= 1


@kernel
def first_fit(
    ptr: I64, adj: I32, sequence: I32, planned: U8, demand: I64, limit: int, times: Times,
    at: int, logged: int, used: int, cells: I64,
) -> tuple[int, int, int, int]:  # fmt: skip
    """Go on along ``sequence`` from position ``at``, passing over vertices that have their time.

    ``demand`` int64[n] >= 0.  Stops at a vertex of ``planned`` 1 (PLANNED), before a vertex would end after ``limit``
    (OVER), before the intervals do not fit (FULL), or when told to (STOPPED).  ``logged``: entries of the log;
    ``used``: intervals written.  Returns (code, at, logged, used).  Each vertex sorts the intervals of its
    neighbours.  No end exceeds ``limit`` or, without one, the sum of the demands: both stay below 2**62.
    """
    low = np.empty(64, np.int64)
    high = np.empty(64, np.int64)
    while at < sequence.shape[0]:
        if (at & POLL) == 0:
            cells[STEP] = at
            if cells[STOP] != 0:
                return STOPPED, at, logged, used
        v = sequence[at]
        if times.pieces[v] >= 0:
            at += 1
            continue
        if planned[v]:
            return PLANNED, at, logged, used
        size = int(np.int64(0))  # a literal 0 would compile what it is passed to twice
        for e in range(ptr[v], ptr[v + 1]):
            size += max(0, times.pieces[adj[e]])
        low = grown64(low, size)
        high = grown64(high, size)
        size = int(np.int64(0))
        for e in range(ptr[v], ptr[v + 1]):
            u = adj[e]
            for i in range(times.first[u], times.first[u] + max(0, times.pieces[u])):
                low[size] = times.start[i]
                high[size] = times.end[i]
                size += 1
        if used + size + 1 > times.start.shape[0]:
            return FULL, at, logged, used
        sort_intervals(low, high, size)
        end = used
        need = demand[v]
        free = int(np.int64(0))
        for i in range(size):
            if need == 0:
                break
            if low[i] > free:
                taken = min(need, low[i] - free)
                times.start[end] = free
                times.end[end] = free + taken
                end += 1
                need -= taken
            free = max(free, high[i])
        if need > 0:
            if need > limit - free:
                return OVER, at, logged, used
            times.start[end] = free
            times.end[end] = free + need
            end += 1
        times.first[v] = used
        times.pieces[v] = end - used
        times.log[logged] = v
        logged += 1
        used = end
        at += 1
    return DONE, at, logged, used
