"""Cliques of the fill graph of one bag.

The independent sets of G inside a bag are the cliques of its fill graph F (the bag is a clique of G + F).
Only vertices that touch fill are looked at.  With f fill edges in a bag of b vertices, f = d(d-1)/2 + l and
0 <= l < d, there are at most 2^d + 2^l + b - d - 1 cliques, the empty one included: a graph with f edges has the
most cliques when it is a clique on d vertices with one more vertex joined to l of them (Kruskal-Katona; Wood,
Graphs and Combinatorics 23 (2007) 337-352), and the other b - d - 1 or more vertices add one each.
"""

import numpy as np

from nearchord_solve.kernels.cells import STOP
from nearchord_solve.kernels.compiled import I32, I64, U64, kernel, lowest, ones

ONE = np.uint64(1)


@kernel
def touched(bag_slot: I32, begin: int, end: int, fill_ptr: I64, fill: I32, where: I32) -> tuple[I32, U64, int]:
    """The fill graph of a bag, on the vertices that touch fill.

    The bag is ``bag_slot[begin:end]``, ascending slots; slot s has the fill edges ``fill[fill_ptr[s]:...]`` to
    lower slots.  ``where`` int32[slots] must be -1 everywhere and is so again on return.  Returns the touched
    slots int32[t], ascending, the rows uint64[t, W] with bits for higher touched vertices only, and f.
    O(sum of fill lists).
    """
    for e in range(begin, end):
        where[bag_slot[e]] = 0
    edges = 0
    for e in range(begin, end):
        s = bag_slot[e]
        for g in range(fill_ptr[s], fill_ptr[s + 1]):
            if where[fill[g]] >= 0:
                where[fill[g]] = 1
                where[s] = 1
                edges += 1
    count = 0
    for e in range(begin, end):
        count += where[bag_slot[e]]
    slots = np.empty(count, np.int32)
    count = 0
    for e in range(begin, end):
        s = bag_slot[e]
        if where[s] == 1:
            slots[count] = s
            where[s] = count
            count += 1
        else:
            where[s] = -1
    rows = np.zeros((count, (count + 63) >> 6), np.uint64)
    for j in range(count):
        s = slots[j]
        for g in range(fill_ptr[s], fill_ptr[s + 1]):
            i = where[fill[g]]
            if i >= 0:
                rows[i, j >> 6] |= ONE << np.uint64(j & 63)
    for j in range(count):
        where[slots[j]] = -1
    return slots, rows, edges


@kernel
def depth_limit(count: int, edges: int) -> int:
    """Most vertices of a clique in a graph of ``count`` vertices and ``edges`` edges: s(s-1)/2 <= edges."""
    size = int((1.0 + np.sqrt(1.0 + 8.0 * edges)) / 2.0) + 1
    return min(count, size) + 1


@kernel
def count_cliques(rows: U64, first: int, edges: int, most: int, cells: I64) -> int:
    """Number of cliques of two or more among the first ``first`` vertices, but stop counting above ``most``.

    ``rows`` uint64[t, W] upper rows.  Each clique is met once, in ascending order of its vertices; the last
    vertex is counted by popcount, so time is O(W) per clique that can still grow.
    """
    words = rows.shape[1]
    stack = np.empty((depth_limit(first, edges), words), np.uint64)
    inside = np.zeros(words, np.uint64)
    for i in range(first):
        inside[i >> 6] |= ONE << np.uint64(i & 63)
    total = 0
    for i in range(first):
        size = 0
        for w in range(words):
            stack[0, w] = rows[i, w] & inside[w]
            size += ones(stack[0, w])
        total += size
        depth = 0 if size > 1 else -1
        while depth >= 0:
            if total > most or cells[STOP] != 0:
                return total
            w = 0
            while w < words and stack[depth, w] == 0:
                w += 1
            if w == words:
                depth -= 1
                continue
            j = (w << 6) + lowest(stack[depth, w])
            stack[depth, w] &= stack[depth, w] - ONE
            size = 0
            for y in range(words):
                stack[depth + 1, y] = stack[depth, y] & rows[j, y]
                size += ones(stack[depth + 1, y])
            total += size
            if size > 1:
                depth += 1
    return total
