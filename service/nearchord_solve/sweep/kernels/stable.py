"""The heaviest clique of G inside one bag with fill.

A bag is a clique of G + F, so what lies inside and is a clique of G is an independent set of F, and the vertices that
touch no fill belong to all heaviest ones.  What is lost are the vertices of a lightest vertex cover of F: only the
touched vertices matter, of which there are at most twice as many as fill edges.
"""

import numpy as np

from nearchord_solve.kernels.cells import STOP
from nearchord_solve.kernels.compiled import I64, U8, U64, kernel, lowest, ones

ONE = np.uint64(1)


@kernel
def cover_bound(near: U64, weight: I64, inside: U64, residual: I64, most: int) -> int:
    """An upper bound of the weight of independent sets of F inside ``inside``, by a weighted clique cover of F.

    An independent set meets each clique of F once.  Going up, each positive residual weight is taken from a clique
    grown over the lowest vertices.  ``near`` uint64[t, W] symmetric rows of F; ``residual`` int64[t] is overwritten.
    Ends early above ``most``.  O(t^2 W).
    """
    words = inside.shape[0]
    open_ = np.empty(words, np.uint64)
    total = int(np.int64(0))
    for w in range(words):
        word = inside[w]
        while word != 0:
            v = (w << 6) + lowest(word)
            word &= word - ONE
            residual[v] = weight[v]
    for w in range(words):
        word = inside[w]
        while word != 0:
            v = (w << 6) + lowest(word)
            word &= word - ONE
            gain = residual[v]
            if gain <= 0:
                continue
            total += gain
            if total > most:
                return int(total)
            for y in range(words):
                open_[y] = near[v, y] & inside[y]
            for y in range(w, words):
                while open_[y] != 0:
                    u = (y << 6) + lowest(open_[y])
                    open_[y] &= open_[y] - ONE
                    if u > v and residual[u] > 0:
                        residual[u] -= gain
                        for z in range(words):
                            open_[z] &= near[u, z]
    return int(total)


@kernel
def _busiest(near: U64, inside: U64) -> tuple[int, int]:
    """The vertex with most neighbours inside (ties to the lowest) and their number; (-1, 0) without an edge."""
    best = -1
    most = 0
    for w in range(inside.shape[0]):
        word = inside[w]
        while word != 0:
            v = (w << 6) + lowest(word)
            word &= word - ONE
            count = 0
            for y in range(inside.shape[0]):
                count += ones(near[v, y] & inside[y])
            if count > most:
                most = count
                best = v
    return best, most


@kernel
def heaviest_stable(
    near: U64, weight: I64, least: int, most_nodes: int, best: U8, cells: I64
) -> tuple[int, int, int]:  # fmt: skip
    """The heaviest independent set of F if it weighs more than ``least``: branch and bound on the busiest vertex.

    ``near`` uint64[t, W] symmetric rows, ``weight`` int64[t] >= 0.  ``best`` uint8[t] receives the set if one is
    found.  Returns (its weight or ``least``, a bound: the same if the search was complete, nodes looked at).  The
    search takes a vertex first, then leaves it out; each vertex taken shrinks what is open by its neighbours, and where
    no edge of F is left all that is open is taken.
    """
    t, words = near.shape
    room = np.zeros((2 * t + 2, words), np.uint64)
    took = np.zeros((2 * t + 2, words), np.uint64)
    value = np.zeros(2 * t + 2, np.int64)
    residual = np.zeros(t, np.int64)
    for v in range(t):
        room[0, v >> 6] |= ONE << np.uint64(v & 63)
    bound = cover_bound(near, weight, room[0], residual, 2**62)
    if bound <= least:
        return least, least, 0
    top = 1
    nodes = 0
    record = least
    while top > 0:
        if nodes >= most_nodes or cells[STOP] != 0:
            return record, max(record, bound), nodes
        top -= 1
        nodes += 1
        gap = record - value[top]
        if cover_bound(near, weight, room[top], residual, gap) <= gap:
            continue
        v, count = _busiest(near, room[top])
        if count == 0:
            total = value[top]
            for w in range(words):
                word = room[top, w]
                while word != 0:
                    total += weight[(w << 6) + lowest(word)]
                    word &= word - ONE
            record = total
            for u in range(t):
                inside = (room[top, u >> 6] | took[top, u >> 6]) >> np.uint64(u & 63) & ONE
                best[u] = 1 if inside != 0 else 0
            continue
        word = ~(ONE << np.uint64(v & 63))
        room[top, v >> 6] &= word
        value[top + 1] = value[top] + weight[v]
        for w in range(words):
            room[top + 1, w] = room[top, w] & ~near[v, w]
            took[top + 1, w] = took[top, w]
        took[top + 1, v >> 6] |= ONE << np.uint64(v & 63)
        top += 2
    return record, record, nodes
