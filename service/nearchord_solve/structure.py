"""The structure of a graph: numbering, cores, bags, and the figures that say what a question costs."""

from dataclasses import dataclass

import numpy as np

from nearchord_solve.arrays import I32, I64, U8
from nearchord_solve.budget import Budget
from nearchord_solve.fill import Cores
from nearchord_solve.fill.cores import DENSE_LIMIT
from nearchord_solve.kernels.bags import fill_parts
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
from nearchord_solve.memory import predicted_bytes, table_bytes
from nearchord_solve.order import Ranking


@dataclass(frozen=True, eq=False)
class Structure:
    """Everything about a graph that does not depend on weights.

    ``plain``: the way it was built depends on the budget only as :func:`nearchord_solve.kept.serves` says.
    ``proven``: a lower bound of the fill from an exact search, 0 without one.
    """

    numbering: Numbering
    cores: Cores
    forest: Forest
    plain: bool = False
    proven: int = 0

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
        return max(self._sum(FILL_LOWER), min(1, self.numbering.fill.size), self.proven)

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

    def core_vertices(self) -> tuple[I64, I32]:
        """The vertices of the parts that hold fill: part i is ``vertex[ptr[i]:ptr[i+1]]``, ascending."""
        forest = self.forest
        count, part = fill_parts(forest.bag_above, forest.bag_kind)
        of_slot = np.repeat(part, np.diff(forest.bag_ptr))
        inside = of_slot >= 0
        vertices = self.numbering.order[forest.slot_place[forest.bag_slot[inside]]]
        pairs = np.unique(np.stack((of_slot[inside], vertices), 1), axis=0)
        ptr = np.concatenate((np.zeros(1, np.int64), np.cumsum(np.bincount(pairs[:, 0], minlength=count))))
        return ptr, np.ascontiguousarray(pairs[:, 1])

    def elimination_order(self) -> I32:
        """A perfect elimination order of the graph with its fill, int32[n], first to go first.

        Parts hang below each other by their lowest place, and the vertices settled in a part go by their rank in it:
        what a vertex is joined to when it goes lies in its part, at lower ranks, or above the part.
        """
        numbering, forest = self.numbering, self.forest
        n = numbering.order.size
        top = np.arange(n, dtype=np.int32)
        inside = numbering.core >= 0
        top[inside] = forest.core_top[numbering.core[inside]]
        rank = np.zeros(n, np.int32)
        slots = np.arange(forest.slot_place.size) - np.repeat(forest.core_slot[:-1], np.diff(forest.core_slot))
        homes = slots >= np.repeat(forest.core_anchors, np.diff(forest.core_slot))
        rank[forest.slot_place[homes]] = slots[homes]
        return numbering.order[np.lexsort((rank, top))[::-1]]

    def fill_edges(self) -> I32:
        """The fill edges int32[fill, 2], pairs u < v, ascending."""
        forest, order = self.forest, self.numbering.order
        upper = np.repeat(np.arange(forest.slot_place.size), np.diff(forest.slot_fill_ptr))
        ends = np.stack((order[forest.slot_place[upper]], order[forest.slot_place[forest.slot_fill]]), 1)
        ends.sort(axis=1)
        return np.asarray(ends[np.lexsort((ends[:, 1], ends[:, 0]))], np.int32)

    def core_fill(self, core: int) -> I32:
        """The fill edges of one core int32[k, 2], pairs u < v."""
        forest, order = self.forest, self.numbering.order
        begin, end = forest.core_slot[core], forest.core_slot[core + 1]
        counts = np.diff(forest.slot_fill_ptr[begin : end + 1])
        upper = np.repeat(forest.slot_place[begin:end], counts)
        lower = forest.slot_place[forest.slot_fill[forest.slot_fill_ptr[begin] : forest.slot_fill_ptr[end]]]
        return np.sort(np.stack((order[upper], order[lower]), 1), axis=1)

    def _sum(self, figure: int) -> int:
        return int(self.forest.figures[:, figure].sum())

    def fitting(self, budget: Budget) -> U8:
        """Which cores fit the budget together, the cheapest first, ties to the lower core: uint8[C]."""
        states: I64 = self.forest.figures[:, STATES]
        memory = table_bytes(self.forest.figures[:, TABLE])
        fits = np.zeros(states.size, np.uint8)
        by_states = np.argsort(states, kind="stable")
        within = (np.cumsum(states[by_states]) <= budget.states) & (
            np.cumsum(memory[by_states]) <= budget.memory - self.held_bytes
        )
        fits[by_states[: int(np.argmin(within)) if not within.all() else within.size]] = 1
        return fits

    def coarse(self, budget: Budget) -> bool:
        """Whether a core does not fit that was too large to be triangulated anew."""
        large = np.diff(self.forest.core_slot) > DENSE_LIMIT
        return bool(large.any()) and bool((self.fitting(budget)[large] == 0).any())

    @property
    def held_bytes(self) -> int:
        """Memory of a solve without its tables: the graph, the structure, the arrays of the passes."""
        size = predicted_bytes(self.numbering.order.size, self.numbering.low.size)
        return size + 4 * self.numbering.fill.size + sum(array.nbytes for array in self.forest)
