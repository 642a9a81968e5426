"""The heaviest choice whose states are sets with labels: colour classes and forests."""

from dataclasses import dataclass

import numpy as np

from nearchord_solve.arrays import I32, I64, U8
from nearchord_solve.fill.kernels import core_lists
from nearchord_solve.graph import Graph
from nearchord_solve.kernels import bags
from nearchord_solve.kernels.layout import Forest, Numbering
from nearchord_solve.monitor import Monitor, Phase
from nearchord_solve.order import eliminate, rank_along
from nearchord_solve.structure import Structure
from nearchord_solve.sweep.kernels import label_passes, state_counts

CLOSED = (0, 2)  # colours (0: forests) for which bags without fill are settled by a formula
LIMIT = 2**62  # sums of weights with what pinned vertices weigh more stay below


@dataclass(frozen=True, eq=False)
class Line:
    """All bags of a graph, in one forest over ranks.

    ``order`` int32[n]: the vertex of each rank; ``later`` row r: L(r) ascending.
    """

    order: I32
    later_ptr: I64
    later: I32
    forest: Forest


def line_up(graph: Graph, structure: Structure, monitor: Monitor) -> Line | None:
    """Write all bags down, those outside fill cores included; None if stopped.  O(n log n + m + fill)."""
    n = graph.n
    order = np.ascontiguousarray(structure.elimination_order()[::-1])
    numbering = eliminate(rank_along(graph, order), graph.m + structure.fill + structure.numbering.fill.size, monitor)
    if not isinstance(numbering, Numbering):
        return None
    places = np.arange(n, dtype=np.int32)
    later_ptr, later, fill_ptr, fill_rank = core_lists.sparse_lists(
        places, 0, numbering.low_ptr, numbering.low, numbering.fill_end, numbering.fill, places
    )
    bag_ptr, bag_rank, adhesion, above, kind = bags.write_bags(0, later_ptr, later, fill_ptr, fill_rank)
    forest = Forest(
        np.zeros(1, np.int32), np.array([0, n], np.int64), np.zeros(1, np.int32), np.array([0, kind.size], np.int64),
        np.zeros((1, 6), np.int64), places, fill_ptr, fill_rank, bag_ptr, bag_rank, adhesion, above, kind,
    )  # fmt: skip
    return Line(order, later_ptr, later, forest)


@dataclass(frozen=True, eq=False)
class Pinned:
    """Weights by vertex, and which vertices must be chosen: uint8[n] ``must``.

    ``closed``: with two colours and for forests plain states are kept as worths.  Then every choice has a value, so
    each vertex that must be chosen weighs ``extra`` more: 1 more than all others together, so that whoever leaves one
    of them out is lighter than whoever takes all, and some choice does.  Where sums might overflow by that, and with
    more colours, choices without them are not entered in the tables.
    """

    weights: I64
    colours: int
    must: U8
    closed: bool
    extra: int

    @classmethod
    def of(cls, weights: I64, must: I64, colours: int) -> "Pinned":
        """For the vertices ``must``, which can be chosen together if ``colours`` is 0 (forests) or 2."""
        pinned = np.zeros(weights.size, np.uint8)
        pinned[must] = 1
        extra = int(weights[pinned == 0].sum()) + 1 if must.size else 0
        closed = colours in CLOSED and int(weights.sum()) + extra * must.size < LIMIT
        return cls(weights, colours, pinned, closed, extra if closed else 0)

    @property
    def by_vertex(self) -> I64:
        """Weights with what pinned vertices weigh more."""
        return self.weights + self.extra * self.must.astype(np.int64) if self.extra else self.weights

    @property
    def offset(self) -> int:
        """What that adds to the value."""
        return self.extra * int(self.must.sum())


def count_states(line: Line, pinned: Pinned, most: int, monitor: Monitor) -> int:
    """States of all bags that need a table, cheaply; about ``most`` or more if above it.

    0 where there is no cheap count; the sweep gives up in time.
    """
    if pinned.colours == 0 and pinned.closed:
        return int(state_counts.forest_states(line.forest, most, monitor.cells))
    if pinned.colours in CLOSED and not pinned.closed:
        return 0
    return int(state_counts.colour_states(line.forest, pinned.colours, most, monitor.cells))


@dataclass(frozen=True, eq=False)
class Labelled:
    """``code`` as in :mod:`.kernels.label_passes`; ``colour`` uint8[n] by vertex, None unless DONE."""

    code: int
    value: int
    states: int
    colour: U8 | None


def sweep_labelled(line: Line, pinned: Pinned, most: int, most_bytes: int, monitor: Monitor) -> Labelled:
    """Collect values inwards, then choose outwards.  Gives up above ``most`` states or ``most_bytes`` of table."""
    n = pinned.weights.size
    monitor.enter(Phase.SWEEP, n)
    colours, closed = pinned.colours, pinned.closed
    single = pinned.by_vertex[line.order]
    must = pinned.must[line.order]
    pair = np.zeros(line.later.size if closed else 0, np.int64)
    code, value, states, ptr, child, table = label_passes.inward(
        line.forest, line.later_ptr, line.later, single, pair, must, colours, closed, most, most_bytes, monitor.cells
    )
    value = int(value) - pinned.offset
    if code != label_passes.DONE:
        return Labelled(int(code), value, int(states), None)
    by_rank = np.zeros(n, np.uint8)
    if not label_passes.outward(
        line.forest, line.later_ptr, single, pair, must, colours, closed, ptr, child, table, by_rank, monitor.cells
    ):
        return Labelled(label_passes.STOPPED, value, int(states), None)
    colour = np.empty(n, np.uint8)
    colour[line.order] = by_rank
    return Labelled(label_passes.DONE, value, int(states), colour)
