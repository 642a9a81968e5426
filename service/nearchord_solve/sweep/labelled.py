"""The heaviest choice whose states are sets with labels: colour classes and forests."""

from dataclasses import dataclass

import numpy as np

from nearchord_solve.arrays import I32, I64, U8
from nearchord_solve.fill.kernels import core_lists
from nearchord_solve.graph import Graph
from nearchord_solve.kernels import bags
from nearchord_solve.kernels.layout import ADHESION_FILL, Forest, Numbering
from nearchord_solve.monitor import Monitor, Phase
from nearchord_solve.order import eliminate, rank_along
from nearchord_solve.structure import Structure
from nearchord_solve.sweep.kernels import label_passes, label_table, state_counts
from nearchord_solve.sweep.kernels.label_goals import BELIEVE, CHOOSE, COLLECT, NOTHING, Belief
from nearchord_solve.sweep.kernels.label_passes import Plan
from nearchord_solve.sweep.kernels.label_table import Sets, Table, empty_table

CLOSED = (0, 2)  # colours (0: forests) for which bags without fill are settled by a formula
NO_LIMIT = 2**62
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
    each vertex that must be chosen weighs ``extra`` more, 1 more than all vertices together: choices that leave one of
    them out stay below the sum of these extras, and some choice does not.  Where sums might overflow by that, and with
    more colours, choices that leave one out are not entered in the tables.
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
        extra = int(weights.sum()) + 1 if must.size else 0
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

    0 where there is no count that is much cheaper than the sweep, which gives up in time: for forests, and where plain
    states of two colours are in the table.
    """
    if pinned.colours == 0 or (pinned.colours in CLOSED and not pinned.closed):
        return 0
    return int(state_counts.colour_states(line.forest, pinned.colours, most, monitor.cells))


@dataclass(frozen=True, eq=False)
class Labelled:
    """``code`` as in :mod:`.kernels.label_passes`; ``colour`` uint8[n] by vertex, None unless DONE.

    ``prices``: int64[n] twice by vertex, what the value loses if a vertex is chosen, and if it is not; -1 if that is
    impossible.  None unless asked for and found.
    """

    code: int
    value: int
    states: int
    colour: U8 | None
    prices: tuple[I64, I64] | None = None


def sweep_labelled(
    line: Line, pinned: Pinned, most: int, most_bytes: int, prices: bool, monitor: Monitor
) -> Labelled:  # fmt: skip
    """Collect values inwards, then choose outwards.  Gives up above ``most`` states or ``most_bytes`` of table."""
    n = pinned.weights.size
    monitor.enter(Phase.SWEEP, n)
    sets, room = _sets(line, pinned)
    if 8 * room > most_bytes:
        return Labelled(label_passes.MEMORY, 0, 0, None)
    plan = _plan(line, pinned, sets)
    closed = pinned.closed
    belief = _belief(line, empty_table(0), np.zeros(1, np.int64), plan.colour)
    code, value, states, table = label_passes.pass_bags(
        COLLECT, plan, pinned.colours, closed, empty_table(room), belief, most, most_bytes, monitor.cells
    )
    if code != label_passes.DONE:
        return Labelled(int(code), int(value) - pinned.offset, int(states), None)
    code, _, _, _ = label_passes.pass_bags(
        CHOOSE, plan, pinned.colours, closed, table, belief, NO_LIMIT, NO_LIMIT, monitor.cells
    )
    if code != label_passes.DONE:
        return Labelled(int(code), int(value) - pinned.offset, int(states), None)
    colour = np.empty(n, np.uint8)
    colour[line.order] = plan.colour
    found = _believe(line, pinned, plan, table, int(value), most_bytes, monitor) if prices else None
    return Labelled(label_passes.DONE, int(value) - pinned.offset, int(states), colour, found)


def _sets(line: Line, pinned: Pinned) -> tuple[Sets, int]:
    """Where values of sets stand (see :mod:`.kernels.label_sets`), and how many they are: none where closed."""
    forest = line.forest
    first = np.full(forest.bag_kind.size, -1, np.int64)
    if pinned.closed or pinned.colours == 0:
        return Sets(first, np.ones((1, 1), np.int64)), 0
    rows = int(np.diff(forest.bag_ptr).max(initial=0)) + 1
    choose = np.zeros((rows, pinned.colours + 1), np.int64)
    choose[:, 0] = 1
    for k in range(1, pinned.colours + 1):
        np.cumsum(choose[:-1, k - 1], out=choose[1:, k])
    plain = forest.bag_kind & ADHESION_FILL == 0
    begin = np.zeros(plain.size + 1, np.int64)
    np.cumsum(np.where(plain, choose.sum(axis=1)[forest.bag_adhesion], 0), out=begin[1:])
    first[plain] = begin[:-1][plain]
    return Sets(first, choose), int(begin[-1])


def _plan(line: Line, pinned: Pinned, sets: Sets) -> Plan:
    forest = line.forest
    bags = forest.bag_kind.size
    return Plan(
        forest, line.later_ptr, line.later, pinned.by_vertex[line.order],
        np.zeros(line.later.size if pinned.closed else 0, np.int64), pinned.must[line.order],
        *label_passes.link_tables(forest, pinned.closed), sets, np.zeros((bags, 2), np.int64),
        np.zeros(line.order.size, np.uint8), np.full(bags, -1, np.int32),
    )  # fmt: skip


def _belief(line: Line, table: Table, few_ptr: I64, kept: U8) -> Belief:
    """Nothing told yet about the entries of a table."""
    n = line.order.size if few_ptr.size > 1 else 0
    return Belief(
        np.full(int(table.used[0]), NOTHING), np.full(table.sets.size, NOTHING), few_ptr,
        np.full(int(few_ptr[-1]), NOTHING), np.full(n, NOTHING), np.full(n, NOTHING), kept,
    )  # fmt: skip


def _believe(
    line: Line, pinned: Pinned, plan: Plan, table: Table, total: int, most_bytes: int, monitor: Monitor
) -> tuple[I64, I64] | None:
    """Prices of all vertices, by one more pass outwards; None if stopped or without room.

    ``total``: the value with what pinned vertices weigh more.  A total below that extra leaves out one of them.
    """
    lead = line.forest.bag_adhesion.astype(np.int64)
    sizes = 1 + lead * (lead + 1) // 2 if pinned.closed else np.zeros(lead.size, np.int64)
    few_ptr = np.concatenate((np.zeros(1, np.int64), np.cumsum(sizes)))
    if label_table.table_bytes(table) + 8 * (int(few_ptr[-1]) + table.value.size + table.sets.size) > most_bytes:
        return None
    belief = _belief(line, table, few_ptr, plan.colour)
    roots = line.forest.bag_above < 0
    if pinned.closed:
        belief.few[few_ptr[:-1][roots]] = total
    elif pinned.colours > 0:
        belief.sets[plan.sets.first[roots]] = total
    else:
        belief.entry[plan.entries[roots, 0]] = total
    ptr, child = label_passes.link_tables(line.forest, False)
    code, _, _, _ = label_passes.pass_bags(
        BELIEVE, plan._replace(child_ptr=ptr, child=child), pinned.colours, pinned.closed, table, belief, NO_LIMIT,
        NO_LIMIT, monitor.cells,
    )  # fmt: skip
    if code != label_passes.DONE:
        return None
    left = np.where(plan.colour != 0, belief.left, total)
    priced = []
    for totals in (belief.chosen, left):
        price = np.empty(totals.size, np.int64)
        price[line.order] = np.where(totals >= pinned.offset, total - totals, -1)
        priced.append(price)
    return priced[0], priced[1]
