"""Colouring with a given number of colours by branching on the vertex with the fewest colours left.

Brelaz, New methods to color the vertices of a graph, Comm. ACM 22 (1979) 251-256.  Colours not used yet are alike, so
only the first of them is tried.  Copies of one vertex (adjacent twins, one behind the other) are alike too: they go in
their order, because they always have equally many colours left and ties go to the lower vertex, and each takes a higher
colour than the one before.  Both rules go together: let a colouring extend what is fixed so far, give the next copy
the lowest of the colours that the remaining copies have, and if that is an unused one, exchange it with the first
unused one.
"""

import numpy as np

from nearchord_solve.kernels.cells import STOP
from nearchord_solve.kernels.compiled import I32, I64, kernel

FOUND, NONE, MANY, STOPPED = 0, 1, 2, 3


@kernel
def most_constrained(saturation: I32, ptr: I64, colour: I32) -> int:
    """The uncoloured vertex with most colours around it, ties to more neighbours, then to the lower vertex."""
    best = -1
    most = -1
    degree = int(np.int64(-1))
    for v in range(colour.shape[0]):
        if colour[v] >= 0:
            continue
        size = ptr[v + 1] - ptr[v]
        if saturation[v] > most or (saturation[v] == most and size > degree):
            best = v
            most = saturation[v]
            degree = size
    return best


@kernel
def colour_by_saturation(
    ptr: I64, adj: I32, previous: I32, colours: int, most: int, colour: I32, cells: I64
) -> tuple[int, int]:
    """Colour all vertices with 0..colours-1, or find that it cannot be done.

    ``previous`` int32[n]: the copy before each vertex, -1 if none.  ``colour`` int32[n] is overwritten, and is proper
    if FOUND.  Gives up after ``most`` vertices have been coloured (MANY).  Returns (code, vertices coloured on the
    way).  O(n + degree) each; memory n x colours.
    """
    n = colour.shape[0]
    around = np.zeros((n, colours), np.int32)
    saturation = np.zeros(n, np.int32)
    chosen = np.empty(n, np.int32)
    used = np.zeros(n + 1, np.int64)
    colour[:] = -1
    nodes = 0
    depth = 0
    v = int(np.int64(-1))
    while depth < n:
        if v < 0:
            v = most_constrained(saturation, ptr, colour)
            begin = 0
            if previous[v] >= 0:
                begin = colour[previous[v]] + 1
        else:  # back at a vertex whose colour led nowhere
            begin = colour[v] + 1
            for e in range(ptr[v], ptr[v + 1]):
                u = adj[e]
                around[u, colour[v]] -= 1
                if around[u, colour[v]] == 0:
                    saturation[u] -= 1
            colour[v] = -1
        c = begin
        last = min(used[depth] + 1, colours)
        while c < last and around[v, c] > 0:
            c += 1
        if c >= last:
            if depth == 0:
                return NONE, nodes
            depth -= 1
            v = chosen[depth]
            continue
        nodes += 1
        if nodes > most:
            return MANY, nodes
        if (nodes & 1023) == 0 and cells[STOP] != 0:
            return STOPPED, nodes
        colour[v] = c
        chosen[depth] = v
        for e in range(ptr[v], ptr[v + 1]):
            u = adj[e]
            if around[u, c] == 0:
                saturation[u] += 1
            around[u, c] += 1
        used[depth + 1] = max(used[depth], c + 1)
        depth += 1
        v = -1
    return FOUND, nodes
