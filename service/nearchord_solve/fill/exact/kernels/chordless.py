"""Separation of cycle cuts, see :mod:`nearchord_solve.fill.exact.cycles`.

``graph`` uint64[n, W] are the bit rows of the graph; ``present`` float64[n, n] is 1 on edges, x elsewhere, 0 on the
diagonal.
"""

import numpy as np

from nearchord_solve.fill.exact.kernels.words import F64, unpack
from nearchord_solve.fill.kernels.dense import holds, set_pair
from nearchord_solve.kernels.cells import STOP
from nearchord_solve.kernels.compiled import I32, I64, U64, kernel, lowest


@kernel
def presence(rows: U64, x: F64) -> F64:
    """1.0 at edges and x elsewhere: float64[n, n].  ``x`` float64[n, n], or of shape (0, 0) for 0 everywhere."""
    n = rows.shape[0]
    matrix = np.zeros((n, n), np.float64)
    for a in range(n):
        for b in range(n):
            if holds(rows, a, b):
                matrix[a, b] = 1.0
            elif x.shape[0] > 0:
                matrix[a, b] = x[a, b]
    return matrix


@kernel
def round_up(present: F64, threshold: float, rows: U64) -> None:
    """Add to ``rows`` all pairs with ``present`` at or above the threshold."""
    n = present.shape[0]
    for a in range(n):
        for b in range(a + 1, n):
            if present[a, b] >= threshold:
                set_pair(rows, a, b)


@kernel
def four_cycles(graph: U64, present: F64, least: float) -> tuple[I32, F64]:
    """Violated cuts of 4-cycles a b c d: for each non-adjacent a < c and each b the best d after b.

    Returns the cycles int32[k, 4] and by how much their cuts are violated, float64[k].
    """
    n = graph.shape[0]
    room = np.empty((64, 4), np.int32)
    gain = np.empty(64, np.float64)
    count = 0
    near = np.empty(n, np.int64)
    beside = np.empty(n, np.int64)
    for a in range(n):
        degree = 0
        for b in range(n):
            if b != a and present[a, b] > least:
                beside[degree] = b
                degree += 1
        for c in range(a + 1, n):
            if holds(graph, a, c) or present[a, c] >= 1.0 - least:
                continue
            found = 0
            for k in range(degree):
                b = beside[k]
                if b != c and present[a, b] + present[b, c] - 1.0 > present[a, c] + least:
                    near[found] = b
                    found += 1
            for i in range(found):
                partner, value = _opposite(graph, present, a, c, near, i, found)
                if value > least:
                    if count == gain.shape[0]:
                        room = np.concatenate((room, np.empty_like(room)))
                        gain = np.concatenate((gain, np.empty_like(gain)))
                    room[count, 0] = a
                    room[count, 1] = near[i]
                    room[count, 2] = c
                    room[count, 3] = partner
                    gain[count] = value
                    count += 1
    return room[:count], gain[:count]


@kernel
def _opposite(graph: U64, present: F64, a: int, c: int, near: I64, i: int, found: int) -> tuple[int, float]:
    """The d among near[i+1:found] that makes the cut of a, near[i], c, d most violated, and by how much."""
    b = near[i]
    best = 0.0
    partner = -1
    for j in range(i + 1, found):
        d = near[j]
        if not holds(graph, b, d):
            sides = present[a, b] + present[b, c] + present[a, d] + present[d, c]
            value = sides - 3.0 - present[a, c] - present[b, d]
            if value > best:
                best = value
                partner = d
    return partner, best


@kernel
def violation(path: I64, steps: int, present: F64) -> float:
    """By how much the cut of a cycle without chords in the graph is violated: positive if it is."""
    chords = 0.0
    absent = 0.0
    for i in range(steps):
        for j in range(i + 1, steps):
            if j == i + 1 or (i == 0 and j == steps - 1):
                absent += 1.0 - present[path[i], path[j]]
            else:
                chords += present[path[i], path[j]]
    return (steps - 3) * (1.0 - absent) - chords


@kernel
def _trace(b: int, c: int, a: int, back: I64, path: I64) -> int:
    """Write the cycle b, c, ..., a along ``back``; returns its length."""
    path[0] = b
    steps = 1
    u = c
    while u != a:
        path[steps] = u
        steps += 1
        u = back[u]
    path[steps] = a
    return steps + 1


@kernel
def _worst_through(
    rounded: U64, present: F64, b: int, near: I64, i: int, degree: int, back: I64, queue: I64, path: I64, kept: I64
) -> tuple[int, float]:
    """The most violated of the shortest chordless cycles a = near[i], ..., c = near[j], b with j > i.

    Searches breadth-first from a through vertices not adjacent to b; a path that ends at c not adjacent to a
    has no chord because it is shortest.  Writes the cycle to ``kept``; returns its length (0 if none) and violation.
    """
    width = rounded.shape[1]
    a = near[i]
    back[:] = -1
    back[a] = a
    back[b] = b
    queue[0] = a
    head = 0
    tail = 1
    best = 0.0
    length = 0
    while head < tail:
        v = queue[head]
        head += 1
        if v != a:
            for j in range(i + 1, degree):
                c = near[j]
                if back[c] < 0 and holds(rounded, v, c) and not holds(rounded, a, c):
                    back[c] = v
                    steps = _trace(b, c, a, back, path)
                    value = violation(path, steps, present)
                    if value > best:
                        best = value
                        length = steps
                        kept[:steps] = path[:steps]
        for w in range(width):
            fresh = rounded[v, w] & ~rounded[b, w]
            while fresh != 0:
                u = 64 * w + lowest(fresh)
                fresh &= fresh - np.uint64(1)
                if back[u] < 0:
                    back[u] = v
                    queue[tail] = u
                    tail += 1
    return length, best


@kernel
def long_cycles(rounded: U64, present: F64, least: float, cells: I64) -> tuple[I32, I64, F64]:
    """Violated cuts of cycles that are chordless in ``rounded`` uint64[n, W], which contains the graph.

    For each b and each neighbour a of b the most violated one of those found.  Returns the vertices of all cycles
    one after another int32, the end of each int64, the violation of each float64; fewer when stopped.
    O(n m) searches of O(n W).
    """
    n = rounded.shape[0]
    flat = np.empty(1024, np.int32)
    ends = np.empty(128, np.int64)
    gains = np.empty(128, np.float64)
    used = 0
    count = 0
    near = np.empty(n, np.int64)
    back = np.empty(n, np.int64)
    queue = np.empty(n, np.int64)
    path = np.empty(n + 1, np.int64)
    kept = np.empty(n + 1, np.int64)
    for b in range(n):
        if cells[STOP] != 0:
            break
        degree = unpack(rounded[b], near)
        for i in range(degree):
            length, value = _worst_through(rounded, present, b, near, i, degree, back, queue, path, kept)
            if value <= least:
                continue
            if used + length > flat.shape[0]:
                flat = np.concatenate((flat, np.empty(used + length, np.int32)))
            if count == ends.shape[0]:
                ends = np.concatenate((ends, np.empty(count, np.int64)))
                gains = np.concatenate((gains, np.empty(count, np.float64)))
            flat[used : used + length] = kept[:length]
            used += length
            ends[count] = used
            gains[count] = value
            count += 1
    return flat[:used], ends[:count], gains[:count]
