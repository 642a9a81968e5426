"""Minimal triangulation by search, and the atoms it shows; see :mod:`nearchord_solve.fill.exact.atoms`."""

import numpy as np

from nearchord_solve.fill.exact.kernels.words import contains, fill_up, lacking, side, unpack
from nearchord_solve.kernels.cells import STOP
from nearchord_solve.kernels.compiled import I32, I64, U64, kernel


@kernel
def _lists(rows: U64) -> tuple[I64, I32]:
    """Compressed rows of bit rows."""
    n = rows.shape[0]
    ptr = np.zeros(n + 1, np.int64)
    found = np.empty(n, np.int64)
    for v in range(n):
        ptr[v + 1] = ptr[v] + unpack(rows[v], found)
    adj = np.empty(ptr[n], np.int32)
    for u in range(n):
        count = unpack(rows[u], found)
        adj[ptr[u] : ptr[u] + count] = found[:count]
    return ptr, adj


@kernel
def _reached_below(ptr: I64, adj: I32, v: int, weight: I64, seen: I64, head: I64, after: I64, found: I64) -> int:
    """Write to ``found`` the vertices u left with a path v..u whose inner vertices are left and weigh less than u.

    ``weight`` int64[n] is -1 for vertices numbered before.  ``seen`` int64[n] holds v where this search has been;
    ``head`` int64[n+1], -1 everywhere before and after, and ``after`` int64[n] are the vertices waiting at each level.
    Returns the number found.
    """
    count = 0
    top = -1
    seen[v] = v
    for e in range(ptr[v], ptr[v + 1]):
        u = adj[e]
        if weight[u] >= 0:
            seen[u] = v
            found[count] = u
            count += 1
            after[u] = head[weight[u]]
            head[weight[u]] = u
            top = max(top, weight[u])
    level = 0
    while level <= top:
        while head[level] >= 0:
            u = head[level]
            head[level] = after[u]
            for e in range(ptr[u], ptr[u + 1]):
                x = adj[e]
                if weight[x] < 0 or seen[x] == v:
                    continue
                seen[x] = v
                here = level
                if weight[x] > level:
                    found[count] = x
                    count += 1
                    here = weight[x]
                    top = max(top, here)
                after[x] = head[here]
                head[here] = x
        level += 1
    return count


@kernel
def search_minimal(rows: U64, effort: int, cells: I64) -> tuple[bool, I32, U64]:
    """Order and later neighbours of a minimal triangulation.

    ``rows`` uint64[n, W].  Returns (done, order int32[n], later uint64[n, W]): vertex v has the later neighbours
    later[v].  Not done when stopped or when about ``effort`` neighbours have been looked at.  O(n m) time.
    """
    n, width = rows.shape
    ptr, adj = _lists(rows)
    order = np.empty(n, np.int32)
    later = np.zeros((n, width), np.uint64)
    weight = np.zeros(n, np.int64)
    seen = np.full(n, -1, np.int64)
    head = np.full(n + 1, -1, np.int64)
    after = np.empty(n, np.int64)
    found = np.empty(n, np.int64)
    for place in range(n - 1, -1, -1):
        effort -= int(ptr[n])
        if cells[STOP] != 0 or effort < 0:
            return False, order, later
        v = int(np.argmax(weight))
        weight[v] = -1
        count = _reached_below(ptr, adj, v, weight, seen, head, after, found)
        for i in range(count):
            weight[found[i]] += 1
            later[found[i], v >> 6] |= np.uint64(1) << np.uint64(v & 63)
        order[place] = v
    return True, order, later


@kernel
def cut_off(rows: U64, order: I32, later: U64, cells: I64) -> tuple[I64, I32]:
    """Atoms of a graph from a minimal elimination order: atom i is vertex[ptr[i]:ptr[i+1]], ascending.

    A vertex whose later neighbours among the rest form a clique of the graph cuts off these and the component of the
    rest that holds it, if anything else is left.  When stopped, the rest comes out as one.
    """
    n, width = rows.shape
    ptr = np.zeros(n + 1, np.int64)
    vertex = np.empty(2 * n, np.int32)
    atoms = 0
    remaining = np.empty(width, np.uint64)
    fill_up(remaining, n)
    cut = np.empty(width, np.uint64)
    left = np.empty(width, np.uint64)
    part = np.empty(width, np.uint64)
    near = np.empty(width, np.uint64)
    stack = np.empty(n, np.int64)
    pair = np.empty(2, np.int64)
    for i in range(n + 1):
        part[:] = remaining
        if i < n and cells[STOP] == 0:
            v = order[i]
            if not contains(remaining, v):
                continue
            for w in range(width):
                cut[w] = later[v, w] & remaining[w]
            if lacking(rows, cut, pair) > 0:
                continue
            for w in range(width):
                left[w] = remaining[w] & ~cut[w]
            side(rows, v, left, part, near, stack)
            if not left.any():
                continue
            for w in range(width):
                remaining[w] &= ~part[w]
                part[w] |= cut[w]
        count = unpack(part, stack)
        if ptr[atoms] + count > vertex.shape[0]:
            vertex = np.concatenate((vertex, np.empty(vertex.shape[0] + count, np.int32)))
        for j in range(count):
            vertex[ptr[atoms] + j] = stack[j]
        ptr[atoms + 1] = ptr[atoms] + count
        atoms += 1
        if i == n or cells[STOP] != 0:
            break
    return ptr[: atoms + 1].copy(), vertex[: ptr[atoms]].copy()
