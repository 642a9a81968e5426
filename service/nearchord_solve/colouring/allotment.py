"""The time given to every vertex of a whole graph."""

from collections.abc import Sequence
from fractions import Fraction

import numpy as np

from nearchord_solve.arrays import I32, I64
from nearchord_solve.colouring.kernels import first_fit as kernels
from nearchord_solve.colouring.kernels.first_fit import DONE, OVER, PLANNED, STOPPED
from nearchord_solve.colouring.plan import Intervals
from nearchord_solve.graph import Graph

LONGEST = 2**62

__all__ = ["DONE", "LONGEST", "OVER", "PLANNED", "STOPPED", "Allotment"]


class Allotment:
    """Intervals of time for the vertices of ``graph``, given along a sequence or by hand.

    ``unit``: so many steps make one unit of demand.  ``limit``: no time given ends after this step.  ``planned``
    uint8[n]: vertices that are given their time by hand.
    """

    def __init__(self, graph: Graph, sequence: I32, demand: I64, cells: I64, limit: int = LONGEST) -> None:
        n = graph.n
        self._graph, self._sequence, self._cells = graph, sequence, cells
        self._place = np.empty(n, np.int64)
        self._place[sequence] = np.arange(n)
        self._demand = demand.copy()
        self._times = kernels.Times(
            np.zeros(n, np.int64), np.full(n, -1, np.int64), np.empty(2 * n + 16, np.int64),
            np.empty(2 * n + 16, np.int64), np.empty(n, np.int32),
        )  # fmt: skip
        self._at = self._logged = self._used = 0
        self.planned = np.zeros(n, np.uint8)
        self.unit = 1
        self.limit = limit

    def heed(self, cells: I64) -> None:
        """Look for STOP in other cells."""
        self._cells = cells

    def advance(self) -> tuple[int, int]:
        """Go on along the sequence; returns why it ended and at which vertex (-1 if at none)."""
        graph = self._graph
        while True:
            code, self._at, self._logged, self._used = kernels.first_fit(
                graph.ptr, graph.adj, self._sequence, self.planned, self._demand, self.limit, self._times,
                self._at, self._logged, self._used, self._cells,
            )  # fmt: skip
            if code != kernels.FULL:
                return int(code), int(self._sequence[self._at]) if self._at < graph.n else -1
            self._grow(self._used + int(self._graph.ptr[-1]))

    def _grow(self, room: int) -> None:
        times = self._times
        longer = [np.concatenate((array[: self._used], np.empty(room, np.int64))) for array in (times.start, times.end)]
        self._times = times._replace(start=longer[0], end=longer[1])

    def given(self, v: int) -> bool:
        """Whether v has its time."""
        return bool(self._times.pieces[v] >= 0)

    def of(self, v: int) -> Intervals:
        """When v is served."""
        begin = int(self._times.first[v])
        end = begin + int(self._times.pieces[v])
        return list(zip(self._times.start[begin:end].tolist(), self._times.end[begin:end].tolist(), strict=True))

    def give(self, v: int, intervals: Intervals) -> None:
        """Serve v, which has no time yet, in ``intervals``."""
        if self._used + len(intervals) > self._times.start.size:
            self._grow(self._used + len(intervals))
        times, end = self._times, self._used + len(intervals)
        times.first[v], times.pieces[v], times.log[self._logged] = self._used, len(intervals), v
        if intervals:
            times.start[self._used : end], times.end[self._used : end] = zip(*intervals, strict=True)
        self._logged, self._used = self._logged + 1, end

    def undo(self, vertices: I64) -> None:
        """Take back the time of ``vertices`` and of all that were given theirs after the first of them."""
        times = self._times
        logged = np.flatnonzero(np.isin(times.log[: self._logged], vertices))
        if not logged.size:
            return
        gone = times.log[int(logged[0]) : self._logged]
        self._used, self._logged = int(times.first[gone[0]]), int(logged[0])
        times.pieces[gone] = -1
        self._at = min(self._at, int(self._place[gone].min()))

    def refine(self, factor: int) -> None:
        """Divide every step into ``factor``."""
        self.unit *= factor
        self.limit *= factor
        self._demand = self._demand * factor
        self._times.start[: self._used] *= factor
        self._times.end[: self._used] *= factor

    def neighbours_given(self, v: int) -> I64:
        """Neighbours of v that have their time."""
        row = self._graph.adj[self._graph.ptr[v] : self._graph.ptr[v + 1]]
        return row[self._times.pieces[row] >= 0].astype(np.int64)

    @property
    def frame(self) -> Fraction:
        """When the last vertex is served, in units."""
        return Fraction(self.length, self.unit)

    @property
    def length(self) -> int:
        """When the last vertex is served, in steps."""
        return int(self._times.end[: self._used].max(initial=0))

    def intervals(self) -> tuple[I64, I64, I64]:
        """All intervals: (vertices, starts, ends), by vertex and time.  Every vertex must have its time."""
        vertex, at = self._gathered()
        return vertex, self._times.start[at], self._times.end[at]

    def _gathered(self) -> tuple[I64, I64]:
        """The vertex of each interval and where the interval stands."""
        pieces = self._times.pieces
        before = np.cumsum(pieces) - pieces
        vertex = np.repeat(np.arange(pieces.size), pieces)
        return vertex, np.arange(vertex.size) + np.repeat(self._times.first - before, pieces)

    @property
    def entries(self) -> int:
        """How long the lists of all segments' vertices are together."""
        _, _, first, last = self.segments()
        return int((last - first).sum())

    def close_gaps(self) -> None:
        """Take out of the frame whatever time serves nobody."""
        lengths, _, first, last = self.segments()
        if not lengths.size:
            return
        change = np.bincount(first, minlength=lengths.size + 1) - np.bincount(last, minlength=lengths.size + 1)
        lengths[np.cumsum(change[:-1]) == 0] = 0
        cuts = np.concatenate((np.zeros(1, np.int64), np.cumsum(lengths)))
        _, at = self._gathered()
        self._times.start[at], self._times.end[at] = cuts[first], cuts[last]

    def segments(self) -> tuple[I64, I64, I64, I64]:
        """Cut the frame wherever an interval begins or ends.

        Returns (length of each segment; and of each interval its vertex, its first segment, one past its last one).
        """
        vertex, start, end = self.intervals()
        cuts = np.unique(np.concatenate((np.zeros(1, np.int64), start, end)))
        return np.diff(cuts), vertex, np.searchsorted(cuts, start), np.searchsorted(cuts, end)


def lay_out(graph: Graph, sequence: Sequence[int] | I64, demand: I64) -> Allotment:
    """First fit along ``sequence``, without a limit."""
    allotment = Allotment(graph, np.asarray(sequence, np.int32), demand, np.zeros(16, np.int64))
    allotment.advance()
    return allotment
