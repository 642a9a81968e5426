"""A program that counts the best states of all bags, written down along the inward pass; see :mod:`..counting`.

The program works on registers that hold positive numbers.  Its instructions are triples (what, target, source) of int32:

    START   target = 1
    STEP    target = target + 1
    TIMES   target = target * source
    OVER    target = target / source
    PLUS    target = target + source

A register -1 stands for the number one, which is never written down; register 0 ends as the count.
"""

from typing import NamedTuple

import numpy as np

from nearchord_solve.kernels.cells import BAGS_DONE, POLL, STEP as PROGRESS, STOP
from nearchord_solve.kernels.compiled import I32, I64, U8, kernel
from nearchord_solve.kernels.grow import grown32
from nearchord_solve.kernels.layout import ADHESION_FILL, BAG_FILL, Forest, Numbering, Tries
from nearchord_solve.sweep.kernels.passes import link_bags, senders
from nearchord_solve.sweep.kernels.tables import fill_table
from nearchord_solve.sweep.kernels.walk import Opened, Walk, begin_walk, next_state, open_bag

START, STEP, TIMES, OVER, PLUS = 0, 1, 2, 3, 4
NOTHING = -2  # a sum that nothing was added to yet
DONE, STOPPED, TOO_LONG = 0, 1, 2


class Registers(NamedTuple):
    """Where the ratios stand: -1 is one."""

    place: I32  # [n] ratio of each place
    node: I32  # [nodes] kept part of each message
    alive: U8  # [n] 0 where no best set has the place, so that its ratio is not wanted
    used: I64  # [2] instructions, registers


@kernel
def write(code: I32, used: I64, what: int, target: int, source: int) -> I32:
    """Append an instruction."""
    at = 3 * used[0]
    code = grown32(code, at + 3)
    code[at] = what
    code[at + 1] = target
    code[at + 2] = source
    used[0] += 1
    return code


@kernel
def fresh(code: I32, used: I64) -> tuple[I32, int]:
    """A new register with one in it."""
    register = used[1]
    used[1] += 1
    return write(code, used, START, register, -1), register


@kernel
def scale(code: I32, used: I64, what: int, registers: I32, at: int, source: int) -> I32:
    """Multiply or divide ``registers[at]`` by a register."""
    if source < 0:
        return code
    if registers[at] < 0:
        code, registers[at] = fresh(code, used)
    return write(code, used, what, registers[at], source)


@kernel
def settle_place(i: int, worth: int, around: I32, code: I32, registers: Registers) -> I32:
    """Settle a place whose surroundings are a clique: it is chosen, left, or either, with the same weight.

    ``around`` int32[..]: places of the clique besides i.
    """
    if worth < 0:
        return code
    ratio = registers.place
    if worth == 0:
        if ratio[i] < 0:
            code, ratio[i] = fresh(code, registers.used)
        code = write(code, registers.used, STEP, ratio[i], -1)
    elif ratio[i] < 0:
        return code
    code = write(code, registers.used, TIMES, 0, ratio[i])
    for u in around:
        if registers.alive[u]:
            code = scale(code, registers.used, OVER, ratio, u, ratio[i])
    return code


@kernel
def settle_plain(bag: int, forest: Forest, residual: I64, code: I32, registers: Registers) -> I32:
    """Settle a bag without fill, from its last home to the first."""
    begin = forest.bag_ptr[bag]
    members = np.empty(forest.bag_ptr[bag + 1] - begin, np.int32)
    for e in range(members.shape[0]):
        members[e] = forest.slot_place[forest.bag_slot[begin + e]]
    for e in range(members.shape[0] - 1, forest.bag_adhesion[bag] - 1, -1):
        code = settle_place(members[e], residual[members[e]], members[:e], code, registers)
    return code


@kernel
def add(code: I32, used: I64, sums: I32, at: int, source: int, own: bool) -> I32:
    """Add a register to a sum; ``own``: the register may be used up for it."""
    if sums[at] == NOTHING and (source < 0 or own):
        sums[at] = source
        return code
    if sums[at] < 0:
        started = sums[at] == -1
        code, sums[at] = fresh(code, used)
        if not started:
            return write(code, used, TIMES, sums[at], source)
    if source < 0:
        return write(code, used, STEP, sums[at], -1)
    return write(code, used, PLUS, sums[at], source)


@kernel
def add_state(
    code: I32, registers: Registers, sums: I32, at: int, opened: Opened, walk: Walk, slot_place: I32
) -> I32:  # fmt: skip
    """Add what the state of a walk counts for: the product over its homes and over the messages that meet it."""
    product = np.full(1, -1, np.int32)
    single = -1
    factors = 0
    for d in range(1, walk.at[0] + 1):
        j = walk.picked[d]
        if j >= opened.lead:
            factor = registers.place[slot_place[opened.slots[j]]]
            if factor >= 0:
                code, single, factors = _gather(code, registers.used, product, factor, single, factors)
    for q in range(walk.current.shape[0]):
        if walk.current[q] >= 0:
            factor = registers.node[walk.current[q]]
            if factor >= 0:
                code, single, factors = _gather(code, registers.used, product, factor, single, factors)
    if factors < 2:
        return add(code, registers.used, sums, at, single, False)
    return add(code, registers.used, sums, at, product[0], True)


@kernel
def _gather(code: I32, used: I64, product: I32, factor: int, single: int, factors: int) -> tuple[I32, int, int]:
    """One more factor of a product, which is written down from the second on."""
    if factors == 0:
        return code, factor, 1
    if factors == 1:
        code = scale(code, used, TIMES, product, int(np.int64(0)), single)
    return scale(code, used, TIMES, product, int(np.int64(0)), factor), single, factors + 1


@kernel
def best_of_states(
    bag: int, forest: Forest, opened: Opened, children: int, tries: Tries, begin: int, kept: bool
) -> I64:  # fmt: skip
    """M of the empty state and of all states inside the adhesion, int64[1 + nodes], in the order of a walk.

    ``begin``: where the nodes of the bag stand, if they are kept, or where there is room for them.
    """
    size = tries.end[bag] - begin if kept else 0
    deltas = tries.delta[begin : begin + size].copy()
    empty, end = fill_table(
        opened.slots, opened.rows, opened.edges, opened.lead, opened.gain,
        opened.meet_ptr, opened.meet_node, opened.meet_child, children,
        tries.label, tries.close, tries.delta, begin, opened.spare,
    )  # fmt: skip
    best = np.empty(end - begin + 1, np.int64)
    best[0] = empty
    best[1:] = tries.delta[begin:end]
    tries.delta[begin : begin + size] = deltas
    return best


@kernel
def settle_bag(
    bag: int, forest: Forest, children: I32, tries: Tries, spare_room: int, where: I32, residual: I64, code: I32,
    registers: Registers,
) -> I32:  # fmt: skip
    """Settle a bag with fill: count the best states for every part that the adhesion may have, and send the counts."""
    opened = open_bag(bag, forest, children, tries, where, residual)
    kept = forest.bag_kind[bag] & ADHESION_FILL != 0
    begin = tries.begin[bag] if kept else spare_room
    best = best_of_states(bag, forest, opened, children.shape[0], tries, begin, kept)
    sums = np.full(best.shape[0], NOTHING, np.int32)
    above = np.full(best.shape[0], 0, np.int32)  # node above, 0 is the empty state
    joined = np.full(best.shape[0], -1, np.int32)
    walk = begin_walk(opened, children.shape[0], int(np.int64(0)))
    node = np.zeros(walk.picked.shape[0], np.int64)
    value = np.zeros(walk.picked.shape[0], np.int64)
    if best[0] == 0:
        code = add(code, registers.used, sums, int(np.int64(0)), int(np.int64(-1)), False)
    j = opened.lead
    for e in range(forest.bag_ptr[bag] + forest.bag_adhesion[bag], forest.bag_ptr[bag + 1]):
        s = forest.bag_slot[e]
        if j < opened.slots.shape[0] and opened.slots[j] == s:
            j += 1
        elif residual[forest.slot_place[s]] == best[0]:
            code = add(code, registers.used, sums, int(np.int64(0)), registers.place[forest.slot_place[s]], False)
    nodes = int(np.int64(0))
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
            code = add_state(code, registers, sums, node[depth], opened, walk, forest.slot_place)
    return send_counts(bag, forest, opened, begin, kept, sums, above, joined, code, registers)


@kernel
def send_counts(
    bag: int, forest: Forest, opened: Opened, begin: int, kept: bool, sums: I32, above: I32, joined: I32, code: I32,
    registers: Registers,
) -> I32:  # fmt: skip
    """Split the counts of a bag as its values are split: over the count, the ratios of places, and what is kept."""
    used = registers.used
    code = scale(code, used, TIMES, np.zeros(1, np.int32), int(np.int64(0)), sums[0])
    single = np.full(opened.lead, -1, np.int32)
    for x in range(1, sums.shape[0]):
        if above[x] == 0:
            single[joined[x]] = sums[x]
    j = 0
    for e in range(forest.bag_ptr[bag], forest.bag_ptr[bag] + forest.bag_adhesion[bag]):
        s = forest.bag_slot[e]
        p = forest.slot_place[s]
        here = j < opened.lead and opened.slots[j] == s
        if registers.alive[p]:
            if here:
                code = scale(code, used, TIMES, registers.place, p, single[j])
            code = scale(code, used, OVER, registers.place, p, sums[0])
        if here:
            j += 1
    if not kept:
        return code
    for x in range(1, sums.shape[0]):
        at = begin + x - 1
        registers.node[at] = -1
        if above[x] == 0:
            continue
        code = scale(code, used, TIMES, registers.node, at, sums[x])
        y = x
        while y > 0:
            code = scale(code, used, OVER, registers.node, at, single[joined[y]])
            y = above[y]
            if y > 0:
                code = scale(code, used, TIMES, registers.node, at, sums[0])
    return code


@kernel
def write_program(
    numbering: Numbering, forest: Forest, tries: Tries, spare_room: int, residual: I64, registers: Registers,
    most: int, cells: I64,
) -> tuple[int, I32]:  # fmt: skip
    """The whole program; gives up above ``most`` instructions.  Returns (DONE, STOPPED or TOO_LONG, instructions).

    ``residual``, ``tries``: as :func:`.passes.inward` left them; from node ``spare_room`` on there is room for one
    bag.  O(m) instructions outside fill cores, O(size) for each best state inside.
    """
    n = residual.shape[0]
    code = np.empty(1024, np.int32)
    where = np.full(forest.slot_place.shape[0], -1, np.int32)
    first, following = link_bags(forest.bag_above, forest.bag_kind)
    code, _ = fresh(code, registers.used)
    bags = 0
    for i in range(n - 1, -1, -1):
        if (i & POLL) == 0:
            cells[PROGRESS] = n - i
            if cells[STOP] != 0:
                return STOPPED, code
        if registers.used[0] > most:
            return TOO_LONG, code
        c = numbering.core[i]
        if c < 0:
            around = numbering.low[numbering.low_ptr[i] : numbering.low_ptr[i + 1]]
            code = settle_place(i, residual[i], around, code, registers)
            continue
        if forest.core_top[c] != i:
            continue
        for b in range(forest.core_bag[c + 1] - 1, forest.core_bag[c] - 1, -1):
            if cells[STOP] != 0:
                return STOPPED, code
            if forest.bag_kind[b] & BAG_FILL:
                code = settle_bag(
                    b, forest, senders(b, first, following), tries, spare_room, where, residual, code, registers
                )
            else:
                code = settle_plain(b, forest, residual, code, registers)
            if registers.used[0] > most:
                return TOO_LONG, code
            bags += 1
            cells[BAGS_DONE] = bags
    return DONE, code
