"""The structure of a graph: numbering, cores, bags, and the figures that say what a question costs."""

from dataclasses import dataclass

import numpy as np

from nearchord_solve.arrays import I32, I64, U8
from nearchord_solve.budget import Budget
from nearchord_solve.fill import Cores, find_cores, triangulate
from nearchord_solve.fill.cores import DENSE_LIMIT
from nearchord_solve.graph import Graph
from nearchord_solve.kernels.layout import (
    FILL_EDGES,
    FILL_LOWER,
    PARTS_FILL,
    PARTS_PLAIN,
    STATES,
    TABLE,
    Forest,
    Numbering,
)
from nearchord_solve.memory import predicted_bytes, quotient_bytes, table_bytes
from nearchord_solve.monitor import Monitor, Phase
from nearchord_solve.order import Ranking, Unfinished, eliminate, rank, rank_by_degree

FILL_ROOM = 10**7  # H = G + fill may have 3m + this many edges


@dataclass(frozen=True, eq=False)
class Structure:
    """Everything about a graph that does not depend on weights."""

    numbering: Numbering
    cores: Cores
    forest: Forest

    @property
    def ranking(self) -> Ranking:
        """The numbering without its fill."""
        return Ranking(self.numbering.order, self.numbering.low_ptr, self.numbering.low)

    @property
    def fill(self) -> int:
        """Fill edges of the triangulation."""
        return self._sum(FILL_EDGES)

    @property
    def fill_lower_bound(self) -> int:
        """No triangulation of the graph has fewer fill edges.

        If the elimination order of the whole graph has fill, the graph is not chordal: maximum cardinality
        search finds a perfect order of every chordal graph, and another order is only tried where it did
        not.  So one fill edge is needed at least.
        """
        return max(self._sum(FILL_LOWER), min(1, self.numbering.fill.size))

    @property
    def states(self) -> int:
        """States in bags that hold fill (each core counted up to the budget)."""
        return self._sum(STATES)

    @property
    def bags(self) -> int:
        """Bags of the tree."""
        return self.cores.cliques + self.forest.bag_kind.size

    @property
    def largest_bag(self) -> int:
        """Vertices of the largest bag."""
        return max(self.cores.largest, int(np.diff(self.forest.bag_ptr).max(initial=0)))

    @property
    def fill_cores(self) -> int:
        """Parts that hold fill."""
        return self._sum(PARTS_FILL)

    @property
    def parts(self) -> int:
        """Parts: fill cores and bags without fill."""
        return self.cores.cliques + self.fill_cores + self._sum(PARTS_PLAIN)

    def fill_edges(self) -> I32:
        """The fill edges int32[fill, 2], pairs u < v, ascending."""
        forest, order = self.forest, self.numbering.order
        upper = np.repeat(np.arange(forest.slot_place.size), np.diff(forest.slot_fill_ptr))
        ends = np.stack((order[forest.slot_place[upper]], order[forest.slot_place[forest.slot_fill]]), 1)
        ends.sort(axis=1)
        return np.asarray(ends[np.lexsort((ends[:, 1], ends[:, 0]))], np.int32)

    def _sum(self, figure: int) -> int:
        return int(self.forest.figures[:, figure].sum())

    def fitting(self, budget: Budget) -> U8:
        """Which cores fit the budget together, the cheapest first, ties to the lower core: uint8[C]."""
        states: I64 = self.forest.figures[:, STATES]
        memory = table_bytes(self.forest.figures[:, TABLE])
        fits = np.zeros(states.size, np.uint8)
        by_states = np.argsort(states, kind="stable")
        within = (np.cumsum(states[by_states]) <= budget.states) & (
            np.cumsum(memory[by_states]) <= budget.memory - self._held()
        )
        fits[by_states[: int(np.argmin(within)) if not within.all() else within.size]] = 1
        return fits

    def coarse(self, budget: Budget) -> bool:
        """Whether a core does not fit that was too large to be triangulated anew."""
        large = np.diff(self.forest.core_slot) > DENSE_LIMIT
        return bool(large.any()) and bool((self.fitting(budget)[large] == 0).any())

    def _held(self) -> int:
        size = predicted_bytes(self.numbering.order.size, self.numbering.low.size)
        return size + 4 * self.numbering.fill.size + sum(array.nbytes for array in self.forest)


@dataclass(frozen=True, eq=False)
class Partial:
    """What there is of a structure that could not be finished, and why."""

    why: Unfinished
    ranking: Ranking | None


def build_structure(graph: Graph, budget: Budget, monitor: Monitor) -> Structure | Partial:
    """Number the graph, find its cores and triangulate them; records fill, bags and states in the monitor.

    If the fill exceeds the fill budget, the cores are triangulated again for least fill, and that is taken
    if it meets the budget.
    """
    ranking = rank(graph, monitor)
    if isinstance(ranking, Unfinished):
        return Partial(ranking, None)
    built = _build(graph, ranking, budget, monitor)
    return Partial(built, ranking) if isinstance(built, Unfinished) else built


def _build(graph: Graph, ranking: Ranking, budget: Budget, monitor: Monitor) -> Structure | Unfinished:
    """Structure of the better of two numberings; the second is tried only if the first is costly and coarse."""
    spare = budget.memory - predicted_bytes(graph.n, graph.m)
    most = min(2 * graph.m + FILL_ROOM, max(0, spare) // 12)
    first = _structured(ranking, most, budget, monitor)
    if first is Unfinished.STOPPED or (isinstance(first, Structure) and not first.coarse(budget)):
        return first
    if spare < quotient_bytes(graph.n, graph.m):
        return first
    other = rank_by_degree(graph, graph.m + most, monitor)
    if isinstance(other, Ranking):
        second = _structured(other, most, budget, monitor)
        if isinstance(second, Structure) and (
            isinstance(first, Unfinished) or (second.states, second.fill) < (first.states, first.fill)
        ):
            return second
    return Unfinished.STOPPED if monitor.stop else first


def _structured(ranking: Ranking, most_fill: int, budget: Budget, monitor: Monitor) -> Structure | Unfinished:
    numbering = eliminate(ranking, most_fill, monitor)
    if isinstance(numbering, Unfinished):
        return numbering
    monitor.enter(Phase.TREE, ranking.order.size)
    cores = find_cores(numbering, monitor)
    if isinstance(cores, Unfinished):
        return cores
    structure = _triangulated(numbering, cores, budget, False, monitor)
    if isinstance(structure, Structure) and budget.fill is not None and structure.fill > budget.fill:
        other = _triangulated(numbering, cores, budget, True, monitor)
        if isinstance(other, Unfinished) or other.fill <= budget.fill:
            return other
    return structure


def _triangulated(
    numbering: Numbering, cores: Cores, budget: Budget, least_fill: bool, monitor: Monitor
) -> Structure | Unfinished:
    monitor.enter(Phase.TREE, cores.ptr.size - 1)
    forest = triangulate(numbering, cores, budget.states, least_fill, monitor)
    if isinstance(forest, Unfinished):
        return forest
    structure = Structure(numbering, cores, forest)
    cells = monitor.cells
    cells[Monitor.FILL] = structure.fill
    cells[Monitor.FILL_LOWER] = structure.fill_lower_bound
    cells[Monitor.BAGS] = structure.bags
    cells[Monitor.STATES] = structure.states
    return structure
