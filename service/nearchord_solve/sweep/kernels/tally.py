"""A program that counts the best states of all bags, written down along the inward pass; see :mod:`..counting`.

The program works on registers that hold positive numbers.  Its instructions are triples (what, target, source) of
int32:

    START   target = 1
    STEP    target = target + 1
    TIMES   target = target * source
    OVER    target = target / source
    PLUS    target = target + source

A register -1 stands for the number one, which is never written down; register 0 ends as the count.
"""

from typing import NamedTuple

import numpy as np

from nearchord_solve.kernels.cells import POLL, STOP
from nearchord_solve.kernels.cells import STEP as PROGRESS
from nearchord_solve.kernels.compiled import I32, I64, U8, kernel
from nearchord_solve.kernels.layout import ADHESION_FILL, Forest, Numbering, Tries
from nearchord_solve.sweep.kernels.tables import fill_table
from nearchord_solve.sweep.kernels.walk import Opened, Walk, begin_walk, next_state, open_bag

START, STEP, TIMES, OVER, PLUS = 0, 1, 2, 3, 4
WHAT = np.arange(5)  # passed on from here, not as literals, which would compile what they are passed to anew
NOTHING = -2  # a sum that nothing was added to yet


class Registers(NamedTuple):
    """Where the ratios stand: -1 is one."""

    place: I64  # [n] ratio of each place
    node: I64  # [nodes] kept part of each message
    alive: U8  # [n] 0 where no best set has the place, so that its ratio is not wanted
    used: I64  # [3] instructions, registers, the register of the count


@kernel
def write(code: I32, used: I64, what: int, target: int, source: int) -> None:
    """Append an instruction; where there is no room it is only counted."""
    at = 3 * used[0]
    used[0] += 1
    if at + 2 < code.shape[0]:
        code[at] = what
        code[at + 1] = target
        code[at + 2] = source


@kernel
def fresh(code: I32, used: I64) -> int:
    """A new register with one in it."""
    register = used[1]
    used[1] += 1
    write(code, used, WHAT[START], register, register)
    return int(register)


@kernel
def scale(code: I32, used: I64, what: int, registers: I64, at: int, source: int) -> None:
    """Multiply or divide ``registers[at]`` by a register."""
    if source < 0:
        return
    if registers[at] < 0:
        registers[at] = fresh(code, used)
    write(code, used, what, registers[at], source)


@kernel
def settle_place(i: int, worth: int, around: I32, code: I32, registers: Registers) -> None:
    """Settle a place whose surroundings are a clique: it is chosen, left, or either, with the same weight.

    ``around`` int32[..]: places of the clique besides i.
    """
    ratio = registers.place
    if worth < 0 or (worth > 0 and ratio[i] < 0):
        return
    used = registers.used
    if worth == 0:
        if ratio[i] < 0:
            ratio[i] = fresh(code, used)
        write(code, used, WHAT[STEP], ratio[i], ratio[i])
    write(code, used, WHAT[TIMES], registers.used[2], ratio[i])
    for e in range(around.shape[0]):
        u = int(np.int64(around[e]))
        if registers.alive[u]:
            scale(code, used, WHAT[OVER], ratio, u, ratio[i])


@kernel
def settle_plain(bag: int, forest: Forest, residual: I64, code: I32, registers: Registers) -> None:
    """Settle a bag without fill, from its last home to the first."""
    begin = forest.bag_ptr[bag]
    members = np.empty(forest.bag_ptr[bag + 1] - begin, np.int32)
    for e in range(members.shape[0]):
        members[e] = forest.slot_place[forest.bag_slot[begin + e]]
    for e in range(members.shape[0] - 1, forest.bag_adhesion[bag] - 1, -1):
        settle_place(int(np.int64(members[e])), residual[members[e]], members[:e], code, registers)


@kernel
def add(code: I32, used: I64, sums: I64, at: int, source: int, own: bool) -> None:
    """Add a register to a sum; ``own``: the register may be used up for it."""
    if sums[at] == NOTHING and (source < 0 or own):
        sums[at] = source
        return
    what = WHAT[PLUS]
    if sums[at] < 0:
        if sums[at] == NOTHING:
            what = WHAT[TIMES]
        sums[at] = fresh(code, used)
    if source < 0:
        write(code, used, WHAT[STEP], sums[at], sums[at])
    else:
        write(code, used, what, sums[at], source)


@kernel
def add_state(
    code: I32, registers: Registers, sums: I64, at: int, opened: Opened, walk: Walk, slot_place: I32
) -> None:  # fmt: skip
    """Add what the state of a walk counts for: the product over its homes and over the messages that meet it."""
    used = registers.used
    depth = walk.at[0]
    children = walk.current.shape[0]
    product = np.empty(1, np.int64)
    product[0] = -1
    single = int(np.int64(-1))
    factors = 0
    for f in range(depth + children):
        factor = int(np.int64(-1))
        if f < depth:
            j = walk.picked[f + 1]
            if j >= opened.lead:
                factor = registers.place[slot_place[opened.slots[j]]]
        elif walk.current[f - depth] >= 0:
            factor = registers.node[walk.current[f - depth]]
        if factor < 0:
            continue
        factors += 1
        if factors == 1:
            single = factor
            continue
        if factors == 2:
            scale(code, used, WHAT[TIMES], product, int(np.int64(0)), single)
        scale(code, used, WHAT[TIMES], product, int(np.int64(0)), factor)
    add(code, used, sums, at, product[0] if factors > 1 else single, factors > 1)


@kernel
def best_of_states(
    bag: int, forest: Forest, opened: Opened, children: int, tries: Tries, begin: int, kept: bool
) -> I64:  # fmt: skip
    """M of the empty state and of all states inside the adhesion, int64[1 + nodes], in the order of a walk.

    ``begin``: where the nodes of the bag stand, if they are kept, or where there is room for them.
    """
    size = tries.end[bag] - begin if kept else np.int64(0)
    deltas = np.empty(size, np.int64)
    for x in range(size):
        deltas[x] = tries.delta[begin + x]
    empty, end = fill_table(
        opened.slots, opened.rows, opened.edges, opened.lead, opened.gain,
        opened.meet_ptr, opened.meet_node, opened.meet_child, children,
        tries.label, tries.close, tries.delta, begin, opened.spare,
    )  # fmt: skip
    best = np.empty(end - begin + 1, np.int64)
    best[0] = empty
    for x in range(end - begin):
        best[x + 1] = tries.delta[begin + x]
    for x in range(size):
        tries.delta[begin + x] = deltas[x]
    return best


@kernel
def settle_bag(
    bag: int, forest: Forest, children: I32, tries: Tries, spare_room: int, where: I32, residual: I64, code: I32,
    registers: Registers,
) -> None:  # fmt: skip
    """Settle a bag with fill: count the best states for every part that the adhesion may have, and send the counts."""
    opened = open_bag(bag, forest, children, tries, where, residual)
    kept = forest.bag_kind[bag] & ADHESION_FILL != 0
    begin = tries.begin[bag] if kept else spare_room
    best = best_of_states(bag, forest, opened, children.shape[0], tries, begin, kept)
    sums = np.empty(best.shape[0], np.int64)
    above = np.empty(best.shape[0], np.int64)  # node above, 0 is the empty state
    joined = np.empty(best.shape[0], np.int64)
    for x in range(best.shape[0]):
        sums[x] = NOTHING
    walk = begin_walk(opened, children.shape[0], int(np.int64(0)))
    node = np.empty(walk.picked.shape[0], np.int64)
    value = np.empty(walk.picked.shape[0], np.int64)
    node[0] = 0
    value[0] = 0
    add_alone(bag, forest, opened, best[0], residual, sums, code, registers)
    nodes = 0
    while True:
        j, more = next_state(opened, tries, walk)
        if j < 0:
            break
        depth = walk.at[0]
        value[depth] = value[depth - 1] + more + opened.gain[j]
        node[depth] = node[depth - 1]
        if j < opened.lead:
            nodes += 1
            node[depth] = nodes
            above[nodes] = node[depth - 1]
            joined[nodes] = j
        if value[depth] == best[node[depth]]:
            add_state(code, registers, sums, node[depth], opened, walk, forest.slot_place)
    send_counts(bag, forest, opened, begin, kept, sums, above, joined, code, registers)


@kernel
def add_alone(
    bag: int, forest: Forest, opened: Opened, best: int, residual: I64, sums: I64, code: I32, registers: Registers
) -> None:  # fmt: skip
    """Add the states without touched vertices: the empty one, and single homes, if they are best."""
    begin = forest.bag_ptr[bag] + forest.bag_adhesion[bag]
    j = opened.lead
    for e in range(begin - 1, forest.bag_ptr[bag + 1]):
        ratio = int(np.int64(-1))
        worth = np.int64(0)
        if e >= begin:
            s = forest.bag_slot[e]
            if j < opened.slots.shape[0] and opened.slots[j] == s:
                j += 1
                continue
            ratio = registers.place[forest.slot_place[s]]
            worth = residual[forest.slot_place[s]]
        if worth == best:
            add(code, registers.used, sums, int(np.int64(0)), ratio, ratio < 0)


@kernel
def send_counts(
    bag: int, forest: Forest, opened: Opened, begin: int, kept: bool, sums: I64, above: I64, joined: I64, code: I32,
    registers: Registers,
) -> None:  # fmt: skip
    """Split the counts of a bag as its values are split: over the count, the ratios of places, and what is kept."""
    used = registers.used
    if sums[0] >= 0:
        write(code, used, WHAT[TIMES], used[2], sums[0])
    single = np.empty(opened.lead, np.int64)
    for x in range(1, sums.shape[0]):
        if above[x] == 0:
            single[joined[x]] = sums[x]
    j = 0
    for e in range(forest.bag_ptr[bag], forest.bag_ptr[bag] + forest.bag_adhesion[bag]):
        s = forest.bag_slot[e]
        p = int(np.int64(forest.slot_place[s]))
        here = j < opened.lead and opened.slots[j] == s
        if registers.alive[p]:
            if here:
                scale(code, used, WHAT[TIMES], registers.place, p, single[j])
            scale(code, used, WHAT[OVER], registers.place, p, sums[0])
        if here:
            j += 1
    if not kept:
        return
    for x in range(1, sums.shape[0]):
        at = begin + x - 1
        registers.node[at] = -1
        if above[x] == 0:
            continue
        scale(code, used, WHAT[TIMES], registers.node, at, sums[x])
        y = int(np.int64(x))
        while y > 0:
            scale(code, used, WHAT[OVER], registers.node, at, single[joined[y]])
            y = int(np.int64(above[y]))
            if y > 0:
                scale(code, used, WHAT[TIMES], registers.node, at, sums[0])


@kernel
def settle_places(
    high: int, low: int, numbering: Numbering, residual: I64, code: I32, registers: Registers, cells: I64
) -> None:
    """Settle the places outside cores from ``high`` - 1 down to ``low``, unless told to stop."""
    for i in range(high - 1, low - 1, -1):
        if (i & POLL) == 0:
            cells[PROGRESS] = residual.shape[0] - i
            if cells[STOP] != 0:
                return
        if numbering.core[i] < 0:
            around = numbering.low[numbering.low_ptr[i] : numbering.low_ptr[i + 1]]
            settle_place(int(np.int64(i)), residual[i], around, code, registers)
