"""Witnesses that a graph is chordal, and that it is not.

**Elimination orders.** In an order of the vertices let p(v) be the first later neighbour of v. If for every v each
other later neighbour of v is a neighbour of p(v), then the later neighbours of every v are pairwise adjacent: by
induction from the last vertex on, those of p(v) are, and those of v are p(v) and some of them. A graph with such an
order is chordal: on any cycle of four or more vertices the two neighbours of its first vertex are adjacent, which is
a chord.
"""

from __future__ import annotations

import numpy as np

from nearchord.checks.edges import Edges, Ints, Neighbours
from nearchord.errors import CheckFailed
from nearchord.graph import Graph


def check_elimination_order(graph: Graph, edges: Edges, order: Ints) -> None:
    """Raises CheckFailed unless the later neighbours of each vertex are pairwise adjacent. O((n + m) log m)."""
    position = _positions(graph, order)
    at_u, at_v = position[edges.u], position[edges.v]
    earlier, later = np.minimum(at_u, at_v), np.maximum(at_u, at_v)
    first = np.full(graph.n, graph.n, np.int64)
    np.minimum.at(first, earlier, later)
    others = later != first[earlier]
    near, far = order[first[earlier[others]]], order[later[others]]
    apart = np.flatnonzero(~edges.joined(near, far))
    if apart.size:
        vertex, a, b = (int(x[apart[0]]) for x in (order[earlier[others]], near, far))
        raise CheckFailed(
            f"the fill edges do not make the graph chordal in the order given: {graph.label(a)} and {graph.label(b)} "
            f"follow their neighbour {graph.label(vertex)}, but are not adjacent"
        )


def _positions(graph: Graph, order: Ints) -> Ints:
    position = np.full(graph.n, -1, np.int64)
    if order.size == graph.n and (not order.size or int(order.max()) < graph.n):
        position[order] = np.arange(graph.n)
    if order.size != graph.n or bool((position < 0).any()):
        raise CheckFailed(f"the elimination order is no order of the {graph.n} vertices")
    return position


def check_chordless_cycle(graph: Graph, edges: Edges, cycle: Ints) -> None:
    """Raises CheckFailed unless `cycle` goes around a cycle of four or more vertices without a chord. O(n + m)."""
    check_known(graph, cycle, "the chordless cycle")
    inside = np.zeros(graph.n, np.bool_)
    inside[cycle] = True
    CycleCheck(graph, Neighbours(edges, inside)).check(cycle, "the chordless cycle")


def check_known(graph: Graph, vertices: Ints, what: str) -> None:
    """Raises CheckFailed when there are vertices that the graph does not have."""
    if vertices.size and int(vertices.max()) >= graph.n:
        raise CheckFailed(f"{what} has vertex {int(vertices.max())}, but the graph has {graph.n} vertices")


class CycleCheck:
    """Checks many cycles against one graph, O(neighbours of its vertices) each."""

    def __init__(self, graph: Graph, neighbours: Neighbours) -> None:
        self._graph = graph
        self._neighbours = neighbours
        self._place = np.full(graph.n, -1, np.int64)

    def check(self, cycle: Ints, what: str) -> None:
        """Raises CheckFailed unless `cycle` is one of four or more vertices, each once, without a chord."""
        length = len(cycle)
        if length < 4:
            raise CheckFailed(f"{what} has {length} vertices, where it takes four")
        self._place[cycle] = np.arange(length)
        if bool((self._place[cycle] != np.arange(length)).any()):
            raise CheckFailed(f"{what} passes a vertex twice")
        here, neighbour = self._neighbours.around(cycle)
        there = self._place[neighbour]
        self._place[cycle] = -1
        step = (there - here) % length
        chord = np.flatnonzero((there >= 0) & (step != 1) & (step != length - 1))
        if chord.size:
            raise CheckFailed(f"{what} has the chord {self._pair(cycle, here[chord[0]], there[chord[0]])}")
        follows = np.zeros(length, np.bool_)
        follows[here[(there >= 0) & (step == 1)]] = True
        if not follows.all():
            gap = int((~follows).argmax())
            raise CheckFailed(f"{what} goes along {self._pair(cycle, gap, (gap + 1) % length)}, which is no edge")

    def _pair(self, cycle: Ints, one: int, other: int) -> str:
        return pair_label(self._graph, int(cycle[one]), int(cycle[other]))


def pair_label(graph: Graph, u: int, v: int) -> str:
    """A pair of vertices as messages show it."""
    return f"{{{graph.label(u)}, {graph.label(v)}}}"
