"""Cuts: cycles that need chords.

Let C be a cycle on c >= 4 vertices of which no chord is an edge of the graph, and let K of its sides be non-edges.  A triangulation
that contains all K sides contains c - 3 chords of C (a triangulated c-gon has that many), so with x = 1 on fill
edges

    sum of x over the chords of C  >=  (c - 3) (1 - sum over the K sides of (1 - x)).

For K = 0 these are the chordless cycles of the graph.  The separation looks for violated cuts at a point x: all
4-cycles exactly, longer ones among shortest paths in the graph with the pairs of x >= some threshold added.
"""

import numpy as np
from numpy.typing import NDArray

from nearchord_solve.fill.exact.core import Core
from nearchord_solve.fill.exact.words import has, rows_of, unpack
from nearchord_solve.kernels.compiled import I64, U64, kernel, lowest

F64 = NDArray[np.float64]
Cycle = tuple[int, ...]

LEAST_VIOLATION = 1e-4


def canonical(cycle: list[int]) -> Cycle:
    """The rotation and direction that starts at the lowest vertex and goes to its lower neighbour."""
    at = cycle.index(min(cycle))
    turned = cycle[at:] + cycle[:at]
    if turned[1] > turned[-1]:
        turned = [turned[0], *reversed(turned[1:])]
    return tuple(turned)


def violated(core: Core, x: F64, thresholds: tuple[float, ...], enough: int) -> list[Cycle]:
    """Cycles whose cuts are violated at ``x`` float64[n, n] (symmetric, 0 on edges), the worst first.

    Thresholds are tried in turn until ``enough`` are found.
    """
    graph = rows_of(core.adj)
    present = np.maximum(x, adjacency(graph))
    found: dict[Cycle, float] = {}
    room = np.empty((core.n * core.n, 4), np.int64)
    gain = np.empty(core.n * core.n, np.float64)
    count = four_cycles(graph, present, LEAST_VIOLATION, room, gain)
    for vertices, value in zip(room[:count].tolist(), gain[:count].tolist(), strict=True):
        found[canonical(vertices)] = value
    for threshold in thresholds:
        rounded = graph.copy()
        round_up(present, threshold, rounded)
        flat, ends, gains = long_cycles(rounded, graph, present, LEAST_VIOLATION)
        start = 0
        for end, value in zip(ends.tolist(), gains.tolist(), strict=True):
            found[canonical(flat[start:end].tolist())] = value
            start = end
        if len(found) >= enough:
            break
    return sorted(found, key=lambda cycle: (-found[cycle], cycle))


@kernel
def adjacency(rows: U64) -> F64:
    """1.0 at edges and 0.0 elsewhere: float64[n, n]."""
    n = rows.shape[0]
    matrix = np.zeros((n, n), np.float64)
    for a in range(n):
        for b in range(n):
            if has(rows, a, b):
                matrix[a, b] = 1.0
    return matrix


@kernel
def round_up(present: F64, threshold: float, rows: U64) -> None:
    """Add to ``rows`` all pairs with ``present`` at or above the threshold."""
    n = present.shape[0]
    for a in range(n):
        for b in range(a + 1, n):
            if present[a, b] >= threshold:
                rows[a, b >> 6] |= np.uint64(1) << np.uint64(b & 63)
                rows[b, a >> 6] |= np.uint64(1) << np.uint64(a & 63)


@kernel
def four_cycles(graph: U64, present: F64, least: float, room: I64, gain: F64) -> int:
    """Violated cuts of 4-cycles a b c d: for each non-adjacent a < c and each b the best d > b.

    ``graph`` uint64[n, W]; ``present`` float64[n, n] is 1 on edges and x elsewhere; ``room`` int64[k, 4] and ``gain`` float64[k] are
    overwritten up to the returned count, which never passes k.
    """
    n = graph.shape[0]
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
            if has(graph, a, c) or present[a, c] >= 1.0 - least:
                continue
            across = present[a, c]
            found = 0
            for k in range(degree):
                b = beside[k]
                if b != c and present[a, b] + present[b, c] - 1.0 > across + least:
                    near[found] = b
                    found += 1
            for i in range(found):
                b = near[i]
                first = present[a, b] + present[b, c] - 1.0
                best = least
                partner = -1
                for j in range(i + 1, found):
                    d = near[j]
                    if has(graph, b, d):
                        continue
                    value = first + present[a, d] + present[d, c] - 2.0 - across - present[b, d]
                    if value > best:
                        best = value
                        partner = d
                if partner >= 0 and count < room.shape[0]:
                    room[count, 0] = a
                    room[count, 1] = b
                    room[count, 2] = c
                    room[count, 3] = partner
                    gain[count] = best
                    count += 1
    return count


@kernel
def long_cycles(rounded: U64, graph: U64, present: F64, least: float) -> tuple[I64, I64, F64]:
    """Violated cuts of longer cycles that are chordless in ``rounded``.

    For each b and each neighbour a of b: shortest paths from a to the other neighbours of b that are not adjacent to
    a, through vertices not adjacent to b; with b they close chordless cycles.  For each (b, a) the most violated one is kept, b
    being its lowest vertex or not.  Returns (vertices of all cycles one after another, end of each, violation of each).
    O(n m W) time.
    """
    n, width = rounded.shape
    flat = np.empty(1024, np.int64)
    ends = np.empty(128, np.int64)
    gains = np.empty(128, np.float64)
    used = 0
    count = 0
    near = np.empty(n, np.int64)
    back = np.empty(n, np.int64)
    queue = np.empty(n, np.int64)
    path = np.empty(n + 1, np.int64)
    kept = np.empty(n + 1, np.int64)
    open_ = np.empty(width, np.uint64)
    for b in range(n):
        degree = unpack(rounded[b], near)
        for i in range(degree):
            a = near[i]
            for w in range(width):
                open_[w] = ~rounded[b, w]
            for v in range(n):
                back[v] = -1
            back[a] = a
            queue[0] = a
            head = 0
            tail = 1
            best = least
            length = 0
            while head < tail:
                v = queue[head]
                head += 1
                if v != a:
                    for j in range(i + 1, degree):
                        c = near[j]
                        if back[c] < 0 and has(rounded, v, c) and not has(rounded, a, c):
                            back[c] = v
                            steps = 0
                            path[steps] = b
                            steps += 1
                            u = c
                            while u != a:
                                path[steps] = u
                                steps += 1
                                u = back[u]
                            path[steps] = a
                            steps += 1
                            if steps >= 4:
                                value = violation(path, steps, graph, present)
                                if value > best:
                                    best = value
                                    length = steps
                                    for k in range(steps):
                                        kept[k] = path[k]
                for w in range(width):
                    fresh = rounded[v, w] & open_[w]
                    if w == b >> 6:
                        fresh &= ~(np.uint64(1) << np.uint64(b & 63))
                    open_[w] &= ~fresh
                    while fresh != 0:
                        u = 64 * w + lowest(fresh)
                        fresh &= fresh - np.uint64(1)
                        back[u] = v
                        queue[tail] = u
                        tail += 1
            if length > 0:
                if used + length > flat.shape[0]:
                    larger = np.empty(2 * (used + length), np.int64)
                    larger[:used] = flat[:used]
                    flat = larger
                if count == ends.shape[0]:
                    more = np.empty(2 * count, np.int64)
                    more[:count] = ends[:count]
                    ends = more
                    values = np.empty(2 * count, np.float64)
                    values[:count] = gains[:count]
                    gains = values
                for k in range(length):
                    flat[used + k] = kept[k]
                used += length
                ends[count] = used
                gains[count] = best
                count += 1
    return flat[:used], ends[:count], gains[:count]


@kernel
def violation(path: I64, steps: int, graph: U64, present: F64) -> float:
    """By how much the cut of a cycle is violated: positive if it is.  The cycle has no chord in the graph."""
    chords = 0.0
    absent = 0.0
    for i in range(steps):
        for j in range(i + 1, steps):
            if j == i + 1 or (i == 0 and j == steps - 1):
                absent += 1.0 - present[path[i], path[j]]
            else:
                chords += present[path[i], path[j]]
    return (steps - 3) * (1.0 - absent) - chords
