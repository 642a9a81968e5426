"""Dynamic programming in one bag that holds fill, for the heaviest independent set.

States of a bag are the independent sets of G in it: cliques of its fill graph, met by depth-first search in
ascending slot order.  The adhesion has the lowest slots, so the search settles a state's adhesion part t first
and M(t), the most that the subtree can add to t, is a running maximum over what follows.

A message is split: M(empty) goes to the base value, M({u}) - M(empty) into the residual weight of u, and only
for |t| >= 2 the rest, delta(t) = M(t) - M(empty) - sum over u in t of (M({u}) - M(empty)), must be kept.  Where
the adhesion holds no fill nothing must be kept: that is the weight transfer between parts.  Kept messages are
tries in preorder: node i has a slot ``label``, its subtree ends before node ``close[i]``, nodes for single
vertices have delta 0.

Overflow: residuals and deltas may leave int64 when weights sum to almost 2**62, but all arithmetic is exact
modulo 2**64 and only values of states with the same adhesion part are compared, by the sign of their
difference, which is smaller than 2**62.
"""

import numpy as np

from nearchord_solve.kernels.cliques import depth_limit
from nearchord_solve.kernels.compiled import I32, I64, U64, kernel, lowest

ONE = np.uint64(1)


@kernel
def collect_messages(
    slots: I32, children: I32, message_begin: I64, message_end: I64, label: I32, close: I64
) -> tuple[I64, I64, I32]:
    """Which messages from below meet which touched vertex of a bag.

    Returns (ptr int64[t+1], node int64[..], child int32[..]): for touched vertex j the top-level trie nodes that
    carry its slot, each with the index in ``children`` (bags below with fill in their adhesion).  Top-level
    nodes of vertices that touch fill only further down meet nothing here.
    """
    count = slots.shape[0]
    ptr = np.zeros(count + 1, np.int64)
    for q in range(children.shape[0]):
        x = message_begin[children[q]]
        j = 0
        while x < message_end[children[q]]:
            while j < count and slots[j] < label[x]:
                j += 1
            if j < count and slots[j] == label[x]:
                ptr[j + 1] += 1
            x = close[x]
    for j in range(count):
        ptr[j + 1] += ptr[j]
    write = ptr.copy()
    node = np.empty(ptr[count], np.int64)
    child = np.empty(ptr[count], np.int32)
    for q in range(children.shape[0]):
        x = message_begin[children[q]]
        j = 0
        while x < message_end[children[q]]:
            while j < count and slots[j] < label[x]:
                j += 1
            if j < count and slots[j] == label[x]:
                node[write[j]] = x
                child[write[j]] = q
                write[j] += 1
            x = close[x]
    return ptr, node, child


@kernel
def extend(
    j: int, slot: int, meet_ptr: I64, meet_node: I64, meet_child: I32, label: I32, close: I64, delta: I64,
    current: I64, undo: I64, undone: int,
) -> tuple[int, int]:  # fmt: skip
    """Move the messages that meet touched vertex j on by it.

    ``current`` int64[children] holds the trie node of each message (-1: none of its vertices chosen yet) and is
    changed; ``undo`` records the nodes left.  Returns (what the messages add, new length of ``undo``).
    """
    gain = 0
    for e in range(meet_ptr[j], meet_ptr[j + 1]):
        q = meet_child[e]
        old = current[q]
        undo[undone] = old
        undone += 1
        if old < 0:
            current[q] = meet_node[e]
        else:
            x = old + 1
            while label[x] != slot:
                x = close[x]
            current[q] = x
            gain += delta[x] - delta[old]
    return gain, undone


@kernel
def retract(j: int, meet_ptr: I64, meet_child: I32, current: I64, undo: I64, undone: int) -> int:
    """Undo :func:`extend` for vertex j; returns the new length of ``undo``."""
    for e in range(meet_ptr[j + 1] - 1, meet_ptr[j] - 1, -1):
        undone -= 1
        current[meet_child[e]] = undo[undone]
    return undone


@kernel
def fill_table(
    slots: I32, rows: U64, edges: int, lead: int, gain: I64,
    meet_ptr: I64, meet_node: I64, meet_child: I32, children: int,
    label: I32, close: I64, delta: I64, used: int, spare: int,
) -> tuple[int, int]:  # fmt: skip
    """Run through all states of a bag and leave M as a trie behind node ``used``.

    ``slots`` int32[t] touched slots, the first ``lead`` of them in the adhesion; ``rows`` their fill graph;
    ``gain`` int64[t] residual weights of homes (not read for adhesion vertices).  ``spare``: the most that the
    empty state can take from homes without fill.  Writes label, close and M (into ``delta``) of a node for
    every non-empty state inside the adhesion.  Returns (M(empty), new end of the tries).
    O(states * (W + messages met)).
    """
    count, words = rows.shape
    deepest = depth_limit(count, edges) + 1
    stack = np.empty((deepest, words), np.uint64)
    value = np.empty(deepest, np.int64)
    node = np.empty(deepest, np.int64)
    chosen = np.empty(deepest, np.int64)
    current = np.full(children, -1, np.int64)
    undo = np.empty(meet_node.shape[0] + 1, np.int64)
    undone = int(np.int64(0))  # a literal 0 would compile what it is passed to twice
    empty = spare
    for w in range(words):
        stack[0, w] = 0
    for j in range(count):
        stack[0, j >> 6] |= ONE << np.uint64(j & 63)
    value[0] = 0
    node[0] = -1
    chosen[0] = -1
    depth = 0
    while depth >= 0:
        w = 0
        while w < words and stack[depth, w] == 0:
            w += 1
        if w == words:
            j = chosen[depth]
            if j >= 0:
                undone = retract(j, meet_ptr, meet_child, current, undo, undone)
                if j < lead:
                    close[node[depth]] = used
            depth -= 1
            continue
        j = (w << 6) + lowest(stack[depth, w])
        stack[depth, w] &= stack[depth, w] - ONE
        more, undone = extend(j, slots[j], meet_ptr, meet_node, meet_child, label, close, delta, current, undo, undone)
        total = value[depth] + more
        at = node[depth]
        if j < lead:
            at = used
            label[used] = slots[j]
            delta[used] = total
            used += 1
        else:
            total += gain[j]
            if at < 0:
                empty = max(empty, total)
            elif total - delta[at] > 0:
                delta[at] = total
        depth += 1
        for y in range(words):
            stack[depth, y] = stack[depth - 1, y] & rows[j, y]
        value[depth] = total
        node[depth] = at
        chosen[depth] = j
    return empty, used


@kernel
def settle_message(
    begin: int, end: int, empty: int, label: I32, close: I64, delta: I64, slot_place: I32, residual: I64
) -> None:
    """Turn M on trie nodes begin..end-1 into deltas, moving the single-vertex part into ``residual``."""
    path_end = np.empty(end - begin + 1, np.int64)
    path_sum = np.empty(end - begin + 1, np.int64)
    single = np.empty(end - begin + 1, np.int64)
    depth = 0
    path_sum[0] = 0
    # top-level nodes first: their vertices' single parts are needed below
    x = begin
    tops = 0
    while x < end:
        single[tops] = delta[x] - empty
        residual[slot_place[label[x]]] += single[tops]
        tops += 1
        x = close[x]
    top_label = np.empty(tops, np.int32)
    x = begin
    tops = 0
    while x < end:
        top_label[tops] = label[x]
        tops += 1
        x = close[x]
    for x in range(begin, end):
        while depth > 0 and path_end[depth] <= x:
            depth -= 1
        low = 0
        high = tops - 1
        while low < high:
            middle = (low + high) >> 1
            if top_label[middle] < label[x]:
                low = middle + 1
            else:
                high = middle
        singles = path_sum[depth] + single[low]
        delta[x] = delta[x] - empty - singles
        depth += 1
        path_end[depth] = close[x]
        path_sum[depth] = singles


@kernel
def best_state(
    slots: I32, rows: U64, edges: int, lead: int, gain: I64,
    meet_ptr: I64, meet_node: I64, meet_child: I32, children: int,
    label: I32, close: I64, delta: I64, fixed: I32, spare: int, best: I32,
) -> int:  # fmt: skip
    """The first best choice of homes that extends the chosen adhesion vertices ``fixed`` (touched, ascending).

    ``best`` int32[t] receives the touched homes chosen; returns how many, or -1 if ``spare`` (what a home
    without fill gives; 0 for none) is more than all of them.
    """
    count, words = rows.shape
    deepest = depth_limit(count, edges) + 1
    stack = np.empty((deepest, words), np.uint64)
    value = np.empty(deepest, np.int64)
    chosen = np.empty(deepest, np.int64)
    current = np.full(children, -1, np.int64)
    undo = np.empty(meet_node.shape[0] + 1, np.int64)
    undone = int(np.int64(0))  # a literal 0 would compile what it is passed to twice
    for w in range(words):
        stack[0, w] = 0
    for j in range(lead, count):
        stack[0, j >> 6] |= ONE << np.uint64(j & 63)
    for j in fixed:
        _, undone = extend(j, slots[j], meet_ptr, meet_node, meet_child, label, close, delta, current, undo, undone)
        for w in range(words):
            stack[0, w] &= rows[j, w]
    most = spare
    length = -1 if spare > 0 else 0
    value[0] = 0
    chosen[0] = -1
    depth = 0
    while depth >= 0:
        w = 0
        while w < words and stack[depth, w] == 0:
            w += 1
        if w == words:
            if depth > 0:
                undone = retract(chosen[depth], meet_ptr, meet_child, current, undo, undone)
            depth -= 1
            continue
        j = (w << 6) + lowest(stack[depth, w])
        stack[depth, w] &= stack[depth, w] - ONE
        more, undone = extend(j, slots[j], meet_ptr, meet_node, meet_child, label, close, delta, current, undo, undone)
        total = value[depth] + more + gain[j]
        depth += 1
        for y in range(words):
            stack[depth, y] = stack[depth - 1, y] & rows[j, y]
        value[depth] = total
        chosen[depth] = j
        if total - most > 0:
            most = total
            length = depth
            for d in range(depth):
                best[d] = chosen[d + 1]
    return length
