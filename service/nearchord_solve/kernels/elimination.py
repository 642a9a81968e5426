"""Symbolic elimination along a numbering, and what it says about cliques.

Places are eliminated from n-1 down to 0.  L(i) is the set of earlier places joined to i when i goes: its
earlier neighbours ``low`` and its fill ``fill``.  H = G + fill is chordal and K(i) = {i} + L(i) is a clique of
it.  The parent of i is max L(i), and L(i) - parent lies in L(parent): that is how fill is found.
"""

import numpy as np

from nearchord_solve.kernels.cells import FILL, POLL, STEP, STOP
from nearchord_solve.kernels.compiled import I32, I64, U8, kernel

DONE, STOPPED, TOO_LARGE = 0, 1, 2


@kernel
def eliminate(low_ptr: I64, low: I32, most: int, parent: I32, fill_end: I64, cells: I64) -> tuple[int, I32, int]:
    """Play the elimination game with at most ``most`` fill edges.

    Overwrites ``parent`` int32[n] (-1 for roots) and ``fill_end`` int64[n+1]: the fill of place i is
    ``fill[fill_end[i+1]:fill_end[i]]`` of the returned int32 array (places are written downwards).
    Returns (DONE | STOPPED | TOO_LARGE, fill, its length).  O(n + size of H) time.
    """
    n = parent.shape[0]
    mark = np.full(n, -1, np.int32)
    child = np.full(n, -1, np.int32)
    sibling = np.full(n, -1, np.int32)
    fill = np.empty(1024, np.int32)
    used = 0
    fill_end[n] = 0
    for i in range(n - 1, -1, -1):
        if (i & POLL) == 0:
            cells[STEP] = n - i
            cells[FILL] = used
            if cells[STOP] != 0:
                return STOPPED, fill, used
        last = np.int32(-1)
        c = child[i]
        if c >= 0:
            for e in range(low_ptr[i], low_ptr[i + 1]):
                x = low[e]
                mark[x] = i
                last = max(last, x)
            mark[i] = i
        else:
            for e in range(low_ptr[i], low_ptr[i + 1]):
                last = max(last, low[e])
        while c >= 0:
            size = fill_end[c] - fill_end[c + 1]
            if used + low_ptr[c + 1] - low_ptr[c] + size > fill.shape[0]:
                room = np.empty(2 * (used + low_ptr[c + 1] - low_ptr[c] + size), np.int32)
                room[:used] = fill[:used]
                fill = room
            for e in range(low_ptr[c], low_ptr[c + 1]):
                x = low[e]
                if mark[x] != i:
                    mark[x] = i
                    fill[used] = x
                    used += 1
                    last = max(last, x)
            for e in range(fill_end[c + 1], fill_end[c]):
                x = fill[e]
                if mark[x] != i:
                    mark[x] = i
                    fill[used] = x
                    used += 1
                    last = max(last, x)
            c = sibling[c]
        if used > most:
            return TOO_LARGE, fill, used
        fill_end[i] = used
        parent[i] = last
        if last >= 0:
            sibling[i] = child[last]
            child[last] = i
    cells[FILL] = used
    return DONE, fill, used


@kernel
def mark_cores(
    low_ptr: I64, low: I32, parent: I32, fill_end: I64, fill: I32, core: I32, sizes: I64, cells: I64
) -> tuple[bool, int]:
    """Find the fill cores: what remains around fill when H is cut at adhesions without fill.

    Overwrites ``core`` int32[n]: -1 where K(i) holds no fill edge, otherwise the number of i's core; cores are
    numbered by their lowest place (the *top*, which is the only place of the core whose L holds no fill edge
    and whose parent lies outside).  ``sizes`` int64[4] receives: cores, maximal cliques K(i) without fill,
    the largest of them, places in cores.  Returns (False if stopped, 0).

    If L(i) holds a fill edge then so does K(parent), which contains L(i); so it is enough to look where the
    parent is in a core.  Time O(n + sum over those i of the fill lists of L(i)), usually far less.
    """
    n = parent.shape[0]
    mark = np.full(n, -1, np.int32)
    covered = np.zeros(n, np.uint8)
    cores = 0
    places = 0
    for i in range(n):
        if (i & POLL) == 0:
            cells[STEP] = i
            if cells[STOP] != 0:
                return False, 0
        p = parent[i]
        core[i] = -1
        own = fill_end[i] - fill_end[i + 1]
        if p >= 0:
            if core[p] >= 0 and _holds_fill(i, low_ptr, low, fill_end, fill, mark):
                core[i] = core[p]
            size = low_ptr[i + 1] - low_ptr[i] + own
            if size == low_ptr[p + 1] - low_ptr[p] + fill_end[p] - fill_end[p + 1] + 1:
                covered[p] = 1
        if core[i] < 0 and own > 0:
            core[i] = cores
            cores += 1
        if core[i] >= 0:
            places += 1
    _count_cliques(low_ptr, core, covered, sizes)
    sizes[0] = cores
    sizes[3] = places
    return True, 0


@kernel
def _holds_fill(i: int, low_ptr: I64, low: I32, fill_end: I64, fill: I32, mark: I32) -> bool:
    """Whether two places of L(i) are joined by a fill edge.  Sets ``mark`` to i on L(i)."""
    for e in range(low_ptr[i], low_ptr[i + 1]):
        mark[low[e]] = i
    for e in range(fill_end[i + 1], fill_end[i]):
        mark[fill[e]] = i
    for e in range(low_ptr[i], low_ptr[i + 1]):
        a = low[e]
        for f in range(fill_end[a + 1], fill_end[a]):
            if mark[fill[f]] == i:
                return True
    for e in range(fill_end[i + 1], fill_end[i]):
        a = fill[e]
        for f in range(fill_end[a + 1], fill_end[a]):
            if mark[fill[f]] == i:
                return True
    return False


@kernel
def _count_cliques(low_ptr: I64, core: I32, covered: U8, sizes: I64) -> None:
    cliques = 0
    largest = 0
    for i in range(core.shape[0]):
        if core[i] < 0 and covered[i] == 0:
            cliques += 1
            largest = max(largest, low_ptr[i + 1] - low_ptr[i] + 1)
    sizes[1] = cliques
    sizes[2] = largest


@kernel
def clique_sizes(low_ptr: I64, parent: I32, fill_end: I64, core: I32, largest: int) -> I64:
    """How many maximal cliques K(i) without fill there are of each size: int64[largest + 1].  O(n)."""
    n = parent.shape[0]
    covered = np.zeros(n, np.uint8)
    for i in range(n):
        p = parent[i]
        if p >= 0:
            size = low_ptr[i + 1] - low_ptr[i] + fill_end[i] - fill_end[i + 1]
            if size == low_ptr[p + 1] - low_ptr[p] + fill_end[p] - fill_end[p + 1] + 1:
                covered[p] = 1
    count = np.zeros(largest + 1, np.int64)
    for i in range(n):
        if core[i] < 0 and covered[i] == 0:
            count[low_ptr[i + 1] - low_ptr[i] + 1] += 1
    return count


@kernel
def list_cores(core: I32, cores: int, places: int) -> tuple[I64, I32]:
    """Places of each core, ascending: (``core_ptr`` int64[cores+1], ``core_place`` int32[places]).  O(n)."""
    core_ptr = np.zeros(cores + 1, np.int64)
    for i in range(core.shape[0]):
        if core[i] >= 0:
            core_ptr[core[i] + 1] += 1
    for c in range(cores):
        core_ptr[c + 1] += core_ptr[c]
    write = core_ptr.copy()
    core_place = np.empty(places, np.int32)
    for i in range(core.shape[0]):
        c = core[i]
        if c >= 0:
            core_place[write[c]] = i
            write[c] += 1
    return core_ptr, core_place
