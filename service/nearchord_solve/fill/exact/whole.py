"""Minimum fill of a whole graph: its parts, searched together."""

from dataclasses import dataclass

import numpy as np

from nearchord_solve.arrays import I32
from nearchord_solve.fill.cores import find_cores
from nearchord_solve.fill.exact.parts import parts_of
from nearchord_solve.fill.exact.result import FillResult, ProofKind
from nearchord_solve.fill.exact.search import fill_of_parts
from nearchord_solve.graph import Graph
from nearchord_solve.kernels.layout import Numbering
from nearchord_solve.monitor import Monitor
from nearchord_solve.order import Unfinished, eliminate, rank

FILL_ROOM = 10**7  # the triangulation of the search may have 3m + this many edges


@dataclass(frozen=True, eq=False)
class GraphFill:
    """``edges`` int32[k, 2]: a minimal fill in vertices of the graph, smaller end first, sorted.

    The fill number lies between ``lower_bound`` and k = ``upper_bound``.  Part i has vertices ``vertices[i]`` int32,
    ascending, and ``results[i]`` in numbers 0.. of these.  ``over``: the fill number is certainly above the limit.
    """

    edges: I32
    lower_bound: int
    over: bool
    vertices: tuple[I32, ...]
    results: tuple[FillResult, ...]

    @property
    def upper_bound(self) -> int:
        """Size of the fill found."""
        return int(self.edges.shape[0])

    @property
    def kinds(self) -> tuple[ProofKind, ...]:
        """How the bound of each part is known, NONE where its bounds are apart."""
        return tuple(result.proof for result in self.results)


def fill_of_graph(graph: Graph, limit: int | None, monitor: Monitor) -> GraphFill | Unfinished:
    """Fewest edges whose addition makes a graph chordal, as far as the limit and the monitor allow.

    Numbers the graph by maximum cardinality search and searches the parts that hold fill.  Unfinished if it was
    stopped before, or if the triangulation of that search is too large.
    """
    ranking = rank(graph, monitor)
    if isinstance(ranking, Unfinished):
        return ranking
    numbering = eliminate(ranking, 2 * graph.m + FILL_ROOM, monitor)
    if isinstance(numbering, Unfinished):
        return numbering
    return fill_of_numbered(graph, numbering, limit, monitor)


def fill_of_numbered(graph: Graph, numbering: Numbering, limit: int | None, monitor: Monitor) -> GraphFill | Unfinished:
    """The same for a graph that has been numbered already."""
    cores = find_cores(numbering, monitor)
    if isinstance(cores, Unfinished):
        return cores
    parts = list(parts_of(graph, numbering, cores))
    results = fill_of_parts([(part.ptr, part.adj) for part in parts], limit, monitor)
    found = [part.vertices[result.edges] for part, result in zip(parts, results, strict=True)]
    edges = np.concatenate([np.empty((0, 2), np.int32), *found])
    return GraphFill(
        edges[np.lexsort((edges[:, 1], edges[:, 0]))],
        sum(result.lower_bound for result in results),
        any(result.over for result in results),
        tuple(part.vertices for part in parts),
        tuple(results),
    )
