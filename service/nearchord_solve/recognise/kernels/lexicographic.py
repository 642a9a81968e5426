"""Lexicographic breadth-first search and the maximal cliques of a chordal graph."""

import numpy as np

from nearchord_solve.kernels.cells import POLL, STOP
from nearchord_solve.kernels.compiled import I32, I64, kernel


@kernel
def lexicographic_search(ptr: I64, adj: I32, order: I32, place: I32, cells: I64) -> bool:
    """Visit next, among the vertices left, one whose visited neighbours come lexicographically first.

    Overwrites ``order`` int32[n] (vertex at each place) and ``place`` int32[n].  Returns False if stopped.
    The vertices left stand in ``order`` behind the visited ones, in classes of equal labels, the best class first; a
    visit splits each class into neighbours and others (Habib, McConnell, Paul, Viennot, Theor. Comput. Sci. 234
    (2000) 59-84).
    O(n + m) time.
    """
    n = order.shape[0]
    group = np.zeros(n, np.int32)  # class of each vertex left
    begin = np.empty(n + 1, np.int32)  # where each class begins in order
    split = np.full(n + 1, -1, np.int32)  # class split off by this visit
    touched = np.empty(n, np.int32)
    begin[0] = 0
    groups = 1
    for v in range(n):
        order[v] = v
        place[v] = v
    for now in range(n):
        if (now & POLL) == 0 and cells[STOP] != 0:
            return False
        v = order[now]
        begin[group[v]] = now + 1
        count = 0
        for e in range(ptr[v], ptr[v + 1]):
            u = adj[e]
            if place[u] <= now:
                continue
            g = group[u]
            if split[g] < 0:
                split[g] = 0
                touched[count] = g
                count += 1
            at = begin[g] + split[g]
            other = order[at]
            order[place[u]] = other
            place[other] = place[u]
            order[at] = u
            place[u] = at
            split[g] += 1
        for i in range(count):
            g = touched[i]
            first = begin[g]
            for at in range(first, first + split[g]):
                group[order[at]] = groups
            begin[groups] = first
            begin[g] = first + split[g]
            split[g] = -1
            groups += 1
            if groups == begin.shape[0]:
                begin = np.concatenate((begin, np.empty(groups, np.int32)))
                split = np.concatenate((split, np.full(groups, -1, np.int32)))
    return True


@kernel
def maximal_cliques(ptr: I64, adj: I32, order: I32, place: I32) -> tuple[I64, I32, I32, I64, I32]:
    """Maximal cliques of a chordal graph along a search, in order of discovery, and a tree of them.

    A visited vertex v with earlier neighbours L(v), p the latest of them, joins the clique of p if L(v) is all of it,
    and otherwise opens a new clique L(v) + v below that of p.  Returns (clique_ptr int64[k+1],
    clique_vertex int32, parent int32[k] (-1 for a root), shared_ptr int64[k+1], shared int32: L(v) at the opening).
    O(n + m) time.
    """
    n = order.shape[0]
    home = np.empty(n, np.int32)  # clique that v opened or joined
    size = np.zeros(n, np.int64)
    opener = np.empty(n, np.int32)
    parent = np.empty(n, np.int32)
    cliques = 0
    total = 0
    for now in range(n):
        v = order[now]
        earlier = 0
        last = -1
        for e in range(ptr[v], ptr[v + 1]):
            if place[adj[e]] < now:
                earlier += 1
                last = max(last, place[adj[e]])
        if last >= 0 and size[home[order[last]]] == earlier:
            home[v] = home[order[last]]
            size[home[v]] += 1
        else:
            home[v] = cliques
            opener[cliques] = v
            parent[cliques] = home[order[last]] if last >= 0 else -1
            size[cliques] = earlier + 1
            total += earlier
            cliques += 1
    clique_ptr = np.zeros(cliques + 1, np.int64)
    shared_ptr = np.zeros(cliques + 1, np.int64)
    shared = np.empty(total, np.int32)
    write = np.empty(cliques, np.int64)
    for c in range(cliques):
        clique_ptr[c + 1] = clique_ptr[c] + size[c]
        write[c] = clique_ptr[c]
    clique_vertex = np.empty(clique_ptr[cliques], np.int32)
    at = 0
    for c in range(cliques):
        v = opener[c]
        for e in range(ptr[v], ptr[v + 1]):
            u = adj[e]
            if place[u] < place[v]:
                shared[at] = u
                at += 1
                clique_vertex[write[c]] = u
                write[c] += 1
        shared_ptr[c + 1] = at
    for now in range(n):
        c = home[order[now]]
        clique_vertex[write[c]] = order[now]
        write[c] += 1
    return clique_ptr, clique_vertex, parent[:cliques].copy(), shared_ptr, shared
