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


def count_states(line: Line, colours: int, most: int, monitor: Monitor) -> int:
    """States of all bags that need a table, cheaply; about ``most`` or more if above it.  0 for forests: see below.

    Forests have no count that is much cheaper than the sweep, which gives up in time.
    """
    if colours == 0:
        return 0
    return int(state_counts.colour_states(line.forest, colours, most, monitor.cells))


@dataclass(frozen=True, eq=False)
class Labelled:
    """``code`` as in :mod:`.kernels.label_passes`; ``colour`` uint8[n] by vertex, None unless DONE."""

    code: int
    value: int
    states: int
    colour: U8 | None


def sweep_labelled(line: Line, weights: I64, colours: int, most: int, most_bytes: int, monitor: Monitor) -> Labelled:
    """Collect values inwards, then choose outwards; ``colours`` 0 means forests.

    Gives up above ``most`` states or ``most_bytes`` of table.
    """
    monitor.enter(Phase.SWEEP, weights.size)
    closed = colours in CLOSED
    single = weights[line.order]
    pair = np.zeros(line.later.size if closed else 0, np.int64)
    code, value, states, ptr, table = label_passes.inward(
        line.forest, line.later_ptr, line.later, single, pair, colours, closed, most, most_bytes, monitor.cells
    )
    if code != label_passes.DONE:
        return Labelled(int(code), int(value), int(states), None)
    by_rank = np.zeros(weights.size, np.uint8)
    if not label_passes.outward(
        line.forest, line.later_ptr, single, pair, colours, closed, ptr, table, by_rank, monitor.cells
    ):
        return Labelled(label_passes.STOPPED, int(value), int(states), None)
    colour = np.empty(weights.size, np.uint8)
    colour[line.order] = by_rank
    return Labelled(label_passes.DONE, int(value), int(states), colour)
