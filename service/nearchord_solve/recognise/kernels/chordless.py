"""Finding a chordless cycle of length at least four."""

import numpy as np

from nearchord_solve.kernels.cells import STOP
from nearchord_solve.kernels.compiled import I32, I64, kernel


@kernel
def chordless_cycle(ptr: I64, adj: I32, cells: I64) -> tuple[bool, I32]:
    """A chordless cycle of at least four vertices.

    For each v in turn: mark the components of the graph without v and its neighbours; look for one that is seen by two
    neighbours a, b of v that are not adjacent; v and a shortest path from a to b through it are such a cycle.  A
    graph without one has no such v: the neighbours of any vertex v of a chordless cycle on it are such a, b.
    ``ptr`` int64[n+1], ``adj`` int32[2m], rows ascending.  Returns (False, empty) if stopped, (True, empty) if
    there is none.  O(n + m) for each v and component.
    """
    n = ptr.shape[0] - 1
    label = np.empty(n, np.int32)
    queue = np.empty(n, np.int32)
    back = np.empty(n, np.int32)
    mark = np.full(n, -1, np.int32)
    for v in range(n):
        if cells[STOP] != 0:
            return False, queue[:0]
        label[:] = -1
        label[v] = -2
        for e in range(ptr[v], ptr[v + 1]):
            label[adj[e]] = -2
        for e in range(ptr[v], ptr[v + 1]):
            for f in range(ptr[adj[e]], ptr[adj[e] + 1]):
                start = adj[f]
                if label[start] == -1:
                    a, b = _attachments(ptr, adj, v, start, label, queue, mark)
                    if a >= 0:
                        length = _path(ptr, adj, a, b, label, start, queue, back)
                        cycle = np.empty(length + 1, np.int32)
                        cycle[0] = v
                        u = b
                        for i in range(length):
                            cycle[i + 1] = u
                            u = back[u]
                        return True, cycle
    return True, queue[:0]


@kernel
def _attachments(ptr: I64, adj: I32, v: int, start: int, label: I32, queue: I32, mark: I32) -> tuple[int, int]:
    """Label the component of ``start`` by it; two non-adjacent neighbours of v that see it, or -1, -1."""
    n = label.shape[0]
    seen = np.zeros(n, np.uint8)
    contacts = np.empty(n, np.int32)
    count = 0
    label[start] = start
    queue[0] = start
    head = 0
    tail = 1
    while head < tail:
        x = queue[head]
        head += 1
        for e in range(ptr[x], ptr[x + 1]):
            u = adj[e]
            if label[u] == -1:
                label[u] = start
                queue[tail] = u
                tail += 1
            elif label[u] == -2 and u != v and seen[u] == 0:
                seen[u] = 1
                contacts[count] = u
                count += 1
    for i in range(count):
        a = contacts[i]
        for e in range(ptr[a], ptr[a + 1]):
            mark[adj[e]] = a
        for j in range(i + 1, count):
            if mark[contacts[j]] != a:
                return a, contacts[j]
    return -1, -1


@kernel
def _path(ptr: I64, adj: I32, a: int, b: int, label: I32, inside: int, queue: I32, back: I32) -> int:
    """Shortest path from a to b through vertices labelled ``inside``: written to ``back`` from b; its vertex count."""
    back[:] = -1
    back[a] = a
    queue[0] = a
    head = 0
    tail = 1
    while back[b] < 0:
        x = queue[head]
        head += 1
        for e in range(ptr[x], ptr[x + 1]):
            u = adj[e]
            if back[u] < 0 and (label[u] == inside or (u == b and x != a)):
                back[u] = x
                queue[tail] = u
                tail += 1
    length = 1
    u = b
    while u != a:
        u = back[u]
        length += 1
    return length
