"""Maximum cardinality search.

Visits next a vertex with the most visited neighbours.  If the graph is chordal, the reverse of the visiting
order is a perfect elimination order (Tarjan and Yannakakis, SIAM J. Comput. 13 (1984) 566-579).
"""

import numpy as np

from nearchord_solve.kernels.cells import POLL, STEP, STOP
from nearchord_solve.kernels.compiled import I32, I64, kernel, prefetch

NEXT, PREV, COUNT, PLACE = 0, 1, 2, 3
SOON = 3  # a vertex with so many visited neighbours is likely to be visited soon
LINE = 16  # entries of a row in a cache line


@kernel
def cardinality_search(ptr: I64, adj: I32, order: I32, low_ptr: I64, low: I32, cells: I64) -> bool:
    """Number the vertices 0..n-1 by maximum cardinality search.

    Overwrites ``order`` int32[n] (vertex at each place), ``low_ptr`` int64[n+1] and ``low`` int32[m]: row i
    lists the places of the earlier neighbours of ``order[i]``.  Returns False if stopped.

    Vertices without a visited neighbour are not queued: they are only visited when every queue is empty, and
    then the lowest one is next.  Each other vertex is in the doubly linked queue of its count of visited
    neighbours; one record of 16 bytes per vertex keeps a visit to one cache line.  Records and row
    pointers of a row are loaded before they are needed, so that their cache misses overlap (a tenth of the
    time at a million vertices); their sum goes to a scratch cell, or the compiler would drop the loads.
    O(n + m) time.
    """
    n = order.shape[0]
    record = np.empty((n, 4), np.int32)
    for v in range(n):
        record[v, COUNT] = 0
        record[v, PLACE] = -1
    longest = 0
    for v in range(n):
        longest = max(longest, ptr[v + 1] - ptr[v])
    head: I32 = np.full(longest + 2, -1, np.int32)
    top = 0
    fresh = 0
    write = 0
    for place in range(n):
        if (place & POLL) == 0:
            cells[STEP] = place
            if cells[STOP] != 0:
                return False
        while top > 0 and head[top] < 0:
            top -= 1
        if top > 0:
            v = head[top]
            after = record[v, NEXT]
            head[top] = after
            if after >= 0:
                record[after, PREV] = -1
        else:
            while record[fresh, PLACE] >= 0:
                fresh += 1
            v = fresh
        record[v, PLACE] = place
        order[place] = v
        low_ptr[place] = write
        for e in range(ptr[v], ptr[v + 1]):
            prefetch(record, 4 * adj[e])
        for e in range(ptr[v], ptr[v + 1]):
            u = adj[e]
            if record[u, PLACE] >= 0:
                low[write] = record[u, PLACE]
                write += 1
                continue
            count = record[u, COUNT]
            if count > 0:
                before = record[u, PREV]
                after = record[u, NEXT]
                if before >= 0:
                    record[before, NEXT] = after
                else:
                    head[count] = after
                if after >= 0:
                    record[after, PREV] = before
            count += 1
            record[u, COUNT] = count
            if count == 1:
                prefetch(ptr, u)
            elif count == SOON:
                prefetch(adj, ptr[u])
                prefetch(adj, ptr[u] + LINE)
            first = head[count]
            record[u, PREV] = -1
            record[u, NEXT] = first
            if first >= 0:
                record[first, PREV] = u
            head[count] = u
        top += 1
    low_ptr[n] = write
    return True
