"""Ordering a large sparse graph by approximate minimum degree.

The graph of a half-finished elimination is kept as a quotient graph: an eliminated vertex p becomes an *element*
that stands for the clique L_p of its neighbours at that time, and elements inside L_p are absorbed.  A vertex
has a list of elements and a list of vertices; both together never outgrow its row, as each elimination takes one
entry at least and adds one.  Degrees are the upper bounds of Amestoy, Davis and Duff (SIAM J. Matrix Anal. Appl.
17 (1996) 886-905): own vertices + |L_p| + sum of |L_e - L_p| over the other elements.
"""

from typing import NamedTuple

import numpy as np

from nearchord_solve.kernels.cells import STEP, STOP
from nearchord_solve.kernels.compiled import I32, I64, kernel

DONE, STOPPED, TOO_LARGE = 0, 1, 2


class Quotient(NamedTuple):
    """Quotient graph; row i of ``entries`` begins at ``ptr[i]``: elements first, then vertices."""

    ptr: I64
    entries: I32
    elements: I32  # [n] number of elements in the row
    vertices: I32  # [n] number of vertices in the row
    element_begin: I64  # [n] where L_p begins in the store
    element_size: I32  # [n] |L_p|, 0 if absorbed or never made
    outside: I32  # [n] |L_e - L_p| of the elements met while p goes
    met: I32  # [n] step at which `outside` was set
    mark: I32  # [n] step at which a vertex was put into L_p
    head: I32  # [n] degree queues
    following: I32
    before: I32
    degree: I32  # [n], -1 when gone


@kernel
def unlink(q: Quotient, v: int) -> None:
    """Take v out of the queue of its degree."""
    if q.before[v] >= 0:
        q.following[q.before[v]] = q.following[v]
    else:
        q.head[q.degree[v]] = q.following[v]
    if q.following[v] >= 0:
        q.before[q.following[v]] = q.before[v]


@kernel
def enqueue(q: Quotient, v: int, degree: int) -> None:
    """Put v in front of the queue of ``degree``."""
    first = q.head[degree]
    q.degree[v] = degree
    q.before[v] = -1
    q.following[v] = first
    if first >= 0:
        q.before[first] = v
    q.head[degree] = v


@kernel
def gather(q: Quotient, p: int, step: int, store: I32, used: int) -> int:
    """Write L_p behind ``used`` entries of ``store``, absorbing the elements of p; returns the new end."""
    row = q.ptr[p]
    q.mark[p] = step
    for e in range(row + q.elements[p], row + q.elements[p] + q.vertices[p]):
        v = q.entries[e]
        if q.mark[v] != step:
            q.mark[v] = step
            store[used] = v
            used += 1
    for e in range(row, row + q.elements[p]):
        absorbed = q.entries[e]
        begin = q.element_begin[absorbed]
        for f in range(begin, begin + q.element_size[absorbed]):
            v = store[f]
            if q.mark[v] != step:
                q.mark[v] = step
                store[used] = v
                used += 1
        q.element_size[absorbed] = 0
    return used


@kernel
def measure(q: Quotient, step: int, store: I32, begin: int, end: int) -> None:
    """Set ``outside`` of every living element met by a vertex of L_p."""
    for f in range(begin, end):
        v = store[f]
        for e in range(q.ptr[v], q.ptr[v] + q.elements[v]):
            element = q.entries[e]
            if q.met[element] != step:
                q.met[element] = step
                q.outside[element] = q.element_size[element]
            q.outside[element] -= 1


@kernel
def renew(q: Quotient, p: int, v: int, step: int, others: int, spare: I32) -> int:
    """Rewrite the row of v in L_p: drop absorbed elements and vertices of L_p, add p; returns the degree.

    ``others`` = |L_p| - 1; ``spare`` int32[longest row + 1] is scratch.  Elements inside L_p are dropped too.
    """
    row = q.ptr[v]
    degree = others
    spare[0] = p
    kept = 1
    for e in range(row, row + q.elements[v]):
        element = q.entries[e]
        if q.element_size[element] > 0 and q.outside[element] > 0:
            spare[kept] = element
            kept += 1
            degree += q.outside[element]
    elements = kept
    for e in range(row + q.elements[v], row + q.elements[v] + q.vertices[v]):
        u = q.entries[e]
        if q.mark[u] != step:
            spare[kept] = u
            kept += 1
            degree += 1
    for e in range(kept):
        q.entries[row + e] = spare[e]
    q.elements[v] = elements
    q.vertices[v] = kept - elements
    return degree


@kernel
def begin_quotient(ptr: I64, adj: I32) -> Quotient:
    """The graph itself, without elements."""
    n = ptr.shape[0] - 1
    q = Quotient(
        ptr,
        adj.copy(),
        np.zeros(n, np.int32),
        np.empty(n, np.int32),
        np.zeros(n, np.int64),
        np.zeros(n, np.int32),
        np.zeros(n, np.int32),
        np.full(n, -1, np.int32),
        np.full(n, -1, np.int32),
        np.full(n, -1, np.int32),
        np.empty(n, np.int32),
        np.empty(n, np.int32),
        np.empty(n, np.int32),
    )
    for v in range(n - 1, -1, -1):
        q.vertices[v] = ptr[v + 1] - ptr[v]
        enqueue(q, v, q.vertices[v])
    return q


@kernel
def order_by_degree(ptr: I64, adj: I32, most: int, order: I32, cells: I64) -> int:
    """Order the vertices by approximate minimum degree; the first to go gets the highest place.

    Overwrites ``order`` int32[n].  At most ``most`` entries of elements are stored (4 bytes each).  Ties go to the
    vertex last touched, at first to the lowest.  Returns DONE, STOPPED or TOO_LARGE.
    """
    n = order.shape[0]
    q = begin_quotient(ptr, adj)
    longest = 0
    for v in range(n):
        longest = max(longest, q.vertices[v])
    spare = np.empty(longest + 2, np.int32)
    store = np.empty(adj.shape[0] + n + 1, np.int32)
    used = int(np.int64(0))
    least = 0
    for step in range(n):
        if (step & 63) == 0:
            cells[STEP] = step
            if cells[STOP] != 0:
                return STOPPED
        while q.head[least] < 0:
            least += 1
        p = q.head[least]
        unlink(q, p)
        order[n - 1 - step] = p
        if used + n > store.shape[0]:
            if used > most:
                return TOO_LARGE
            longer = np.empty(2 * used + n, np.int32)
            longer[:used] = store[:used]
            store = longer
        begin = used
        used = gather(q, p, step, store, used)
        q.degree[p] = -1
        q.element_begin[p] = begin
        q.element_size[p] = used - begin
        measure(q, step, store, begin, used)
        for f in range(begin, used):
            v = store[f]
            unlink(q, v)
            degree = renew(q, p, v, step, used - begin - 1, spare)
            degree = min(degree, q.degree[v] + used - begin - 1, n - step - 2)
            enqueue(q, v, degree)
            least = min(least, degree)
    return DONE


@kernel
def rows_by_place(ptr: I64, adj: I32, order: I32, low_ptr: I64, low: I32) -> None:
    """Write the lower neighbours of each place: ``low_ptr`` int64[n+1], ``low`` int32[m].  O(n + m)."""
    n = order.shape[0]
    place = np.empty(n, np.int32)
    for i in range(n):
        place[order[i]] = i
    write = 0
    for i in range(n):
        low_ptr[i] = write
        for e in range(ptr[order[i]], ptr[order[i] + 1]):
            if place[adj[e]] < i:
                low[write] = place[adj[e]]
                write += 1
    low_ptr[n] = write
