"""States of one bag with fill that hold both ends of one edge of G, as if that edge were dropped.

Dropping the edge uv adds to the independent sets exactly those that hold u and v and are independent otherwise.  In a
bag, such a state is u, v and a clique of the fill graph among X, the vertices that fill joins to both u and v; where X
is empty it is u and v alone.  What the messages from below add to it:

* a bag below with u and v in its adhesion has a message of its own for such states.  Its part that concerns u and v
  alone is added up per edge (:mod:`.conflicts`); the rest, delta(r) for u, v and r, is kept as a trie over r:
  delta(r) = M(u, v, r) - M(u, v) - sum over x in r of (M({x}) - M(empty)), the last being in the residual of x;
* any other bag below meets the state in an independent set of G, and its message for that is known.
"""

from typing import NamedTuple

import numpy as np

from nearchord_solve.kernels.cliques import depth_limit
from nearchord_solve.kernels.compiled import I32, I64, U64, inlined, kernel, lowest
from nearchord_solve.kernels.layout import Tries
from nearchord_solve.sweep.kernels.gaps import MOST_GAP, Bag
from nearchord_solve.sweep.kernels.tables import retract

ONE = np.uint64(1)
FULL = -(2**63)  # no value or gap


class PairTries(NamedTuple):
    """Kept messages for states with both ends of an edge: as ``Tries``, and which are whose.

    Bag b has the records ``first[b]:behind[b]``; a record is about slots ``low < high`` and has the nodes
    ``begin:end``.
    """

    label: I32
    close: I64
    delta: I64
    first: I64  # [B]
    behind: I64  # [B]
    low: I32
    high: I32
    begin: I64
    end: I64
    filled: I64  # [2] nodes, records


@inlined
def no_pairs(bags: int, room: int) -> PairTries:
    """Nothing kept yet, with room for so many nodes, and as many records."""
    return PairTries(
        np.empty(room, np.int32), np.empty(room, np.int64), np.empty(room, np.int64),
        np.zeros(bags, np.int64), np.zeros(bags, np.int64),
        np.empty(room, np.int32), np.empty(room, np.int32), np.empty(room, np.int64), np.empty(room, np.int64),
        np.zeros(2, np.int64),
    )  # fmt: skip


@inlined
def both_ways(rows: U64) -> U64:
    """Symmetric rows from upper ones."""
    full = rows.copy()
    for i in range(rows.shape[0]):
        for w in range(rows.shape[1]):
            word = rows[i, w]
            while word != 0:
                j = (w << 6) + lowest(word)
                word &= word - ONE
                full[j, i >> 6] |= ONE << np.uint64(i & 63)
    return full


@inlined
def find_records(bag: Bag, a: int, c: int, kept: PairTries) -> tuple[I64, I64]:
    """Messages from below about touched vertices a < c: (first node, end) int64[children] each.

    The end is -1 for children whose adhesion does not hold both with fill at each.
    """
    children = bag.children.shape[0]
    begin = np.zeros(children, np.int64)
    end = np.full(children, -1, np.int64)
    meets = np.zeros(children, np.uint8)
    for e in range(bag.meet_ptr[a], bag.meet_ptr[a + 1]):
        meets[bag.meet_child[e]] = 1
    for e in range(bag.meet_ptr[c], bag.meet_ptr[c + 1]):
        q = bag.meet_child[e]
        if not meets[q]:
            continue
        end[q] = 0
        low = kept.first[bag.children[q]]
        high = kept.behind[bag.children[q]]
        while low < high:
            middle = (low + high) >> 1
            if kept.low[middle] < bag.slots[a] or (
                kept.low[middle] == bag.slots[a] and kept.high[middle] < bag.slots[c]
            ):
                low = middle + 1
            else:
                high = middle
        if low < kept.behind[bag.children[q]] and kept.low[low] == bag.slots[a] and kept.high[low] == bag.slots[c]:
            begin[q] = kept.begin[low]
            end[q] = kept.end[low]
    return begin, end


@kernel
def pair_states(bag: Bag, tries: Tries, full: U64, a: int, c: int, start: int, down: bool, kept: PairTries) -> int:
    """Run through the states with touched vertices a < c, worth ``start`` before anything is chosen.

    With ``down``, a and c are in the adhesion: leaves M(u, v, r) as a trie behind the nodes of ``kept``, and returns
    M(u, v).  Without, at least one is at home: returns the least of (gap of t + M(t) - value) over the states, t being
    their adhesion part.  FULL if the room of ``kept`` does not suffice.  O(states * messages met).
    """
    count, words = bag.rows.shape
    begin, end = find_records(bag, a, c, kept)
    deepest = depth_limit(count, bag.edges) + 3
    stack = np.empty((deepest, words), np.uint64)
    value = np.empty(deepest, np.int64)
    node = np.empty(deepest, np.int64)
    chosen = np.empty(deepest, np.int64)
    need = np.empty(deepest, np.int64)  # the next of a and c that has to come, or count
    current = np.full(bag.children.shape[0], -1, np.int64)
    undo = np.empty(bag.meet_node.shape[0] + 1, np.int64)
    undone = int(np.int64(0))  # a literal 0 would compile what it is passed to twice
    for w in range(words):
        stack[0, w] = full[a, w] & full[c, w]
    stack[0, a >> 6] |= ONE << np.uint64(a & 63)
    stack[0, c >> 6] |= ONE << np.uint64(c & 63)
    value[0] = start
    node[0] = -1
    chosen[0] = -1
    need[0] = a
    best = MOST_GAP
    used = kept.filled[0]
    depth = 0
    while depth >= 0:
        w = 0
        while w < words and stack[depth, w] == 0:
            w += 1
        j = (w << 6) + lowest(stack[depth, w]) if w < words else count
        if j >= count or j > need[depth]:
            j = chosen[depth]
            if j >= 0:
                undone = retract(j, bag.meet_ptr, bag.meet_child, current, undo, undone)
                if down and j < bag.lead and j != a and j != c:
                    kept.close[node[depth]] = used
            depth -= 1
            continue
        stack[depth, w] &= stack[depth, w] - ONE
        total = value[depth]
        for e in range(bag.meet_ptr[j], bag.meet_ptr[j + 1]):
            q = bag.meet_child[e]
            old = current[q]
            undo[undone] = old
            undone += 1
            if end[q] >= 0:
                if j != a and j != c:
                    x = begin[q] if old < 0 else old + 1
                    while kept.label[x] != bag.slots[j]:
                        x = kept.close[x]
                    total += kept.delta[x] - (kept.delta[old] if old >= 0 else 0)
                    current[q] = x
            elif old < 0:
                current[q] = bag.meet_node[e]
            else:
                x = old + 1
                while tries.label[x] != bag.slots[j]:
                    x = tries.close[x]
                total += tries.delta[x] - tries.delta[old]
                current[q] = x
        at = node[depth]
        if j >= bag.lead:
            total += bag.gain[j]
        elif not down:
            at = bag.own if at < 0 else at + 1
            while tries.label[at] != bag.slots[j]:
                at = tries.close[at]
        elif j != a and j != c:
            if used == kept.label.shape[0]:
                return FULL
            at = used
            kept.label[at] = bag.slots[j]
            used += 1
        depth += 1
        for y in range(words):
            stack[depth, y] = stack[depth - 1, y] & bag.rows[j, y]
        if j == a:
            stack[depth, c >> 6] |= ONE << np.uint64(c & 63)
        need[depth] = c if j == a else count if j == c else need[depth - 1]
        value[depth] = total
        node[depth] = at
        chosen[depth] = j
        if need[depth] < count:
            continue
        if not down:
            best = min(best, (tries.delta[at] if at >= 0 else bag.none) - total)
        elif at >= 0:
            if j < bag.lead or total - kept.delta[at] > 0:
                kept.delta[at] = total
        elif j < bag.lead or total - best > 0:
            best = total
    kept.filled[0] = used
    return best


@inlined
def settle_pair(begin: int, end: int, alone: int, bag: Bag, single: I64, kept: PairTries) -> None:
    """Turn M(u, v, r) on nodes begin..end-1 into deltas; ``alone``: M(u, v), ``single`` int64[t]: M({x}) - M(empty)."""
    path_end = np.empty(end - begin + 1, np.int64)
    path_sum = np.empty(end - begin + 1, np.int64)
    path_sum[0] = 0
    depth = 0
    for x in range(begin, end):
        while depth > 0 and path_end[depth] <= x:
            depth -= 1
        path_sum[depth + 1] = path_sum[depth] + single[np.searchsorted(bag.slots, kept.label[x])]
        depth += 1
        path_end[depth] = kept.close[x]
        kept.delta[x] -= alone + path_sum[depth]
