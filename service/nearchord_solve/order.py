"""Numbering a graph: maximum cardinality search or minimum degree, then symbolic elimination."""

from enum import Enum
from typing import NamedTuple

import numpy as np

from nearchord_solve.arrays import I32, I64
from nearchord_solve.graph import Graph
from nearchord_solve.kernels import degree, elimination, search
from nearchord_solve.kernels.layout import Numbering
from nearchord_solve.monitor import Monitor, Phase


class Unfinished(Enum):
    """Why a stage has no result."""

    STOPPED = 1
    TOO_LARGE = 2


class Ranking(NamedTuple):
    """``order`` int32[n]: the vertex at each place; ``low`` row i: places of its earlier neighbours."""

    order: I32
    low_ptr: I64
    low: I32


def rank(graph: Graph, monitor: Monitor) -> Ranking | Unfinished:
    """Number ``graph`` by maximum cardinality search.  O(n + m) time; 4m + 12n bytes stay."""
    n = graph.n
    ranking = Ranking(np.empty(n, np.int32), np.empty(n + 1, np.int64), np.empty(graph.m, np.int32))
    monitor.enter(Phase.ORDER, n)
    if not search.cardinality_search(graph.ptr, graph.adj, *ranking, monitor.cells):
        return Unfinished.STOPPED
    return ranking


def rank_by_degree(graph: Graph, most: int, monitor: Monitor) -> Ranking | Unfinished:
    """Number ``graph`` by approximate minimum degree, the first to go last.

    For large cores far from chordal, where maximum cardinality search may fill in too much.  TOO_LARGE if the
    cliques on the way hold more than ``most`` entries.
    """
    n = graph.n
    ranking = Ranking(np.empty(n, np.int32), np.empty(n + 1, np.int64), np.empty(graph.m, np.int32))
    monitor.enter(Phase.ORDER, n)
    code = degree.order_by_degree(graph.ptr, graph.adj, most, ranking.order, monitor.cells)
    if code != degree.DONE:
        return Unfinished.STOPPED if code == degree.STOPPED else Unfinished.TOO_LARGE
    degree.rows_by_place(graph.ptr, graph.adj, *ranking)
    return ranking


def rank_along(graph: Graph, order: I32) -> Ranking:
    """Number ``graph`` in a given order of places, int32[n].  O(n + m)."""
    ranking = Ranking(order, np.empty(graph.n + 1, np.int64), np.empty(graph.m, np.int32))
    degree.rows_by_place(graph.ptr, graph.adj, *ranking)
    return ranking


def eliminate(ranking: Ranking, most_fill: int, monitor: Monitor) -> Numbering | Unfinished:
    """Find the fill of the order, n-1 first; ``core`` of the result is not set yet.

    TOO_LARGE if the fill exceeds ``most_fill``.  O(n + m + fill) time; 16n + 4 fill bytes more stay.
    """
    n = ranking.order.size
    monitor.enter(Phase.FILL, n)
    parent = np.empty(n, np.int32)
    fill_end = np.empty(n + 1, np.int64)
    code, fill, used = elimination.eliminate(ranking.low_ptr, ranking.low, most_fill, parent, fill_end, monitor.cells)
    if code == elimination.STOPPED:
        return Unfinished.STOPPED
    if code == elimination.TOO_LARGE:
        return Unfinished.TOO_LARGE
    return Numbering(*ranking, parent, fill_end, fill[:used], np.empty(n, np.int32))
