"""Feasible choices by greed, for solves without tables."""

import numpy as np

from nearchord_solve.kernels.compiled import I32, I64, U8, kernel


@kernel
def colour_in_order(ptr: I64, adj: I32, sequence: I64, colours: int, colour: U8) -> None:
    """Each vertex of ``sequence`` without a colour takes the lowest free among its neighbours, if any.  O(n + m).

    ``colour`` uint8[n]: 1..colours, 0 for vertices without; those that get one are overwritten.
    """
    for v in sequence:
        if colour[v]:
            continue
        taken = 1
        for e in range(ptr[v], ptr[v + 1]):
            taken |= 1 << colour[adj[e]]
        mine = 1
        while (taken >> mine) & 1:
            mine += 1
        if mine <= colours:
            colour[v] = mine


@kernel
def _root(parent: I32, v: int) -> int:
    while parent[v] != v:
        parent[v] = parent[parent[v]]
        v = parent[v]
    return v


@kernel
def grow_forest(ptr: I64, adj: I32, sequence: I64, chosen: U8) -> None:
    """Each vertex of ``sequence`` joins unless two of its neighbours are in one tree.  O((n + m) log n).

    ``chosen`` uint8[n] is overwritten.
    """
    n = chosen.shape[0]
    parent = np.arange(n).astype(np.int32)
    seen = np.full(n, -1, np.int32)
    chosen[:] = 0
    for v in sequence:
        free = True
        for e in range(ptr[v], ptr[v + 1]):
            u = adj[e]
            if chosen[u]:
                root = _root(parent, u)
                if seen[root] == v:
                    free = False
                    break
                seen[root] = v
        if free:
            chosen[v] = 1
            for e in range(ptr[v], ptr[v + 1]):
                if chosen[adj[e]]:
                    parent[_root(parent, adj[e])] = v
    return
