"""Whole-number plans of one part: every vertex as so many copies as it demands, which are coloured."""

from dataclasses import dataclass

import numpy as np

from nearchord_solve.arrays import I32, I64, U64
from nearchord_solve.colouring.kernels import mend as mending
from nearchord_solve.colouring.kernels import saturation
from nearchord_solve.colouring.plan import Plan, plan_of_classes
from nearchord_solve.graph import Graph
from nearchord_solve.monitor import Monitor

SEED = 0x9E3779B97F4A7C15


@dataclass(frozen=True, eq=False)
class Copies:
    """The graph on the copies, and of which vertex each is one; copies of a vertex stand together and are adjacent.

    ``previous`` int32: the copy before, -1 for first ones.
    """

    graph: Graph
    vertex: I64
    previous: I32
    size: int


def copies(graph: Graph, demand: I64) -> Copies:
    """``demand`` int64[p] copies of each vertex.  O(sum over the edges of products of demands)."""
    vertex = np.repeat(np.arange(graph.n), demand)
    first = np.cumsum(demand) - demand
    rows = []
    for v in range(graph.n):
        around = np.sort(np.append(graph.adj[graph.ptr[v] : graph.ptr[v + 1]], v))
        sizes = demand[around]
        row = np.arange(int(sizes.sum())) + np.repeat(first[around] - np.cumsum(sizes) + sizes, sizes)
        rows += [row[row != first[v] + copy] for copy in range(int(demand[v]))]
    ptr = np.cumsum([0, *(row.size for row in rows)], dtype=np.int64)
    adj = np.concatenate([np.empty(0, np.int32), *rows]).astype(np.int32)
    number = np.arange(vertex.size)
    previous = np.where(number > first[vertex], number - 1, -1).astype(np.int32)
    return Copies(Graph.from_symmetric(ptr, adj), vertex, previous, graph.n)


class Painter:
    """Colourings of copies with fewer and fewer colours.  Deterministic, unless stopped."""

    def __init__(self, of: Copies, monitor: Monitor) -> None:
        self._of, self._monitor = of, monitor
        self._random: U64 = np.array([SEED], np.uint64)
        self.colour: I32 = np.zeros(of.vertex.size, np.int32)
        self.colours = of.vertex.size

    @property
    def plan(self) -> Plan:
        """The best colouring found."""
        return plan_of_classes(self.colour, self._of.vertex, self._of.size)

    def begin(self) -> None:
        """Colour greedily, the most constrained first."""
        colour = np.empty(self._of.vertex.size, np.int32)
        graph = self._of.graph
        most = int(np.diff(graph.ptr).max(initial=0)) + 1
        saturation.colour_by_saturation(
            graph.ptr, graph.adj, self._of.previous, most, colour.size, colour, np.zeros(16, np.int64)
        )
        self.colour, self.colours = colour, int(colour.max(initial=-1)) + 1

    def improve(self, target: int, turns: int) -> None:
        """Use one colour less as long as the conflicts can be mended in ``turns`` moves, down to ``target``."""
        graph = self._of.graph
        while self.colours > max(target, 1) and not self._monitor.stop:
            fewer = self.colours - 1
            colour = self._without_smallest()
            if fewer < 2:
                left = mending.count_around(graph.ptr, graph.adj, fewer, colour)[1]
            else:
                left = mending.mend(graph.ptr, graph.adj, fewer, colour, turns, self._random, self._monitor.cells)
            if left:
                return
            self.colour, self.colours = colour, fewer

    def _without_smallest(self) -> I32:
        """The colouring with the vertices of the smallest class spread over the others."""
        sizes = np.bincount(self.colour, minlength=self.colours)
        gone = int(np.argmin(sizes))
        colour = self.colour.copy()
        spread = np.flatnonzero(colour == gone)
        colour[colour == self.colours - 1] = gone
        colour[spread] = np.arange(spread.size) % (self.colours - 1)
        return colour

    def settle(self, colours: int, most: int) -> bool | None:
        """Whether so many colours suffice, by branching; None if not known after ``most`` steps or when stopped."""
        graph = self._of.graph
        colour = np.empty(self._of.vertex.size, np.int32)
        code, _ = saturation.colour_by_saturation(
            graph.ptr, graph.adj, self._of.previous, colours, most, colour, self._monitor.cells
        )
        if code == saturation.FOUND:
            self.colour, self.colours = colour, int(colour.max(initial=-1)) + 1
            return True
        return False if code == saturation.NONE else None
