"""Chordal graphs: every cycle of four or more vertices has a chord."""

from dataclasses import dataclass

import numpy as np

from nearchord_solve.arrays import I32, I64
from nearchord_solve.fill.cores import Cores, find_cores
from nearchord_solve.fill.exact.parts import parts_of
from nearchord_solve.graph import Graph
from nearchord_solve.kernels.layout import Numbering
from nearchord_solve.monitor import Monitor
from nearchord_solve.order import Ranking, Unfinished, eliminate, rank
from nearchord_solve.recognise.kernels.chordless import chordless_cycle

FILL_ROOM = 10**7


@dataclass(frozen=True, eq=False)
class Chordal:
    """Either ``order`` int32[n], in which the later neighbours of each vertex form a clique (a perfect elimination
    order), or ``cycle`` int32[c], c >= 4: vertices of a cycle in turn, without a chord."""

    order: I32 | None
    cycle: I32 | None

    @property
    def chordal(self) -> bool:
        """Whether the graph is chordal."""
        return self.order is not None


def recognise_chordal(graph: Graph, monitor: Monitor) -> Chordal | None:
    """Decide by maximum cardinality search; None if stopped.

    The order is the reverse of the search.  O(n + m) if chordal.  Otherwise the cycle is looked for in the
    parts that hold fill only, at O(n + m) of the part for each vertex tried.
    """
    ranking = rank(graph, monitor)
    if isinstance(ranking, Unfinished):
        return None
    numbering = eliminate(ranking, 0, monitor)
    if numbering is Unfinished.STOPPED:
        return None
    if numbering is not Unfinished.TOO_LARGE:
        return Chordal(np.ascontiguousarray(ranking.order[::-1]), None)
    return _witness(graph, ranking, monitor)


def _witness(graph: Graph, ranking: Ranking, monitor: Monitor) -> Chordal | None:
    numbering = eliminate(ranking, 2 * graph.m + FILL_ROOM, monitor)
    if numbering is Unfinished.TOO_LARGE:
        return _cycle_inside(graph.ptr, graph.adj, monitor)
    cores = numbering if isinstance(numbering, Unfinished) else find_cores(numbering, monitor)
    if isinstance(cores, Unfinished) or isinstance(numbering, Unfinished):
        return None
    return find_chordless(graph, numbering, cores, monitor)


def find_chordless(graph: Graph, numbering: Numbering, cores: Cores, monitor: Monitor) -> Chordal | None:
    """A chordless cycle of a graph that has fill along a maximum cardinality search; None if stopped."""
    for part in parts_of(graph, numbering, cores):
        found = _cycle_inside(part.ptr, part.adj, monitor)
        if found is None:
            return None
        if found.cycle is not None:
            return Chordal(None, part.vertices[found.cycle])
    raise AssertionError("a graph with fill along a maximum cardinality search has a chordless cycle")


def _cycle_inside(ptr: I64, adj: I32, monitor: Monitor) -> Chordal | None:
    """A chordless cycle of the part; both fields None if there is none, None if stopped."""
    done, cycle = chordless_cycle(ptr, adj, monitor.cells)
    if not done:
        return None
    return Chordal(None, cycle if cycle.size else None)
