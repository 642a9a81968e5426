"""Interval graphs: vertices are intervals of a line, edges are overlaps."""

from dataclasses import dataclass

import numpy as np

from nearchord_solve.arrays import I32, I64
from nearchord_solve.graph import Graph
from nearchord_solve.monitor import Monitor
from nearchord_solve.recognise.kernels.consecutive import arrange
from nearchord_solve.recognise.kernels.lexicographic import lexicographic_search, maximal_cliques


@dataclass(frozen=True, eq=False)
class Interval:
    """``interval``: whether the graph is an interval graph.

    If so, clique i is ``vertex[ptr[i]:ptr[i+1]]``, ascending: all maximal cliques, in an order in which those of
    each vertex are consecutive.  Otherwise both are None.
    """

    interval: bool
    ptr: I64 | None = None
    vertex: I32 | None = None


def recognise_interval(graph: Graph, monitor: Monitor) -> Interval | None:
    """Decide whether a *chordal* graph is an interval graph; None if stopped.

    A graph is an interval graph iff its maximal cliques can be ordered so that those of each vertex are consecutive
    (Gilmore and Hoffman, Canad. J. Math. 16 (1964) 539-548).  O(n + m) time.
    """
    order = np.empty(graph.n, np.int32)
    place = np.empty(graph.n, np.int32)
    if not lexicographic_search(graph.ptr, graph.adj, order, place, monitor.cells):
        return None
    ptr, vertex, parent, shared_ptr, shared = maximal_cliques(graph.ptr, graph.adj, order, place)
    count = parent.size
    component = np.asarray(np.cumsum(parent < 0) - 1, np.int32)
    of_ptr, of = _by_vertex(graph.n, ptr, vertex)
    position = np.empty(count, np.int64)
    if not arrange(component, of_ptr, of, parent, shared_ptr, shared, position):
        return Interval(False)
    size = np.empty(count, np.int64)
    size[position] = np.diff(ptr)
    out = np.concatenate((np.zeros(1, np.int64), np.cumsum(size)))
    clique = np.repeat(position, np.diff(ptr))
    return Interval(True, out, vertex[np.lexsort((vertex, clique))])


def _by_vertex(n: int, ptr: I64, vertex: I32) -> tuple[I64, I32]:
    """The cliques of each vertex, ascending."""
    clique = np.repeat(np.arange(ptr.size - 1, dtype=np.int32), np.diff(ptr))
    of_ptr = np.concatenate((np.zeros(1, np.int64), np.cumsum(np.bincount(vertex, minlength=n))))
    return of_ptr, clique[np.argsort(vertex, kind="stable")]
