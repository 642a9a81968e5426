"""Reading a canonical graph and writing its symmetric form; subgraphs without some vertices.

Canonical form: each edge {u, v} with u < v stands once, in row u; rows hold ascending targets.
Symmetric form: rows of all neighbours, ascending.
"""

import numpy as np

from nearchord_solve.kernels.compiled import I32, I64, U32, kernel, prefetch

AHEAD = 16  # edges
FINE, BAD_POINTER, BAD_RANGE, BAD_ORDER = 0, 1, 2, 3


@kernel
def check_rows(n: int, row_ptr: I64, targets: U32, degree: I64) -> tuple[int, int, int]:
    """Check canonical rows and count degrees.

    ``row_ptr`` int64[n+1], ``targets`` uint32[m]; ``degree`` int64[n] is overwritten with the number of
    smaller neighbours of each vertex.  Returns (code, row, index of the target).  O(n + m).
    """
    m = targets.shape[0]
    for v in range(n):
        degree[v] = 0
    if row_ptr[0] != 0:
        return BAD_POINTER, 0, 0
    for u in range(n):
        begin = row_ptr[u]
        end = row_ptr[u + 1]
        if end < begin or end > m:
            return BAD_POINTER, u, 0
        last = u
        for e in range(begin, end):
            v = int(targets[e])
            if v >= n:
                return BAD_RANGE, u, e
            if v <= last:
                return BAD_ORDER, u, e
            last = v
            degree[v] += 1
    if row_ptr[n] != m:
        return BAD_POINTER, n - 1, 0
    return FINE, 0, 0


@kernel
def mirror(n: int, row_ptr: I64, targets: U32, smaller: I64, ptr: I64, adj: I32) -> None:
    """Write the symmetric form.

    ``smaller`` int64[n] holds counts of smaller neighbours and is overwritten with write positions; ``ptr``
    int64[n+1] and ``adj`` int32[2m] are overwritten.  Rows ascend because rows are read in ascending order:
    smaller neighbours arrive in order, larger ones follow them.  Where the next edges go is fetched ahead.  O(n + m).
    """
    m = targets.shape[0]
    total = 0
    for v in range(n):
        ptr[v] = total
        total += smaller[v] + row_ptr[v + 1] - row_ptr[v]
        smaller[v] = ptr[v]
    ptr[n] = total
    for u in range(n):
        write = smaller[u]
        for e in range(row_ptr[u], row_ptr[u + 1]):
            v = targets[e]
            if e + 2 * AHEAD < m:
                prefetch(smaller, targets[e + 2 * AHEAD])
                prefetch(adj, smaller[targets[e + AHEAD]])
            adj[write] = np.int32(v)
            write += 1
            adj[smaller[v]] = np.int32(u)
            smaller[v] += 1


@kernel
def induce(ptr: I64, adj: I32, index: I32, kept: int) -> tuple[I64, I32]:
    """Symmetric form of the subgraph of the vertices with ``index`` >= 0.

    ``index`` int32[n]: new name or -1, ascending over the kept vertices.  O(n + m).
    """
    n = index.shape[0]
    sub_ptr = np.empty(kept + 1, np.int64)
    total = 0
    for v in range(n):
        if index[v] >= 0:
            sub_ptr[index[v]] = total
            for e in range(ptr[v], ptr[v + 1]):
                if index[adj[e]] >= 0:
                    total += 1
    sub_ptr[kept] = total
    sub_adj = np.empty(total, np.int32)
    write = 0
    for v in range(n):
        if index[v] >= 0:
            for e in range(ptr[v], ptr[v + 1]):
                if index[adj[e]] >= 0:
                    sub_adj[write] = index[adj[e]]
                    write += 1
    return sub_ptr, sub_adj
