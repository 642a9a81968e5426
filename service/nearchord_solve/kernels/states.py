"""Counting the states that a bag has in each dynamic program.

F is the graph of the fill edges inside a bag of b vertices; T are the vertices that touch fill, u = b - |T| the
others, which are adjacent in G to everything in the bag.  A set without an edge of G inside is a clique of F.

* *Colour classes.*  A state is a set of at most q disjoint non-empty cliques of F (names of colours are given in the
  order of the lowest vertices).  With N_i such sets of exactly i cliques inside T there are
  sum over j <= q of C(u, j) (N_0 + ... + N_{q-j}), as each vertex outside T is a class of its own.
* *Forests.*  A state is a set X with no cycle of G inside, with a partition of those components of X that meet the
  adhesion: how they are connected outside.  With a vertex outside T, X is a star or a single edge, hence connected.
  Where the partition is trivial there are u (1 + N_1) + C(u, 2) states beside the sets X inside T.
"""

import numpy as np

from nearchord_solve.kernels.cells import STOP
from nearchord_solve.kernels.cliques import depth_limit
from nearchord_solve.kernels.compiled import I32, I64, U64, kernel, lowest, ones

ONE = np.uint64(1)
MOST_TREES = 14  # more trees have over 10**9 partitions


@kernel
def _clear(words: U64, i: int) -> None:
    words[i >> 6] &= ~(ONE << np.uint64(i & 63))


@kernel
def _holds(words: U64, i: int) -> bool:
    return bool((words[i >> 6] >> np.uint64(i & 63)) & ONE)


@kernel
def _full(count: int, words: int) -> U64:
    everything = np.zeros(words, np.uint64)
    for i in range(count):
        everything[i >> 6] |= ONE << np.uint64(i & 63)
    return everything


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
    spare[0] = _full(t, words)
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
            _clear(open_[depth], v)
            level += 1
        else:
            _clear(grow[depth], v)
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
        _clear(spare[below], v)
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


@kernel
def symmetric(rows: U64) -> U64:
    """Both directions of upper rows."""
    t = rows.shape[0]
    both = rows.copy()
    for i in range(t):
        for j in range(i + 1, t):
            if _holds(rows[i], j):
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
            if chosen[i] >= lead and not _holds(near[chosen[i]], chosen[j]) and group[i] != group[j]:
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
                reaches |= _holds(outside, chosen[i])
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
    open_[0] = _full(t, words)
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
        _clear(open_[depth], v)
        below = depth + 1
        chosen[depth] = v
        merged[:] = 0
        merged[v >> 6] |= ONE << np.uint64(v & 63)
        for i in range(depth):
            tree[below, i] = tree[depth, i]
        tree[below, depth] = depth
        for i in range(depth):
            if not _holds(near[v], chosen[i]) and tree[below, i] != depth:
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
