"""Cycles as rows of a linear program, see :mod:`nearchord_solve.fill.exact.cuts`.

Cycle i is ``vertex[ptr[i]:ptr[i+1]]``; a pair a < b has the number a * n + b.
"""

import numpy as np

from nearchord_solve.fill.kernels.dense import holds
from nearchord_solve.fill.kernels.packing import shortest_path, take
from nearchord_solve.kernels.cells import STOP
from nearchord_solve.kernels.compiled import I32, I64, U64, kernel, lowest

ONE = np.uint64(1)


@kernel
def write_cuts(rows: U64, ptr: I64, vertex: I32) -> tuple[I64, I64, I64, I64]:
    """The cut of each cycle: (start int64[k+1], pair int64, coefficient int64, least int64[k]).

    Its entries from start[i] to start[i+1] - 1 are its chords, with coefficient 1, and its open sides, with 3 - c;
    their sum over a fill is at least least[i] = (c - 3) (1 - open sides).
    """
    n = rows.shape[0]
    count = ptr.shape[0] - 1
    start = np.zeros(count + 1, np.int64)
    room = np.int64(0)
    for i in range(count):
        c = ptr[i + 1] - ptr[i]
        room += c * (c - 1) // 2
    pair = np.empty(room, np.int64)
    coefficient = np.empty(room, np.int64)
    least = np.empty(count, np.int64)
    at = 0
    for i in range(count):
        c = ptr[i + 1] - ptr[i]
        opened = 0
        for j in range(c):
            a = int(vertex[ptr[i] + j])
            for k in range(j + 1, c):
                b = int(vertex[ptr[i] + k])
                on_side = k == j + 1 or (j == 0 and k == c - 1)
                if on_side and holds(rows, a, b):
                    continue
                pair[at] = min(a, b) * n + max(a, b)
                coefficient[at] = 3 - c if on_side else 1
                opened += on_side
                at += 1
        least[i] = (c - 3) * (1 - opened)
        start[i + 1] = at
    return start, pair[:at], coefficient[:at], least


@kernel
def pick(n: int, ptr: I64, vertex: I32, most: int, a_pair: int) -> I64:
    """The first ``most`` cycles, passing over those whose chords have all been in ``a_pair`` picked ones already."""
    used = np.zeros((n, n), np.int32)
    picked = np.empty(most, np.int64)
    count = 0
    for i in range(ptr.shape[0] - 1):
        if count == most:
            break
        c = ptr[i + 1] - ptr[i]
        worn = True
        for turn in range(2):
            if turn == 1 and worn:
                break
            for j in range(c - 2):
                for k in range(j + 2, c - (j == 0)):
                    a = vertex[ptr[i] + j]
                    b = vertex[ptr[i] + k]
                    if turn == 1:
                        used[min(a, b), max(a, b)] += 1
                    elif used[min(a, b), max(a, b)] < a_pair:
                        worn = False
        if not worn:
            picked[count] = i
            count += 1
    return picked[:count]


@kernel
def _opposite(rows: U64, a: int, b: int, v: int) -> int:
    """The lowest common neighbour of a and b that is not adjacent to their common neighbour v, or -1."""
    for w in range(rows.shape[1]):
        word = rows[a, w] & rows[b, w] & ~rows[v, w]
        if w == v >> 6:
            word &= ~(ONE << np.uint64(v & 63))
        if word != 0:
            return (w << 6) + lowest(word)
    return -1


@kernel
def _cheapest_chord(sizes: I64, cycle: I32, length: int) -> int:
    """The least product of the sizes of two vertices of a cycle that do not follow each other."""
    least = np.int64(2**62)
    for i in range(length - 2):
        for j in range(i + 2, length - (i == 0)):
            least = min(least, sizes[cycle[i]] * sizes[cycle[j]])
    return int(least)


@kernel
def disjoint_cycles(rows: U64, sizes: I64, pairs: I32, tries: int, cells: I64) -> tuple[I64, I32, I64]:
    """Chordless cycles of which no two share a non-edge, and what the cheapest chord of each costs.

    Returns (ptr int64[k+1], vertex int32, cost int64[k]).  ``rows`` uint64[n, W], ``sizes`` int64[n]; ``pairs``
    int32[f, 2]: the fill of some triangulation.  Each chordless cycle has a vertex whose two neighbours on it are
    joined by fill, so only such (fill edge, common neighbour) are tried: cycles on four vertices first, as they use the
    fewest non-edges for what they add, then all, by at most ``tries`` shortest paths.  Fewer when stopped.
    """
    n, words = rows.shape
    used = np.zeros((n, words), np.uint64)
    before = np.empty(n, np.int32)
    queue = np.empty(n, np.int32)
    cycle = np.empty(n + 1, np.int32)
    ptr = np.zeros(64, np.int64)
    vertex = np.empty(1024, np.int32)
    cost = np.empty(64, np.int64)
    count = 0
    for long in range(2):
        for e in range(pairs.shape[0]):
            a = pairs[e, 0]
            b = pairs[e, 1]
            if cells[STOP] != 0:
                break
            for w in range(words):
                word = rows[a, w] & rows[b, w]
                while word != 0 and not holds(used, a, b):
                    v = (w << 6) + lowest(word)
                    word &= word - ONE
                    length = 0
                    if long == 0:
                        before[b] = _opposite(rows, a, b, v)
                        if before[b] >= 0:
                            before[before[b]] = a
                            length = 4
                    elif tries > 0:
                        tries -= 1
                        length = shortest_path(rows, a, b, v, before, queue) + 1
                    if length < 4:
                        continue
                    y = b
                    for i in range(length - 1):
                        cycle[i] = y
                        y = before[y]
                    cycle[length - 1] = v
                    if not take(rows, used, cycle, length):
                        continue
                    if count + 2 > ptr.shape[0]:
                        ptr = np.concatenate((ptr, np.empty_like(ptr)))
                        cost = np.concatenate((cost, np.empty_like(cost)))
                    if ptr[count] + length > vertex.shape[0]:
                        vertex = np.concatenate((vertex, np.empty(ptr[count] + length, np.int32)))
                    vertex[ptr[count] : ptr[count] + length] = cycle[:length]
                    ptr[count + 1] = ptr[count] + length
                    cost[count] = _cheapest_chord(sizes, cycle, length)
                    count += 1
    return ptr[: count + 1].copy(), vertex[: ptr[count]].copy(), cost[:count].copy()
