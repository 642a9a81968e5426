"""Prices of vertices and of conflicts after a sweep for the heaviest independent set."""

from dataclasses import dataclass
from enum import Enum

import numpy as np

from nearchord_solve.arrays import I32, I64, U8
from nearchord_solve.kernels.layout import BAG_FILL
from nearchord_solve.monitor import Monitor, Phase
from nearchord_solve.sweep.independent import Swept
from nearchord_solve.sweep.kernels import conflicts, gaps
from nearchord_solve.sweep.kernels import prices as kernels

PAIR_NODE = 44  # bytes of a kept node of a message about an edge, and of the record of the edge
FIRST_ROOM = 2**16  # nodes to begin with; most graphs need fewer


class Unpriced(Enum):
    """Why there are no prices."""

    STOPPED = "seconds ran out"
    MEMORY = "memory budget: the tables do not fit"

    def __str__(self) -> str:
        return self.value


@dataclass(frozen=True, eq=False)
class Priced:
    """Prices by vertex, int64[n] each: the optimum less that of the sets with the vertex, and of those without it.

    ``by_place``: all that the pass found, for :func:`price_conflicts`.
    """

    inside: I64
    outside: I64
    by_place: kernels.Prices


def price_vertices(swept: Swept, room: int, monitor: Monitor) -> Priced | Unpriced:
    """Prices of all vertices after a sweep that settled all cores by tables, within ``room`` bytes beside its own.

    Mostly O(n + m) outside cores; inside, a few times the states.
    """
    structure = swept.structure
    forest, order = structure.forest, structure.numbering.order
    assert swept.chosen is not None
    n = order.size
    monitor.enter(Phase.SWEEP, n)
    used = kept_nodes(swept)
    if 60 * n + 8 * forest.bag_kind.size + 28 * used + 4 * structure.numbering.low.size > room:
        return Unpriced.MEMORY
    prices = kernels.Prices(
        np.empty(n, np.int64),
        np.zeros(n, np.int64),
        np.empty(n, np.int64),
        np.empty(n + forest.bag_kind.size, np.int64),
        np.full(used, gaps.MOST_GAP),
    )
    by_place: U8 = swept.chosen[order]
    if not kernels.outward_prices(
        structure.numbering, forest, swept.tries, used, swept.residual, by_place, prices, monitor.cells
    ):
        return Unpriced.STOPPED
    inside, outside = np.empty(n, np.int64), np.empty(n, np.int64)
    inside[order] = prices.chosen
    outside[order] = prices.left_out
    return Priced(inside, outside, prices)


def kept_nodes(swept: Swept) -> int:
    """Nodes of the messages that the inward pass kept."""
    return int(swept.tries.end.max(initial=0))


@dataclass(frozen=True, eq=False)
class ConflictPrices:
    """The ends of each edge, int32[m] each, and what the optimum gains without it, int64[m], in no certain order."""

    one: I32
    other: I32
    gain: I64


def price_conflicts(swept: Swept, priced: Priced, room: int, monitor: Monitor) -> ConflictPrices | Unpriced:
    """Prices of all edges, after :func:`price_vertices`, within ``room`` bytes beside those of the sweep.

    O(n + m * largest clique) outside cores; inside, the states with both ends, for each edge and each bag with both.
    """
    numbering, forest = swept.structure.numbering, swept.structure.forest
    n, m = numbering.order.size, numbering.low.size
    monitor.enter(Phase.SWEEP, n)
    sizes = np.diff(forest.bag_ptr)[(forest.bag_kind & BAG_FILL) != 0]
    room -= 60 * n + 64 * m + 8 * int(sizes.max(initial=0)) ** 2 + 28 * kept_nodes(swept)
    if room < 0:
        return Unpriced.MEMORY
    gain = np.empty(m, np.int64)
    nodes = min(FIRST_ROOM, room // PAIR_NODE)
    while True:
        gain[:] = 0
        code = conflicts.inward_conflicts(
            numbering, forest, swept.tries, kept_nodes(swept), swept.residual, priced.by_place, gain, nodes,
            monitor.cells,
        )  # fmt: skip
        if code != conflicts.MEMORY or nodes == room // PAIR_NODE:
            break
        nodes = min(16 * nodes, room // PAIR_NODE)
    if code != conflicts.DONE:
        return Unpriced.STOPPED if code == conflicts.STOPPED else Unpriced.MEMORY
    upper = np.repeat(numbering.order, np.diff(numbering.low_ptr))
    return ConflictPrices(upper, numbering.order[numbering.low], gain)
