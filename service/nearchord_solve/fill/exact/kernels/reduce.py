"""Simplicial vertices and safe edges, rules 1 and 3 of :mod:`nearchord_solve.fill.exact.reduce`."""

import numpy as np

from nearchord_solve.fill.exact.kernels.words import contains, fill_up, lacking, leave_out, side, unpack
from nearchord_solve.fill.kernels.dense import set_pair
from nearchord_solve.kernels.cells import STOP
from nearchord_solve.kernels.compiled import I32, I64, U64, kernel


@kernel
def stripped(rows: U64, cells: I64) -> I32:
    """What is left, ascending, after deleting universal and simplicial vertices again and again.

    A vertex is looked at again when it has lost a neighbour: O(sum of squared degrees * W) at worst.  When stopped,
    what has not been deleted by then.
    """
    n, width = rows.shape
    kept = np.empty(width, np.uint64)
    fill_up(kept, n)
    near = np.empty(width, np.uint64)
    degree = np.empty(n, np.int64)
    found = np.empty(n, np.int64)
    pair = np.empty(2, np.int64)
    waiting = np.arange(n)
    queued = np.ones(n, np.bool_)
    first = 0
    held = n
    total = n
    for v in range(n):
        degree[v] = unpack(rows[v], found)
    while cells[STOP] == 0:
        if held > 0:
            v = waiting[first]
            first = (first + 1) % n
            held -= 1
            queued[v] = False
            if not contains(kept, v):
                continue
            for w in range(width):
                near[w] = rows[v, w] & kept[w]
            if degree[v] < total - 1 and lacking(rows, near, pair) > 0:
                continue
        else:
            v = 0
            while v < n and not (contains(kept, v) and degree[v] == total - 1):
                v += 1
            if v == n:
                break
            for w in range(width):
                near[w] = rows[v, w] & kept[w]
        leave_out(kept, v)
        total -= 1
        count = unpack(near, found)
        for i in range(count):
            u = found[i]
            degree[u] -= 1
            if not queued[u]:
                queued[u] = True
                waiting[(first + held) % n] = u
                held += 1
    count = unpack(kept, found)
    return found[:count].astype(np.int32)


@kernel
def _sizes_allow(sizes: I64, pair: I64, y: int, far: U64, found: I64) -> bool:
    """Whether the classes are of sizes for which the rule is proven."""
    small = min(sizes[pair[0]], sizes[pair[1]])
    if max(sizes[pair[0]], sizes[pair[1]]) > sizes[y]:
        return False
    least = small
    for i in range(unpack(far, found)):
        least = min(least, sizes[found[i]])
    return bool(least == small)


@kernel
def add_safe_edges(rows: U64, sizes: I64, cells: I64) -> I32:
    """Edges by the rule, int32[k, 2], each found in the graph with the earlier ones added; smaller end first.

    ``rows`` uint64[n, W] gains them; ``sizes`` int64[n].  Passes over all vertices y until none adds anything, or until
    stopped.  O(n^2 W) a pass, at most one pass for each edge found.
    """
    n, width = rows.shape
    pairs = np.empty((16, 2), np.int32)
    count = 0
    left = np.empty(width, np.uint64)
    far = np.empty(width, np.uint64)
    near = np.empty(width, np.uint64)
    stack = np.empty(n, np.int64)
    pair = np.empty(2, np.int64)
    before = -1
    while before < count:
        before = count
        for y in range(n):
            if cells[STOP] != 0:
                return pairs[:count].copy()
            fill_up(left, n)
            leave_out(left, y)
            for w in range(width):
                left[w] &= ~rows[y, w]
            for v in range(n):
                if not contains(left, v):
                    continue
                side(rows, v, left, far, near, stack)
                for w in range(width):
                    near[w] &= ~far[w]
                if lacking(rows, near, pair) == 1 and _sizes_allow(sizes, pair, y, far, stack):
                    if count == pairs.shape[0]:
                        pairs = np.concatenate((pairs, np.empty_like(pairs)))
                    pairs[count, 0] = pair[0]
                    pairs[count, 1] = pair[1]
                    count += 1
                    set_pair(rows, pair[0], pair[1])
    return pairs[:count].copy()
