"""Dynamic programming in one bag that holds fill, for W weight vectors at a time, at most WIDEST.

As :mod:`.tables`, but values are rows of W numbers, one for each vector, while states and messages are gone through
once for all.  To choose, a bag is gone through a second time, and for each state of its adhesion and each vector the
best state is noted; whoever wants to know what it holds follows the way back from it.
"""

from typing import NamedTuple

import numpy as np

from nearchord_solve.kernels.cliques import depth_limit
from nearchord_solve.kernels.compiled import I32, I64, U64, inlined, kernel, lowest
from nearchord_solve.kernels.layout import Forest
from nearchord_solve.sweep.kernels.tables import retract

ONE = np.uint64(1)
WIDEST = 32  # a word has a bit for each vector
NOTHING, SPARE = -1, -2


class WideTries(NamedTuple):
    """Messages kept between bags, as :class:`nearchord_solve.kernels.layout.Tries`."""

    begin: I64  # [B]
    end: I64  # [B]
    label: I32  # slot
    close: I64  # first node behind the subtree
    delta: I64  # [nodes, W]


class Ways(NamedTuple):
    """The best states of one bag, and what they hold; with room for the states of any bag.

    State k holds touched vertex ``last[k]`` and what state ``before[k]`` holds, -1: nothing else.
    """

    last: I32
    before: I32
    empty: I32  # [W] best state next to an empty adhesion part: NOTHING, SPARE or a state
    best: I32  # [., W] best state for each node of the adhesion's trie


@inlined
def split_wide(bag: int, slots: I32, forest: Forest, residual: I64) -> tuple[int, I64, I64, I32]:
    """As ``split_bag``: (touched slots in the adhesion, residual weights of touched slots int64[t, W], the best of
    an untouched home or 0 int64[W], its slot or -1 int32[W]).  ``residual`` int64[n, W]."""
    begin = forest.bag_ptr[bag]
    split = begin + forest.bag_adhesion[bag]
    wide = residual.shape[1]
    gain = np.zeros((slots.shape[0], wide), np.int64)
    spare = np.zeros(wide, np.int64)
    spare_slot = np.full(wide, -1, np.int32)
    lead = 0
    j = 0
    for e in range(begin, forest.bag_ptr[bag + 1]):
        s = forest.bag_slot[e]
        p = forest.slot_place[s]
        if j < slots.shape[0] and slots[j] == s:
            if e < split:
                lead += 1
            else:
                gain[j] = residual[p]
            j += 1
        elif e >= split:
            for r in range(wide):
                if residual[p, r] > spare[r]:
                    spare[r] = residual[p, r]
                    spare_slot[r] = s
    return lead, gain, spare, spare_slot


@inlined
def extend_wide(
    j: int, slot: int, meet_ptr: I64, meet_node: I64, meet_child: I32, tries: WideTries,
    current: I64, undo: I64, undone: int, total: I64,
) -> int:  # fmt: skip
    """As ``extend``: moves messages on by touched vertex j, adds what they add to ``total`` int64[W]."""
    for e in range(meet_ptr[j], meet_ptr[j + 1]):
        q = meet_child[e]
        old = current[q]
        undo[undone] = old
        undone += 1
        if old < 0:
            current[q] = meet_node[e]
        else:
            x = old + 1
            while tries.label[x] != slot:
                x = tries.close[x]
            current[q] = x
            for r in range(total.shape[0]):
                total[r] += tries.delta[x, r] - tries.delta[old, r]
    return undone


@kernel
def fill_wide(
    slots: I32, rows: U64, edges: int, lead: int, gain: I64, meet_ptr: I64, meet_node: I64, meet_child: I32,
    children: int, tries: WideTries, used: int, empty: I64, noting: bool, ways: Ways,
) -> int:  # fmt: skip
    """As ``fill_table``: run through all states and leave M as a trie behind node ``used``; returns its end.

    ``empty`` int64[W] holds the spares and receives M(empty).  With ``noting``, ``ways`` receives the best states
    (what is best at nodes from ``used`` on at 0).
    """
    count, words = rows.shape
    wide = empty.shape[0]
    deepest = depth_limit(count, edges) + 1
    stack = np.zeros((deepest, words), np.uint64)
    value = np.zeros((deepest, wide), np.int64)
    node = np.empty(deepest, np.int64)
    chosen = np.empty(deepest, np.int64)
    state = np.empty(deepest, np.int64)
    current = np.full(children, -1, np.int64)
    undo = np.empty(meet_node.shape[0] + 1, np.int64)
    undone = int(np.int64(0))  # a literal 0 would compile what it is passed to twice
    for j in range(count):
        stack[0, j >> 6] |= ONE << np.uint64(j & 63)
    if noting:
        for r in range(wide):
            ways.empty[r] = SPARE if empty[r] > 0 else NOTHING
    node[0] = -1
    chosen[0] = -1
    state[0] = -1
    states = 0
    depth = 0
    begin = used
    while depth >= 0:
        w = 0
        while w < words and stack[depth, w] == 0:
            w += 1
        if w == words:
            j = chosen[depth]
            if j >= 0:
                undone = retract(j, meet_ptr, meet_child, current, undo, undone)
                if j < lead:
                    tries.close[node[depth]] = used
            depth -= 1
            continue
        j = (w << 6) + lowest(stack[depth, w])
        stack[depth, w] &= stack[depth, w] - ONE
        for r in range(wide):
            value[depth + 1, r] = value[depth, r]
        undone = extend_wide(
            j, slots[j], meet_ptr, meet_node, meet_child, tries, current, undo, undone, value[depth + 1]
        )
        at = node[depth]
        if noting:
            ways.last[states] = j
            ways.before[states] = state[depth]
        if j < lead:
            at = used
            tries.label[used] = slots[j]
            used += 1
            for r in range(wide):
                tries.delta[at, r] = value[depth + 1, r]
            if noting:
                for r in range(wide):
                    ways.best[at - begin, r] = NOTHING
        else:
            for r in range(wide):
                total = value[depth + 1, r] + gain[j, r]
                value[depth + 1, r] = total
                if at < 0:
                    if total > empty[r]:
                        empty[r] = total
                        if noting:
                            ways.empty[r] = states
                elif total - tries.delta[at, r] > 0:
                    tries.delta[at, r] = total
                    if noting:
                        ways.best[at - begin, r] = states
        depth += 1
        for y in range(words):
            stack[depth, y] = stack[depth - 1, y] & rows[j, y]
        node[depth] = at
        chosen[depth] = j
        state[depth] = states
        states += 1
    return used


@inlined
def settle_wide(begin: int, end: int, empty: I64, tries: WideTries, slot_place: I32, residual: I64) -> None:
    """As ``settle_message``: turn M on nodes begin..end-1 into deltas, moving single vertices into ``residual``."""
    room = end - begin + 1
    wide = empty.shape[0]
    path_end = np.empty(room, np.int64)
    path_sum = np.zeros((room, wide), np.int64)
    single = np.empty((room, wide), np.int64)
    top_label = np.empty(room, np.int32)
    x = begin
    tops = 0
    while x < end:
        top_label[tops] = tries.label[x]
        p = slot_place[tries.label[x]]
        for r in range(wide):
            single[tops, r] = tries.delta[x, r] - empty[r]
            residual[p, r] += single[tops, r]
        tops += 1
        x = tries.close[x]
    depth = 0
    for x in range(begin, end):
        while depth > 0 and path_end[depth] <= x:
            depth -= 1
        low = np.searchsorted(top_label[:tops], tries.label[x])
        for r in range(wide):
            singles = path_sum[depth, r] + single[low, r]
            tries.delta[x, r] -= empty[r] + singles
            path_sum[depth + 1, r] = singles
        depth += 1
        path_end[depth] = tries.close[x]
