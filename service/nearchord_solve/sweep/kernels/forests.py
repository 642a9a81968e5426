"""Counting the states that a bag has in the forest program.

F is the graph of the fill edges inside a bag of b vertices; T are the vertices that touch fill, u = b - |T| the
others, which are adjacent in G to everything in the bag.  A state is a set X with no cycle of G inside, with a
partition of those components of X that meet the adhesion: how they are connected outside.  With a vertex outside T, X
is a star or a single edge, hence connected, and its partition trivial: there are u (1 + N) + C(u, 2) of these, N being
the number of non-empty cliques of F.  Here the sets inside T are counted.
"""

import numpy as np

from nearchord_solve.kernels.cells import STOP
from nearchord_solve.kernels.cliques import depth_limit
from nearchord_solve.kernels.compiled import I32, I64, U64, kernel, lowest, ones
from nearchord_solve.kernels.words import clear, full, holds

ONE = np.uint64(1)
MOST_TREES = 14  # more trees have over 10**9 partitions


@kernel
def symmetric(rows: U64) -> U64:
    """Both directions of upper rows."""
    t = rows.shape[0]
    both = rows.copy()
    for i in range(t):
        for j in range(i + 1, t):
            if holds(rows[i], j):
                both[j, i >> 6] |= ONE << np.uint64(i & 63)
    return both


@kernel
def count_joinings(ports: I64, count: int, most: int) -> int:
    """Ways to connect trees further without a cycle; tree i has ``ports[i]`` >= 1 places where it can be connected.

    Connections are disjoint groups of two or more places.  Those that connect c trees of s_1, ..., s_c places (N in
    all) to one number prod s_i * sum over k of S(c-1, k) (N-c)(N-c-1)...(N-c-k+2): so many hypertrees with k edges
    there are, summed over degrees d_i with s_i (s_i - 1) ... (s_i - d_i + 1) choices each; S are Stirling numbers of
    the second kind.  Then sum over the partitions of the trees.  Saturates above ``most``.  O(3^c).
    """
    if count <= 1:
        return 1
    if count > MOST_TREES:
        return most + 1
    stirling = np.zeros((count, count), np.int64)
    stirling[0, 0] = 1
    for a in range(1, count):
        for b in range(1, a + 1):
            stirling[a, b] = stirling[a - 1, b - 1] + b * stirling[a - 1, b]
    size = 1 << count
    tied = np.ones(size, np.float64)
    for chosen in range(1, size):
        trees = 0
        places = 0
        product = 1.0
        for i in range(count):
            if (chosen >> i) & 1:
                trees += 1
                places += ports[i]
                product *= ports[i]
        if trees > 1:
            total = 0.0
            falling = 1.0
            for k in range(1, trees):
                total += stirling[trees - 1, k] * falling
                falling *= places - trees - k + 1
                if falling <= 0.0:
                    break
            tied[chosen] = product * total
    ways = np.ones(size, np.float64)
    for chosen in range(1, size):
        first = chosen & -chosen
        rest = chosen ^ first
        total = 0.0
        part = rest
        while True:
            total += tied[first | part] * ways[rest ^ part]
            if part == 0:
                break
            part = (part - 1) & rest
        ways[chosen] = total
    return int(min(ways[size - 1], float(most + 1)))


@kernel
def _partitions(chosen: I32, size: int, tree: I32, near: U64, lead: int, outside: U64, most: int) -> int:
    """Partitions of the trees of a set that meet the adhesion, as far as what lies below can connect them.

    ``chosen`` ascending, its trees in ``tree``; the first ``lead`` vertices of the bag are in the adhesion;
    ``outside``: vertices that lie below too, in an adhesion with fill.  What the set itself connects through vertices
    outside the adhesion is connected already: those groups of adhesion vertices that reach ``outside`` can be
    connected further.
    """
    group = np.arange(size)
    for i in range(size):
        for j in range(i):
            if chosen[i] >= lead and not holds(near[chosen[i]], chosen[j]) and group[i] != group[j]:
                old = group[i]
                for k in range(size):
                    if group[k] == old:
                        group[k] = group[j]
    ports = np.zeros(size, np.int64)
    for g in range(size):
        meets = False
        reaches = False
        owner = 0
        for i in range(size):
            if group[i] == g:
                meets |= chosen[i] < lead
                reaches |= holds(outside, chosen[i])
                owner = tree[i]
        if meets and reaches:
            ports[owner] += 1
    count = 0
    for g in range(size):
        if ports[g] > 0:
            ports[count] = ports[g]
            count += 1
    return count_joinings(ports, count, most)


@kernel
def count_forests(rows: U64, edges: int, lead: int, outside: U64, joined: bool, most: int, cells: I64) -> int:
    """States of the forest program whose sets lie inside T, the empty one included; at most about ``most``.

    ``rows`` uint64[t, W] upper rows of F.  ``joined``: whether partitions have to be counted, see
    :func:`_partitions`; otherwise each set counts once.  Sets grow by ascending vertices; a candidate stays one while
    it has at most one neighbour in each tree, and only the tree that changed is looked at.
    """
    t, words = rows.shape
    near = symmetric(rows)
    deepest = min(t, 2 * depth_limit(t, edges)) + 2
    open_ = np.zeros((deepest, words), np.uint64)
    tree = np.zeros((deepest, deepest), np.int32)
    chosen = np.zeros(deepest, np.int32)
    merged = np.zeros(words, np.uint64)
    open_[0] = full(t, words)
    total = 1 if joined else 1 + t
    depth = 0
    while depth >= 0:
        if total > most or cells[STOP] != 0:
            break
        w = 0
        while w < words and open_[depth, w] == 0:
            w += 1
        if w == words:
            depth -= 1
            continue
        v = (w << 6) + lowest(open_[depth, w])
        clear(open_[depth], v)
        below = depth + 1
        chosen[depth] = v
        merged[:] = 0
        merged[v >> 6] |= ONE << np.uint64(v & 63)
        for i in range(depth):
            tree[below, i] = tree[depth, i]
        tree[below, depth] = depth
        for i in range(depth):
            if not holds(near[v], chosen[i]) and tree[below, i] != depth:
                old = tree[below, i]
                for k in range(depth):
                    if tree[below, k] == old:
                        tree[below, k] = depth
        for i in range(depth):
            if tree[below, i] == depth:
                merged[chosen[i] >> 6] |= ONE << np.uint64(chosen[i] & 63)
        more = 0
        for y in range(words):
            word = open_[depth, y]
            kept = word
            while word != 0:
                x = (y << 6) + lowest(word)
                word &= word - ONE
                ties = 0
                for z in range(words):
                    ties += ones(merged[z] & ~near[x, z])
                if ties > 1:
                    kept &= ~(ONE << np.uint64(x & 63))
            open_[below, y] = kept
            more += ones(kept)
        if joined:
            total += _partitions(chosen, below, tree[below], near, lead, outside, most)
        else:
            total += more
        if more > 0:
            depth = below
    return total
