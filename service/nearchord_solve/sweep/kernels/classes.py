"""Counting the states that a bag has in the dynamic program over colour classes.

F is the graph of the fill edges inside a bag of b vertices; T are the vertices that touch fill, u = b - |T| the
others, which are adjacent in G to everything in the bag.  A set without an edge of G inside is a clique of F.

A state is a set of at most q disjoint non-empty cliques of F (names of colours are given in the
order of the lowest vertices).  With N_i such sets of exactly i cliques inside T there are
sum over j <= q of C(u, j) (N_0 + ... + N_{q-j}), as each vertex outside T is a class of its own.
"""

import numpy as np

from nearchord_solve.kernels.cells import STOP
from nearchord_solve.kernels.cliques import depth_limit
from nearchord_solve.kernels.compiled import I64, U64, kernel, lowest, ones
from nearchord_solve.kernels.words import clear, full

ONE = np.uint64(1)


@kernel
def count_classes(rows: U64, edges: int, colours: int, most: int, cells: I64) -> I64:
    """Sets of exactly 1..``colours`` disjoint non-empty cliques: int64[colours + 1], the first entry is 1.

    ``rows`` uint64[t, W] upper rows of F.  Stops counting when all together exceed ``most``, or when told to.  The
    search adds one vertex at a time: to the last class, above its vertices, or as a new class, above the lowest
    vertex of the last one; so each set is met once.  ``grow`` and ``open_`` hold the candidates for both.
    Children are counted by popcount, so time is O(W) per state that has children.
    """
    t, words = rows.shape
    found = np.zeros(colours + 1, np.int64)
    found[0] = 1
    deepest = min(t, colours * depth_limit(t, edges)) + 2
    grow = np.zeros((deepest, words), np.uint64)
    open_ = np.zeros((deepest, words), np.uint64)
    spare = np.zeros((deepest, words), np.uint64)  # vertices in no class, above the lowest of the last
    classes = np.zeros(deepest, np.int64)
    spare[0] = full(t, words)
    open_[0] = spare[0]
    found[1] = t
    total = t
    depth = 0
    while depth >= 0:
        if total > most or cells[STOP] != 0:
            break
        level = classes[depth]
        w = 0
        fresh = False
        while w < words and grow[depth, w] == 0:
            w += 1
        if w == words:
            fresh = True
            w = 0
            while w < words and open_[depth, w] == 0:
                w += 1
        if w == words:
            depth -= 1
            continue
        v = (w << 6) + lowest(open_[depth, w] if fresh else grow[depth, w])
        below = depth + 1
        if fresh:
            clear(open_[depth], v)
            level += 1
        else:
            clear(grow[depth], v)
        more = 0
        opened = 0
        for y in range(words):
            rest = spare[depth, y]
            if fresh:  # only vertices above v stay of interest
                if y < v >> 6:
                    rest = np.uint64(0)
                elif y == v >> 6:
                    rest &= ~((ONE << np.uint64(v & 63)) - ONE)
            spare[below, y] = rest
            grow[below, y] = (rest if fresh else grow[depth, y]) & rows[v, y]
            more += ones(grow[below, y])
        clear(spare[below], v)
        for y in range(words):
            open_[below, y] = spare[below, y] if level < colours else np.uint64(0)
            opened += ones(open_[below, y])
        found[level] += more
        if opened > 0:
            found[level + 1] += opened
        total += more + opened
        classes[below] = level
        if (more > 0 and (more > 1 or level < colours)) or opened > 0:
            depth = below
    return found
