"""The inward and outward passes over all bags for colour classes and forests.

Vertices are numbered by rank in a perfect elimination order of G + fill, highest first to go; ``later`` row r is L(r),
ascending.  With two colours, and for forests, at most two vertices of a clique of G are chosen, so whatever hangs from
a clique is worth a function of at most two chosen vertices, and every such function is

    base + sum of u_a over chosen a + p_ab for a chosen pair.

Eliminating vertex i with single worth r and pair worths p, outside fill, is closed: with g = max(0, r) and
h_a = max(0, r + p_a), the rest is worth g, and with a more or less by h_a - g; a pair (a, b) leaves no room for i, so
it loses h_a + h_b - g.  All homes of a bag without fill lose that together from each pair of the adhesion, O(1) a pair.
Only bags with fill need states.
"""

import numpy as np

from nearchord_solve.kernels.cells import BAGS_DONE, STEP, STOP
from nearchord_solve.kernels.cliques import depth_limit
from nearchord_solve.kernels.compiled import I32, I64, U8, kernel
from nearchord_solve.kernels.layout import ADHESION_FILL, BAG_FILL, Forest
from nearchord_solve.sweep.kernels.label_states import Bag, settle_states
from nearchord_solve.sweep.kernels.label_table import Table, empty_table, find

ONE = np.uint64(1)
DONE, STOPPED, STATES, MEMORY = 0, 1, 2, 3


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
def _position(later_ptr: I64, later: I32, high: int, low: int) -> int:
    """Where ``low`` stands in L(``high``)."""
    begin = later_ptr[high]
    end = later_ptr[high + 1]
    while begin < end:
        middle = (begin + end) >> 1
        if later[middle] < low:
            begin = middle + 1
        else:
            end = middle
    return int(begin)


@kernel
def settle_closed(bag: int, forest: Forest, later_ptr: I64, later: I32, single: I64, pair: I64) -> int:
    """Eliminate the homes of a bag without fill; returns what they add to the base.

    ``single`` int64[n], ``pair`` along ``later`` are changed.  O(size of the bag * homes + rows of the adhesion).
    """
    begin = forest.bag_ptr[bag]
    lead = forest.bag_adhesion[bag]
    size = forest.bag_ptr[bag + 1] - begin
    sums = np.zeros(lead, np.int64)
    spare = int(np.int64(0))
    touched = False
    best = np.zeros(size, np.int64)
    for j in range(size - 1, lead - 1, -1):
        i = forest.bag_slot[begin + j]
        row = later_ptr[i]
        alone = max(single[i], 0)
        useful = alone > 0
        for k in range(j):
            best[k] = max(single[i] + pair[row + k], 0)
            useful = useful or best[k] > 0
        if not useful:
            continue
        spare += alone
        for k in range(lead):
            single[forest.bag_slot[begin + k]] += best[k] - alone
            sums[k] += best[k]
        for k in range(lead, j):
            home = forest.bag_slot[begin + k]
            single[home] += best[k] - alone
            at = later_ptr[home]
            lost = best[k] - alone
            for e in range(k):
                pair[at + e] -= best[e] + lost
        touched = True
    if touched:
        for k in range(1, lead):
            a = forest.bag_slot[begin + k]
            lost = sums[k] - spare
            e = later_ptr[a]
            for f in range(k):
                b = forest.bag_slot[begin + f]
                while later[e] != b:
                    e += 1
                pair[e] -= sums[f] + lost
    return spare


@kernel
def open_bag(
    number: int, forest: Forest, later_ptr: I64, single: I64, pair: I64, child: I32, table: Table, where: I32,
    closed: bool,
) -> tuple[Bag, int]:  # fmt: skip
    """A bag as its states need it, and the number of its fill edges.

    ``where`` int32[n] must be -1 everywhere and is so again on return.
    """
    begin, end = forest.bag_ptr[number], forest.bag_ptr[number + 1]
    member = forest.bag_slot[begin:end].copy()
    b = member.shape[0]
    words = (b + 63) >> 6
    lead = forest.bag_adhesion[number]
    near = np.zeros((b, words), np.uint64)
    gain = np.zeros(b, np.int64)
    worth = np.zeros((b, b), np.int64)
    inside = np.zeros((child.shape[0], words), np.uint64)
    plain = np.empty(child.shape[0], np.int32)
    nothing = np.empty(0, np.int32)
    for j in range(b):
        where[member[j]] = j
    edges = 0
    for j in range(b):
        v = member[j]
        for g in range(forest.slot_fill_ptr[v], forest.slot_fill_ptr[v + 1]):
            i = where[forest.slot_fill[g]]
            if i >= 0:
                near[j, i >> 6] |= ONE << np.uint64(i & 63)
                near[i, j >> 6] |= ONE << np.uint64(j & 63)
                edges += 1
        if j >= lead:
            gain[j] = single[v]
            if closed:
                for i in range(j):
                    worth[j, i] = pair[later_ptr[v] + i]
    base = int(np.int64(0))
    for c in range(child.shape[0]):
        at = forest.bag_ptr[child[c]]
        for e in range(at, at + forest.bag_adhesion[child[c]]):
            i = where[forest.bag_slot[e]]
            inside[c, i >> 6] |= ONE << np.uint64(i & 63)
        plain[c] = find(table, child[c], nothing, 0)
        base += table.value[plain[c]]
    for j in range(b):
        where[member[j]] = -1
    joined = forest.bag_kind[number] & ADHESION_FILL != 0
    return Bag(number, member, lead, joined, near, gain, worth, child, inside, plain, base), edges


@kernel
def most_chosen(size: int, edges: int, colours: int) -> int:
    """Most vertices of a state: two cliques of the fill graph make a forest."""
    return min(size, max(colours, 2) * depth_limit(size, edges))


@kernel
def send_closed(
    number: int, forest: Forest, later_ptr: I64, later: I32, table: Table, single: I64, pair: I64
) -> int:  # fmt: skip
    """Turn the entries of a bag whose adhesion holds no fill into worths; returns what they add to the base."""
    begin = forest.bag_ptr[number]
    lead = forest.bag_adhesion[number]
    key = np.empty(2, np.int32)
    none = table.value[find(table, number, key, 0)]
    one = np.empty(lead, np.int64)
    for k in range(lead):
        key[0] = forest.bag_slot[begin + k]
        one[k] = table.value[find(table, number, key, 1)] - none
        single[key[0]] += one[k]
    for k in range(lead):
        for f in range(k):
            key[0] = forest.bag_slot[begin + f]
            key[1] = forest.bag_slot[begin + k]
            both = table.value[find(table, number, key, 2)] - none
            pair[_position(later_ptr, later, key[1], key[0])] += both - one[k] - one[f]
    return int(none)


@kernel
def inward(
    forest: Forest, later_ptr: I64, later: I32, weight: I64, pair: I64, colours: int, closed: bool,
    most: int, most_bytes: int, cells: I64,
) -> tuple[int, int, int, I64, Table]:  # fmt: skip
    """Collect values from the last bag to the first; ``colours`` 0 means forests.

    ``weight`` int64[n] by rank and ``pair`` int64[size of later], zeros, are overwritten with the worths when each
    vertex is eliminated.  ``closed``: bags without fill are settled by the formula.  Returns (DONE, STOPPED, STATES if
    more than ``most`` were met or MEMORY if the table outgrew ``most_bytes``, value, states, ptr of children, table).
    """
    n = weight.shape[0]
    bags = forest.bag_kind.shape[0]
    ptr, child = link_tables(forest, closed)
    where = np.full(n, -1, np.int32)
    table = empty_table()
    base = int(np.int64(0))
    states = 0
    for b in range(bags - 1, -1, -1):
        if (b & 1023) == 0:
            cells[STEP] = (bags - b) * n // bags
            cells[BAGS_DONE] = bags - b
            if cells[STOP] != 0:
                return STOPPED, base, states, ptr, table
        if closed and not forest.bag_kind[b] & BAG_FILL:
            base += settle_closed(b, forest, later_ptr, later, weight, pair)
            continue
        bag, edges = open_bag(b, forest, later_ptr, weight, pair, child[ptr[b] : ptr[b + 1]], table, where, closed)
        deepest = most_chosen(bag.member.shape[0], edges, colours)
        table, more = settle_states(bag, table, colours, most - states, deepest, cells)
        states += more
        if cells[STOP] != 0:
            return STOPPED, base, states, ptr, table
        if states > most:
            return STATES, base, states, ptr, table
        if 4 * table.pool.shape[0] + 48 * table.value.shape[0] > most_bytes:
            return MEMORY, base, states, ptr, table
        if forest.bag_above[b] < 0:
            base += table.value[find(table, b, where[:0], 0)]
        elif closed and not forest.bag_kind[b] & ADHESION_FILL:
            base += send_closed(b, forest, later_ptr, later, table, weight, pair)
    return DONE, base, states, ptr, table


@kernel
def _free_colour(taken: int) -> int:
    colour = 1
    while (taken >> colour) & 1:
        colour += 1
    return colour


@kernel
def choose_closed(bag: int, forest: Forest, later_ptr: I64, single: I64, pair: I64, colour: U8) -> None:
    """Choose homes of a bag without fill: while fewer than two are chosen, what is worth something joins."""
    begin = forest.bag_ptr[bag]
    count = 0
    other = -1
    for j in range(forest.bag_ptr[bag + 1] - begin):
        v = forest.bag_slot[begin + j]
        if j >= forest.bag_adhesion[bag] and count < 2:
            worth = single[v]
            if count == 1:
                worth += pair[later_ptr[v] + other]
            if worth > 0:
                colour[v] = 3 - colour[forest.bag_slot[begin + other]] if count == 1 else 1
        if colour[v]:
            count += 1
            other = j


@kernel
def choose_state(number: int, forest: Forest, table: Table, entry: int, room: int, colour: U8, named: bool) -> None:
    """Choose the homes of the state that an entry keeps; with colours, classes keep those they have in the adhesion."""
    at = table.begin[entry] + 2 * table.length[entry]
    size = table.pool[at]
    given = np.zeros(room + 1, np.int64)
    taken = 0
    for i in range(size):
        v = table.pool[at + 1 + i]
        if colour[v] and named:
            given[table.pool[at + 1 + room + i]] = colour[v]
            taken |= 1 << colour[v]
    for i in range(size):
        v = table.pool[at + 1 + i]
        if not named:
            colour[v] = 1
        elif colour[v] == 0:
            label = table.pool[at + 1 + room + i]
            if given[label] == 0:
                given[label] = _free_colour(taken)
                taken |= 1 << given[label]
            colour[v] = given[label]


@kernel
def outward(
    forest: Forest, later_ptr: I64, single: I64, pair: I64, colours: int, closed: bool, ptr: I64, table: Table,
    colour: U8, cells: I64,
) -> bool:  # fmt: skip
    """Choose from the first bag to the last after :func:`inward`; False if stopped.

    ``colour`` uint8[n], by rank, zeros, receives the colour of each chosen vertex (for forests anything but 0).
    """
    bags = forest.bag_kind.shape[0]
    pick = np.full(bags, -1, np.int32)
    _, child = link_tables(forest, closed)
    where = np.full(forest.slot_place.shape[0], -1, np.int32)
    key = np.empty(4, np.int32)
    for b in range(bags):
        if (b & 1023) == 0 and cells[STOP] != 0:
            return False
        if closed and not forest.bag_kind[b] & BAG_FILL:
            choose_closed(b, forest, later_ptr, single, pair, colour)
            continue
        begin, end = forest.bag_ptr[b], forest.bag_ptr[b + 1]
        if pick[b] < 0:
            count = 0
            for e in range(begin, begin + forest.bag_adhesion[b]):
                if colour[forest.bag_slot[e]]:
                    key[count] = forest.bag_slot[e]
                    count += 1
            pick[b] = find(table, b, key, count)
        room = most_chosen(end - begin, fill_inside(b, forest, where), colours)
        choose_state(b, forest, table, pick[b], room, colour, colours > 0)
        at = table.begin[pick[b]] + 2 * table.length[pick[b]] + 1 + 2 * room
        for c in range(ptr[b], ptr[b + 1]):
            pick[child[c]] = table.pool[at + c - ptr[b]]
    return True


@kernel
def fill_inside(bag: int, forest: Forest, where: I32) -> int:
    """Fill edges inside a bag.  ``where`` int32[n] must be -1 everywhere and is so again on return."""
    edges = 0
    for e in range(forest.bag_ptr[bag], forest.bag_ptr[bag + 1]):
        where[forest.bag_slot[e]] = 0
    for e in range(forest.bag_ptr[bag], forest.bag_ptr[bag + 1]):
        v = forest.bag_slot[e]
        for g in range(forest.slot_fill_ptr[v], forest.slot_fill_ptr[v + 1]):
            if where[forest.slot_fill[g]] == 0:
                edges += 1
    for e in range(forest.bag_ptr[bag], forest.bag_ptr[bag + 1]):
        where[forest.bag_slot[e]] = -1
    return edges
