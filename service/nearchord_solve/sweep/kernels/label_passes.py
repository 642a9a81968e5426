"""The inward and outward passes over all bags for colour classes and forests.

Vertices are numbered by rank in a perfect elimination order of G + fill, highest first to go; ``later`` row r is L(r),
ascending.  With two colours, and for forests, bags without fill are settled by a formula (:mod:`.label_closed`), and
bags with fill keep a table only for what worths of vertices and pairs do not say (:mod:`.label_bags`).  Otherwise the
table holds the best value for each state of each adhesion; there states that leave out a vertex that must be chosen
are not entered, so whatever has no entry is impossible.
"""

import numpy as np

from nearchord_solve.kernels.cells import BAGS_DONE, STEP, STOP
from nearchord_solve.kernels.compiled import I32, I64, U8, U64, kernel
from nearchord_solve.kernels.layout import ADHESION_FILL, BAG_FILL, Forest
from nearchord_solve.kernels.words import full
from nearchord_solve.sweep.kernels.label_bags import (
    Bag,
    collect_few,
    most_chosen,
    open_bag,
    relate_entries,
    send_few,
)
from nearchord_solve.sweep.kernels.label_closed import choose_closed, settle_closed
from nearchord_solve.sweep.kernels.label_goals import (
    CHOOSE,
    COLLECT,
    NOTHING,
    Best,
    Goal,
    name_labels,
    no_belief,
    no_best,
)
from nearchord_solve.sweep.kernels.label_states import visit_states
from nearchord_solve.sweep.kernels.label_table import Table, empty_table, find, table_bytes

ONE = np.uint64(1)
UNLIMITED = 2**62
DONE, STOPPED, STATES, MEMORY, IMPOSSIBLE = 0, 1, 2, 3, 4


@kernel
def link_tables(forest: Forest, closed: bool) -> tuple[I64, I32]:
    """Bags below each bag that send entries: (ptr int64[B+1], bag int32[..]), ascending."""
    bags = forest.bag_kind.shape[0]
    ptr = np.zeros(bags + 1, np.int64)
    for b in range(bags):
        if forest.bag_above[b] >= 0 and (not closed or forest.bag_kind[b] & ADHESION_FILL):
            ptr[forest.bag_above[b] + 1] += 1
    for b in range(bags):
        ptr[b + 1] += ptr[b]
    child = np.empty(ptr[bags], np.int32)
    write = ptr.copy()
    for b in range(bags):
        if forest.bag_above[b] >= 0 and (not closed or forest.bag_kind[b] & ADHESION_FILL):
            child[write[forest.bag_above[b]]] = b
            write[forest.bag_above[b]] += 1
    return ptr, child


@kernel
def settle_bag(
    bag: Bag, forest: Forest, later_ptr: I64, later: I32, single: I64, pair: I64, colours: int, most: int,
    table: Table, where: I32, cells: I64,
) -> tuple[Table, int, int]:  # fmt: skip
    """Enter what a bag sends; returns (table, what it adds to the base, states)."""
    b = bag.member.shape[0]
    few = collect_few(bag) if bag.closed else np.empty((0, 0), np.int64)
    begin = table.used[0]
    goal = Goal(COLLECT, few, no_best(), no_belief())
    table, states = visit_states(bag, table, colours, full(b, (b + 63) >> 6), most, goal, cells)
    if not bag.closed:
        return table, 0, states
    relate_entries(bag, table, begin, few, where)
    return table, send_few(bag, few, later_ptr, later, single, pair), states + 1 + b + b * (b - 1) // 2


@kernel
def inward(
    forest: Forest, later_ptr: I64, later: I32, weight: I64, pair: I64, must: U8, colours: int, closed: bool,
    most: int, most_bytes: int, cells: I64,
) -> tuple[int, int, int, I64, I32, Table]:  # fmt: skip
    """Collect values from the last bag to the first; ``colours`` 0 means forests.

    ``weight`` int64[n] by rank and ``pair`` int64[size of later], zeros, are overwritten with the worths when each
    vertex is eliminated.  ``closed``: plain states are kept as worths; ``must`` uint8[n] is not looked at then.
    Returns (DONE, STOPPED, STATES if more than ``most`` were met, MEMORY if the table outgrew ``most_bytes`` or
    IMPOSSIBLE, value, states, bags below each bag that send entries: ptr and list, table).
    """
    n = weight.shape[0]
    bags = forest.bag_kind.shape[0]
    ptr, child = link_tables(forest, closed)
    where = np.full(n, -1, np.int32)
    table = empty_table()
    base = int(np.int64(0))
    states = int(np.int64(0))
    for b in range(bags - 1, -1, -1):
        if (b & 1023) == 0:
            cells[STEP] = (bags - b) * n // bags
            cells[BAGS_DONE] = bags - b
            if cells[STOP] != 0:
                return STOPPED, base, states, ptr, child, table
        if closed and not forest.bag_kind[b] & BAG_FILL:
            base += settle_closed(b, forest, later_ptr, later, weight, pair)
            continue
        bag = open_bag(b, forest, later_ptr, weight, pair, must, closed, child[ptr[b] : ptr[b + 1]], table, where)
        table, sent, more = settle_bag(
            bag, forest, later_ptr, later, weight, pair, colours, most - states, table, where, cells
        )
        base += sent
        states += more
        if cells[STOP] != 0:
            return STOPPED, base, states, ptr, child, table
        if states > most:
            return STATES, base, states, ptr, child, table
        if table_bytes(table) > most_bytes:
            return MEMORY, base, states, ptr, child, table
        if not closed and forest.bag_above[b] < 0:
            root = find(table, b, bag.member, 0)
            if root < 0:
                return IMPOSSIBLE, base, states, ptr, child, table
            base += table.value[root]
    return DONE, base, states, ptr, child, table


@kernel
def _free_colour(taken: int) -> int:
    colour = 1
    while (taken >> colour) & 1:
        colour += 1
    return colour


@kernel
def new_best(bag: Bag, wanted: I32, colours: int) -> Best:
    """Nothing found yet for an adhesion part with the labels ``wanted``."""
    room = most_chosen(bag, colours) + 1
    value = np.full(1, NOTHING, np.int64)
    picks = np.full(bag.child.shape[0], -1, np.int32)
    return Best(wanted, value, np.zeros(1, np.int64), np.empty(room, np.int32), np.empty(room, np.int32), picks)


@kernel
def _fixed_part(bag: Bag, colour: U8) -> tuple[I32, I32, U64]:
    """What is chosen in the adhesion: places, colours as named by first use, and all vertices that may be chosen."""
    fixed = np.empty(bag.lead, np.int32)
    label = np.empty(bag.lead, np.int32)
    candidates = full(bag.member.shape[0], bag.near.shape[1])
    count = 0
    for j in range(bag.lead):
        if colour[bag.member[j]]:
            fixed[count] = j
            label[count] = colour[bag.member[j]]
            count += 1
        else:
            candidates[j >> 6] &= ~(ONE << np.uint64(j & 63))
    name = np.empty(count, np.int32)
    name_labels(label, count, name, np.empty(count, np.int32))
    return fixed[:count], name, candidates


@kernel
def choose_few(bag: Bag, fixed: I32, best: Best) -> None:
    """The best state of at most two vertices with the plain adhesion part ``fixed``, into ``best``."""
    count = fixed.shape[0]
    best.value[0] = 0
    best.size[0] = count
    for i in range(count):
        best.state[i] = fixed[i]
        best.label[i] = i
    for j in range(bag.lead, bag.member.shape[0]):
        if count > 1:
            break
        worth = bag.gain[j]
        if count == 1:
            worth += bag.pair[j, fixed[0]]
        if worth > best.value[0]:
            best.value[0] = worth
            best.size[0] = count + 1
            best.state[count] = j
            best.label[count] = count
        for i in range(bag.lead, j):
            if count == 0 and bag.gain[i] + worth + bag.pair[j, i] > best.value[0]:
                best.value[0] = bag.gain[i] + worth + bag.pair[j, i]
                best.size[0] = 2
                best.state[0], best.state[1] = i, j
                best.label[0], best.label[1] = 0, 1


@kernel
def apply_best(bag: Bag, best: Best, named: bool, colour: U8, pick: I32) -> None:
    """Choose the homes of a state; with colours, classes keep those that they have in the adhesion."""
    given = np.zeros(bag.member.shape[0] + 1, np.int64)
    taken = 0
    for i in range(best.size[0]):
        v = bag.member[best.state[i]]
        if colour[v] and named:
            given[best.label[i]] = colour[v]
            taken |= 1 << colour[v]
    for i in range(best.size[0]):
        v = bag.member[best.state[i]]
        if not named:
            colour[v] = 1
        elif colour[v] == 0:
            if given[best.label[i]] == 0:
                given[best.label[i]] = _free_colour(taken)
                taken |= 1 << given[best.label[i]]
            colour[v] = given[best.label[i]]
    for c in range(bag.child.shape[0]):
        pick[bag.child[c]] = best.picks[c]


@kernel
def choose_bag(bag: Bag, table: Table, colours: int, colour: U8, pick: I32, cells: I64) -> None:
    """Choose in a bag the best homes next to what is chosen in its adhesion."""
    fixed, name, candidates = _fixed_part(bag, colour)
    entry = pick[bag.number]
    if colours == 0:
        for i in range(fixed.shape[0]):
            name[i] = table.pool[table.begin[entry] + fixed.shape[0] + i] if entry >= 0 else i
    best = new_best(bag, name, colours)
    if bag.closed and (fixed.shape[0] < 2 or (fixed.shape[0] == 2 and name[1] == 1)):
        choose_few(bag, fixed, best)
    goal = Goal(CHOOSE, np.empty((0, 0), np.int64), best, no_belief())
    visit_states(bag, table, colours, candidates, int(np.int64(UNLIMITED)), goal, cells)
    apply_best(bag, best, colours > 0, colour, pick)


@kernel
def outward(
    forest: Forest, later_ptr: I64, single: I64, pair: I64, must: U8, colours: int, closed: bool,
    ptr: I64, child: I32, table: Table, colour: U8, cells: I64,
) -> bool:  # fmt: skip
    """Choose from the first bag to the last after :func:`inward`; False if stopped.

    ``colour`` uint8[n], by rank, zeros, receives the colour of each chosen vertex (for forests anything but 0).
    """
    bags = forest.bag_kind.shape[0]
    pick = np.full(bags, -1, np.int32)
    where = np.full(forest.slot_place.shape[0], -1, np.int32)
    for b in range(bags):
        if (b & 1023) == 0 and cells[STOP] != 0:
            return False
        if closed and not forest.bag_kind[b] & BAG_FILL:
            choose_closed(b, forest, later_ptr, single, pair, colour)
            continue
        bag = open_bag(b, forest, later_ptr, single, pair, must, closed, child[ptr[b] : ptr[b + 1]], table, where)
        choose_bag(bag, table, colours, colour, pick, cells)
    return bool(cells[STOP] == 0)
