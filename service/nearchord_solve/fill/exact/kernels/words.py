"""Vertex sets as rows of uint64 words, and graphs as bit rows uint64[n, W] with W = ceil(n / 64)."""

from typing import Any

import numpy as np
from numpy.typing import NDArray

from nearchord_solve.fill.kernels.dense import set_pair
from nearchord_solve.kernels.compiled import I32, I64, U64, kernel, lowest

F64 = NDArray[Any]


@kernel
def unpack(words: U64, found: I64) -> int:
    """Write the members of one set, ascending, into ``found`` int64; returns their number."""
    count = 0
    for w in range(words.shape[0]):
        left = words[w]
        while left != 0:
            found[count] = 64 * w + lowest(left)
            count += 1
            left &= left - np.uint64(1)
    return count


@kernel
def contains(words: U64, v: int) -> bool:
    """Whether v is in the set."""
    return bool((words[v >> 6] >> np.uint64(v & 63)) & np.uint64(1))


@kernel
def fill_up(words: U64, count: int) -> None:
    """Overwrite a set with vertices 0..count-1."""
    for w in range(words.shape[0]):
        words[w] = np.uint64(0)
    for v in range(count):
        words[v >> 6] |= np.uint64(1) << np.uint64(v & 63)


@kernel
def leave_out(words: U64, v: int) -> None:
    """Remove v from the set."""
    words[v >> 6] &= ~(np.uint64(1) << np.uint64(v & 63))


@kernel
def side(rows: U64, start: int, left: U64, part: U64, near: U64, stack: I64) -> None:
    """Move the component of ``left`` that holds ``start`` to ``part``; ``near`` gets all neighbours of its vertices.

    ``rows`` uint64[n, W]; ``left``, ``part``, ``near`` uint64[W] and ``stack`` int64[n] are overwritten.
    """
    for w in range(left.shape[0]):
        part[w] = np.uint64(0)
        near[w] = np.uint64(0)
    part[start >> 6] |= np.uint64(1) << np.uint64(start & 63)
    leave_out(left, start)
    stack[0] = start
    height = 1
    while height > 0:
        height -= 1
        v = stack[height]
        for w in range(left.shape[0]):
            near[w] |= rows[v, w]
            fresh = rows[v, w] & left[w]
            left[w] &= ~fresh
            part[w] |= fresh
            while fresh != 0:
                stack[height] = 64 * w + lowest(fresh)
                height += 1
                fresh &= fresh - np.uint64(1)


@kernel
def lacking(rows: U64, chosen: U64, pair: I64) -> int:
    """Non-adjacent pairs in a set, counted up to 2; ``pair`` int64[2] is overwritten with the first, smaller end first.

    0 says that the set is a clique.  O(members * W).
    """
    count = 0
    for v_word in range(chosen.shape[0]):
        left = chosen[v_word]
        while left != 0:
            v = 64 * v_word + lowest(left)
            left &= left - np.uint64(1)
            for w in range(v_word, chosen.shape[0]):
                missing = chosen[w] & ~rows[v, w]
                if w == v_word:
                    missing &= left
                if missing != 0:
                    if count > 0 or missing & (missing - np.uint64(1)) != 0:
                        return 2
                    pair[0] = v
                    pair[1] = 64 * w + lowest(missing)
                    count = 1
    return count


@kernel
def written(ptr: I64, adj: I32) -> U64:
    """Bit rows of symmetric compressed rows."""
    n = ptr.shape[0] - 1
    rows = np.zeros((n, max(1, (n + 63) // 64)), np.uint64)
    for v in range(n):
        for e in range(ptr[v], ptr[v + 1]):
            rows[v, adj[e] >> 6] |= np.uint64(1) << np.uint64(adj[e] & 63)
    return rows


@kernel
def set_pairs(rows: U64, pairs: I32) -> None:
    """Add ``pairs`` int32[k, 2] to bit rows."""
    for e in range(pairs.shape[0]):
        set_pair(rows, pairs[e, 0], pairs[e, 1])


@kernel
def lifted(pairs: I32, start: I64, member: I32) -> I32:
    """All pairs between the classes of each pair, int32[l, 2], smaller end first.

    Class v is member[start[v]:start[v+1]]; ``pairs`` int32[k, 2].
    """
    total = np.int64(0)
    for e in range(pairs.shape[0]):
        a = pairs[e, 0]
        b = pairs[e, 1]
        total += (start[a + 1] - start[a]) * (start[b + 1] - start[b])
    found = np.empty((total, 2), np.int32)
    at = 0
    for e in range(pairs.shape[0]):
        for i in range(start[pairs[e, 0]], start[pairs[e, 0] + 1]):
            for j in range(start[pairs[e, 1]], start[pairs[e, 1] + 1]):
                found[at, 0] = min(member[i], member[j])
                found[at, 1] = max(member[i], member[j])
                at += 1
    return found


@kernel
def induced(rows: U64, kept: I32) -> U64:
    """Bit rows of the graph on ``kept`` int32[k], ascending, renumbered 0..k-1.  O(k W) and the edges kept."""
    count = kept.shape[0]
    chosen = np.zeros(rows.shape[1], np.uint64)
    number = np.zeros(rows.shape[0], np.int32)
    for i in range(count):
        chosen[kept[i] >> 6] |= np.uint64(1) << np.uint64(kept[i] & 63)
        number[kept[i]] = i
    smaller = np.zeros((count, max(1, (count + 63) // 64)), np.uint64)
    for i in range(count):
        for w in range(rows.shape[1]):
            left = rows[kept[i], w] & chosen[w]
            while left != 0:
                j = number[64 * w + lowest(left)]
                left &= left - np.uint64(1)
                smaller[i, j >> 6] |= np.uint64(1) << np.uint64(j & 63)
    return smaller


@kernel
def permuted(rows: U64, order: I64) -> U64:
    """Bit rows of the same graph with vertex order[i] renumbered i; ``order`` int64[n]."""
    n, width = rows.shape
    place = np.empty(n, np.int64)
    for i in range(n):
        place[order[i]] = i
    moved = np.zeros((n, width), np.uint64)
    for v in range(n):
        for w in range(width):
            left = rows[v, w]
            while left != 0:
                i = place[64 * w + lowest(left)]
                left &= left - np.uint64(1)
                moved[place[v], i >> 6] |= np.uint64(1) << np.uint64(i & 63)
    return moved
