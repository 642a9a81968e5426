"""A lower bound of the fill of one core: chordless cycles that share no non-edge.

A chordless cycle on c vertices needs c - 3 chords, which are non-edges of G among its vertices; cycles that
share no non-edge need different chords, so these numbers add up.
"""

import numpy as np

from nearchord_solve.fill.kernels.dense import holds, set_pair
from nearchord_solve.kernels.cells import STOP
from nearchord_solve.kernels.compiled import I32, I64, U64, kernel, lowest

ONE = np.uint64(1)
STEPS = 200_000  # about the vertices that the shortest paths of one core may look at


@kernel
def shortest_path(real: U64, a: int, b: int, v: int, before: I32, queue: I32) -> int:
    """Shortest path from a to b that avoids v and its other neighbours; ``before`` holds it backwards from b.

    Returns its number of vertices, 0 if there is none.  With v it closes a chordless cycle.
    """
    words = real.shape[1]
    before[:] = -1
    before[a] = a
    queue[0] = a
    count = 1
    done = 0
    while done < count:
        x = queue[done]
        done += 1
        for w in range(words):
            word = real[x, w] & ~real[v, w]
            if w == b >> 6:
                word |= real[x, w] & (ONE << np.uint64(b & 63))
            while word != 0:
                y = (w << 6) + lowest(word)
                word &= word - ONE
                if y == v or before[y] >= 0:
                    continue
                before[y] = x
                if y == b:
                    length = 1
                    while y != a:
                        y = before[y]
                        length += 1
                    return length
                queue[count] = y
                count += 1
    return 0


@kernel
def take(real: U64, used: U64, cycle: I32, length: int) -> bool:
    """Mark the non-edges of the cycle as used, if none is."""
    for i in range(length):
        for j in range(i):
            if not holds(real, cycle[i], cycle[j]) and holds(used, cycle[i], cycle[j]):
                return False
    for i in range(length):
        for j in range(i):
            if not holds(real, cycle[i], cycle[j]):
                set_pair(used, cycle[i], cycle[j])
    return True


@kernel
def pack_cycles(real: U64, pairs: I32, minimal: bool, cells: I64) -> int:
    """Greedy packing; returns the sum of c - 3 over its cycles.

    ``real`` uint64[k, W]; ``pairs`` int32[f, 2]: the fill of some triangulation, ``minimal``
    if none of it can go.  Every chordless cycle has a
    vertex whose two neighbours on it are joined by fill, so only such (fill edge, common neighbour) are
    tried: cycles on four vertices first, as they use the fewest non-edges for what they add, then all.  The
    number of paths is limited by ``STEPS``.
    """
    k, words = real.shape
    if pairs.shape[0] <= 1 and minimal:
        return int(pairs.shape[0])
    used = np.zeros((k, words), np.uint64)
    before = np.empty(k, np.int32)
    queue = np.empty(k, np.int32)
    cycle = np.empty(k + 1, np.int32)
    most = 64 + STEPS // k
    total = 0
    for longest in (4, k):
        tries = 0
        for e in range(pairs.shape[0]):
            if cells[STOP] != 0:
                return total
            a = pairs[e, 0]
            b = pairs[e, 1]
            for w in range(words):
                word = real[a, w] & real[b, w]
                while word != 0 and not holds(used, a, b) and tries < most:
                    v = (w << 6) + lowest(word)
                    word &= word - ONE
                    tries += 1
                    length = shortest_path(real, a, b, v, before, queue) + 1
                    if length < 4 or length > longest:
                        continue
                    y = b
                    for i in range(length - 1):
                        cycle[i] = y
                        y = before[y]
                    cycle[length - 1] = v
                    if take(real, used, cycle, length):
                        total += length - 3
    return total
