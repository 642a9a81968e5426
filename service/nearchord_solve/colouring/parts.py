"""The parts of a graph that hold fill, and a sequence in which plans can be put together.

Cut the tree of bags at adhesions without fill.  The adhesions that are cut are cliques of G, and every edge of G lies
in a part.  In any plan the vertices of a clique have disjoint times, so plans of two parts that share a clique and give
each of its vertices as much time can be brought to agree on it by moving pieces of time about.  Hence the shortest
frame of G is the longest of its parts' shortest frames, in whole units as well as in fractions of them; and a part
without fill, a clique, needs the sum of its demands.
"""

from dataclasses import dataclass
from functools import cached_property

import numpy as np

from nearchord_solve.arrays import I32, I64, U8
from nearchord_solve.graph import Graph
from nearchord_solve.kernels.bags import fill_parts
from nearchord_solve.structure import Structure

GRID = 256  # steps that a frame is divided into where a plan would have too many pieces


@dataclass(frozen=True, eq=False)
class Part:
    """One part that holds fill.

    ``vertices`` int64[p], ascending; ``home`` uint8[p]: those that no part above has.  ``sequence`` int64[p]: their
    positions along the tree of bags.  ``graph``: G on them.
    """

    vertices: I64
    home: U8
    sequence: I64
    whole: Graph

    @cached_property
    def graph(self) -> Graph:
        """The induced graph, numbered as ``vertices``."""
        return induced(self.whole, self.vertices)


def induced(graph: Graph, vertices: I64) -> Graph:
    """The graph on ``vertices``, ascending.  O(their degrees)."""
    begin = graph.ptr[vertices]
    counts = graph.ptr[vertices + 1] - begin
    ends = np.cumsum(counts)
    entries = np.arange(int(counts.sum())) + np.repeat(begin - ends + counts, counts)
    neighbours = graph.adj[entries]
    index = np.searchsorted(vertices, neighbours)
    inside = vertices[np.minimum(index, vertices.size - 1)] == neighbours if vertices.size else np.zeros(0, bool)
    rows = np.repeat(np.arange(vertices.size), counts)[inside]
    ptr = np.concatenate((np.zeros(1, np.int64), np.cumsum(np.bincount(rows, minlength=vertices.size))))
    return Graph.from_symmetric(ptr, index[inside].astype(np.int32))


class Parts:
    """The parts of ``structure`` that hold fill.

    ``sequence`` int32[n]: the earlier neighbours of each vertex form a clique with it, but for homes of parts with
    fill; when the first home of such a part comes up, the other vertices that it shares with parts above have been, and
    nothing below has.  ``part`` int32[n]: the part with fill that a vertex is at home in, -1 if none.
    """

    def __init__(self, graph: Graph, structure: Structure) -> None:
        """O(n log n) and the size of the bags of the cores."""
        self._graph = graph
        self.sequence: I32 = np.ascontiguousarray(structure.elimination_order()[::-1])
        self._place = np.empty(graph.n, np.int64)
        self._place[self.sequence] = np.arange(graph.n)
        self._structure = structure
        forest, order = structure.forest, structure.numbering.order
        _, part = fill_parts(forest.bag_above, forest.bag_kind)
        self._bag_part: I32 = part
        sizes = np.diff(forest.bag_ptr)
        inside = np.arange(forest.bag_slot.size) - np.repeat(forest.bag_ptr[:-1], sizes)
        at_home = inside >= np.repeat(forest.bag_adhesion, sizes)
        self.part: I32 = np.full(graph.n, -1, np.int32)
        self.part[order[forest.slot_place[forest.bag_slot[at_home]]]] = np.repeat(part, sizes)[at_home]
        self._ptr, self._vertex = structure.core_vertices()

    def __len__(self) -> int:
        return self._ptr.size - 1

    def __getitem__(self, number: int) -> Part:
        vertices = self._vertex[self._ptr[number] : self._ptr[number + 1]].astype(np.int64)
        home = (self.part[vertices] == number).astype(np.uint8)
        return Part(vertices, home, np.argsort(self._place[vertices]), self._graph)

    def raised(self, demand: I64, frame: int) -> I64:
        """Demands int64[n] rounded up to a grid wherever ``frame`` has time to spare, so that plans have fewer pieces.

        A clique outside the parts with fill keeps its demands if it would not fit with all of them raised, and so does
        a part with fill unless each of its bags fits, which suffices for first fit.  ``frame`` must do for ``demand``
        itself; it does for the result.  O(n + m).
        """
        numbering, forest = self._structure.numbering, self._structure.forest
        grid = max(1, frame // GRID)
        exact = demand[numbering.order]
        rough = -(-exact // grid) * grid
        full = rough + _row_sums(rough, numbering.low, numbering.low_ptr) > frame
        full &= numbering.core < 0
        kept = full.copy()
        kept[numbering.low[np.repeat(full, np.diff(numbering.low_ptr))]] = True
        places = forest.slot_place[forest.bag_slot]
        tight = _row_sums(rough, places, forest.bag_ptr) > frame
        bad_part = np.zeros(len(self) + 1, bool)  # the last one is for bags without fill
        bad_part[self._bag_part[tight]] = True
        kept[places[np.repeat(tight | (bad_part[self._bag_part] & (self._bag_part >= 0)), np.diff(forest.bag_ptr))]] = (
            True
        )
        found = np.empty_like(demand)
        found[numbering.order] = np.where(kept, exact, rough)
        return found


def _row_sums(values: I64, entries: I32, ptr: I64) -> I64:
    """Sums of ``values`` over rows of ``entries``; the running sum may wrap, its differences do not."""
    running = np.concatenate((np.zeros(1, np.int64), np.cumsum(values[entries])))
    return running[ptr[1:]] - running[ptr[:-1]]
