"""Triangulation inside one fill core, on bitset rows.

Symbols: k vertices, W = ceil(k / 64) words a row; ``real`` uint64[k, W] are the rows of G (no diagonal), ``full``
uint64[k, W] the rows of a triangulation H of G.  Bit j of row i stands for the pair {i, j}.
"""

import numpy as np

from nearchord_solve.kernels.cells import STOP
from nearchord_solve.kernels.compiled import I32, I64, U64, kernel, lowest, ones

ONE = np.uint64(1)
WORD = 64


@kernel
def set_pair(rows: U64, i: int, j: int) -> None:
    """Set the pair {i, j} in both rows."""
    rows[i, j >> 6] |= ONE << np.uint64(j & 63)
    rows[j, i >> 6] |= ONE << np.uint64(i & 63)


@kernel
def drop_pair(rows: U64, i: int, j: int) -> None:
    """Clear the pair {i, j} in both rows."""
    rows[i, j >> 6] &= ~(ONE << np.uint64(j & 63))
    rows[j, i >> 6] &= ~(ONE << np.uint64(i & 63))


@kernel
def holds(rows: U64, i: int, j: int) -> bool:
    """Whether bit j of row i is set."""
    return bool((rows[i, j >> 6] >> np.uint64(j & 63)) & ONE)


@kernel
def list_fill(real: U64, full: U64) -> I32:
    """The fill edges of ``full``: int32[f, 2], pairs i < j, ascending."""
    k, words = real.shape
    total = 0
    for i in range(k):
        for w in range(words):
            total += ones(full[i, w] & ~real[i, w])
    pairs = np.empty((total // 2, 2), np.int32)
    write = 0
    for i in range(k):
        for w in range(i >> 6, words):
            word = full[i, w] & ~real[i, w]
            while word != 0:
                j = (w << 6) + lowest(word)
                word &= word - ONE
                if j > i:
                    pairs[write, 0] = i
                    pairs[write, 1] = j
                    write += 1
    return pairs


@kernel
def spent(effort: I64, words: int, cells: I64) -> bool:
    """Take ``words`` from the effort left (int64[1]); whether it is used up, or a stop is asked for."""
    effort[0] -= words
    return bool(effort[0] < 0 or cells[STOP] != 0)


@kernel
def _meet_in_clique(full: U64, u: int, v: int, effort: I64) -> bool:
    """Whether the common neighbours of u and v in ``full`` are pairwise adjacent."""
    words = full.shape[1]
    for w in range(words):
        common = full[u, w] & full[v, w]
        while common != 0:
            x = (w << 6) + lowest(common)
            common &= common - ONE
            for y in range(words):
                rest = full[u, y] & full[v, y] & ~full[x, y]
                if y == w:
                    rest &= ~(ONE << np.uint64(x & 63))
                if rest != 0:
                    effort[0] -= y
                    return False
            effort[0] -= words
    return True


@kernel
def thin(full: U64, pairs: I32, effort: I64, cells: I64) -> tuple[int, bool]:
    """Drop fill edges until none can go; ``full`` then is a minimal triangulation.

    A fill edge uv of a chordal graph may go, leaving it chordal, iff the common neighbours of u and v form a
    clique: a chordless cycle after the removal would pass u, x, v, y with x and y common neighbours that are
    not adjacent.  And a triangulation from which no single fill edge can go is minimal (Rose, Tarjan and
    Lueker, SIAM J. Comput. 5 (1976) 266-283).  An edge is looked at again only when an end of it has lost an
    edge since: otherwise its common neighbours are the same and no more of them are adjacent.

    ``full`` is changed in place; ``pairs`` int32[f, 2] is overwritten.  Returns (number of fill edges that stay,
    the first rows of ``pairs``; whether none of them can go).  When the effort is spent or a stop is asked for,
    a valid triangulation is left.
    """
    count = int(pairs.shape[0])
    lost = np.zeros(full.shape[0], np.int64)
    turn = 0
    finished = False
    while not finished:
        turn += 1
        finished = True
        kept = 0
        for e in range(count):
            u = pairs[e, 0]
            v = pairs[e, 1]
            again = lost[u] >= turn - 1 or lost[v] >= turn - 1
            if again and spent(effort, 1, cells):
                return _close_up(pairs, kept, e, count), False
            if again and _meet_in_clique(full, u, v, effort):
                drop_pair(full, u, v)
                lost[u] = turn
                lost[v] = turn
                finished = False
            else:
                pairs[kept, 0] = u
                pairs[kept, 1] = v
                kept += 1
        count = kept
    return count, True


@kernel
def _close_up(pairs: I32, kept: int, begin: int, end: int) -> int:
    """Move rows begin..end-1 behind the first ``kept`` ones; returns the number of rows then."""
    for e in range(begin, end):
        pairs[kept, 0] = pairs[e, 0]
        pairs[kept, 1] = pairs[e, 1]
        kept += 1
    return kept


@kernel
def fill_by_degree(real: U64, full: U64, effort: I64, cells: I64) -> bool:
    """Overwrite ``full`` with the triangulation of repeatedly eliminating a vertex of least degree.

    Ties go to the lowest index.  O(k^2 + sum of degrees * W) time.  Returns False if stopped or out of
    effort.
    """
    k, words = real.shape
    full[:] = real
    alive = np.zeros(words, np.uint64)
    degree = np.zeros(k, np.int64)
    for v in range(k):
        alive[v >> 6] |= ONE << np.uint64(v & 63)
        for w in range(words):
            degree[v] += ones(real[v, w])
    for _ in range(k):
        if spent(effort, k, cells):
            return False
        best = -1
        for v in range(k):
            if degree[v] >= 0 and (best < 0 or degree[v] < degree[best]):
                best = v
        degree[best] = -1
        alive[best >> 6] &= ~(ONE << np.uint64(best & 63))
        for w in range(words):
            word = full[best, w] & alive[w]
            while word != 0:
                u = (w << 6) + lowest(word)
                word &= word - ONE
                size = 0
                for y in range(words):
                    full[u, y] |= full[best, y] & alive[y]
                    if y == w:
                        full[u, y] &= ~(ONE << np.uint64(u & 63))
                    size += ones(full[u, y] & alive[y])
                degree[u] = size
                effort[0] -= words
    return True


@kernel
def _missing(full: U64, alive: U64, v: int, effort: I64) -> int:
    """Number of non-adjacent pairs among the neighbours of v that are alive."""
    words = full.shape[1]
    lacking = 0
    for w in range(words):
        word = full[v, w] & alive[w]
        while word != 0:
            u = (w << 6) + lowest(word)
            word &= word - ONE
            for y in range(words):
                lacking += ones(full[v, y] & alive[y] & ~full[u, y])
            lacking -= 1
            effort[0] -= words
    return lacking // 2


@kernel
def fill_by_missing(real: U64, full: U64, effort: I64, cells: I64) -> bool:
    """Overwrite ``full`` with the triangulation of repeatedly eliminating a vertex that adds least fill.

    Ties go to the lowest index.  When ab is added, each common neighbour lacks one pair less; neighbours of
    the eliminated vertex are counted anew.  Returns False if stopped or out of effort.
    """
    k, words = real.shape
    full[:] = real
    alive = np.zeros(words, np.uint64)
    for v in range(k):
        alive[v >> 6] |= ONE << np.uint64(v & 63)
    lacking = np.empty(k, np.int64)
    for v in range(k):
        if spent(effort, 0, cells):
            return False
        lacking[v] = _missing(full, alive, v, effort)
    around = np.empty(k, np.int32)
    for _ in range(k):
        if spent(effort, k, cells):
            return False
        best = -1
        for v in range(k):
            if lacking[v] >= 0 and (best < 0 or lacking[v] < lacking[best]):
                best = v
        alive[best >> 6] &= ~(ONE << np.uint64(best & 63))
        count = 0
        for w in range(words):
            word = full[best, w] & alive[w]
            while word != 0:
                around[count] = (w << 6) + lowest(word)
                count += 1
                word &= word - ONE
        if lacking[best] > 0:
            for p in range(count):
                for q in range(p + 1, count):
                    if not holds(full, around[p], around[q]):
                        effort[0] -= words
                        _add_and_discount(full, alive, around[p], around[q], lacking)
        lacking[best] = -1
        for p in range(count):
            if spent(effort, 0, cells):
                return False
            lacking[around[p]] = _missing(full, alive, around[p], effort)
    return True


@kernel
def _add_and_discount(full: U64, alive: U64, a: int, b: int, lacking: I64) -> None:
    for w in range(full.shape[1]):
        word = full[a, w] & full[b, w] & alive[w]
        while word != 0:
            lacking[(w << 6) + lowest(word)] -= 1
            word &= word - ONE
    set_pair(full, a, b)


@kernel
def number_from(full: U64, anchors: int, order: I32) -> None:
    """Number the chordal graph ``full`` by maximum cardinality search that begins with vertices 0..anchors-1.

    These must form a clique; then preferring them on ties is a run of the search, so the reverse of ``order``
    (int32[k], overwritten) is a perfect elimination order.  Other ties go to the lowest index.  O(k^2) time.
    """
    k, words = full.shape
    seen = np.zeros(k, np.int64)
    for place in range(k):
        best = place
        if place >= anchors:
            best = -1
            for v in range(k):
                if seen[v] >= 0 and (best < 0 or seen[v] > seen[best]):
                    best = v
        order[place] = best
        seen[best] = -1
        for w in range(words):
            word = full[best, w]
            while word != 0:
                v = (w << 6) + lowest(word)
                word &= word - ONE
                if seen[v] >= 0:
                    seen[v] += 1
