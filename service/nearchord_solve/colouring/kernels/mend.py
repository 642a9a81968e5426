"""Mending a colouring that has conflicts by tabu search.

A move gives a vertex that shares its colour with a neighbour another colour; the best move that is not barred is made,
and the colour left is barred for the vertex for a while (Hertz and de Werra, Using tabu search techniques for graph
coloring, Computing 39 (1987) 345-351).
"""

import numpy as np

from nearchord_solve.kernels.cells import STOP
from nearchord_solve.kernels.compiled import I32, I64, U64, kernel
from nearchord_solve.kernels.local_search import draw


@kernel
def count_around(ptr: I64, adj: I32, colours: int, colour: I32) -> tuple[I32, int]:
    """Neighbours by colour int32[n, colours], and pairs of neighbours of one colour."""
    n = colour.shape[0]
    around = np.zeros((n, colours), np.int32)
    twice = 0
    for v in range(n):
        for e in range(ptr[v], ptr[v + 1]):
            around[v, colour[adj[e]]] += 1
        twice += around[v, colour[v]]
    return around, twice >> 1


@kernel
def mend(ptr: I64, adj: I32, colours: int, colour: I32, turns: int, random: U64, cells: I64) -> int:
    """Make up to ``turns`` moves from ``colour`` int32[n], which is changed; returns the conflicts left.

    Each colour in 0..colours-1, at least two of them.  A turn costs O(n + conflicts x colours); memory n x colours.
    """
    n = colour.shape[0]
    around, conflicts = count_around(ptr, adj, colours, colour)
    barred = np.zeros((n, colours), np.int64)
    fewest = conflicts
    spread = int(np.int64(10))  # a literal would compile what it is passed to anew
    for turn in range(1, turns + 1):
        if conflicts == 0 or ((turn & 255) == 0 and cells[STOP] != 0):
            break
        best = int(np.int64(1 << 40))
        ties = 0
        mover = -1
        target = -1
        clashing = 0
        for v in range(n):
            here = around[v, colour[v]]
            if here == 0:
                continue
            clashing += 1
            for c in range(colours):
                change = around[v, c] - here
                if c == colour[v] or change > best:
                    continue
                if barred[v, c] > turn and conflicts + change >= fewest:
                    continue
                if change < best:
                    best = change
                    ties = 0
                ties += 1
                if ties == 1 or draw(random, ties) == 0:
                    mover = v
                    target = c
        if mover < 0:
            continue
        old = colour[mover]
        for e in range(ptr[mover], ptr[mover + 1]):
            around[adj[e], old] -= 1
            around[adj[e], target] += 1
        colour[mover] = target
        conflicts += best
        fewest = min(fewest, conflicts)
        barred[mover, old] = turn + (clashing * 3) // 5 + draw(random, spread) + 1
    return conflicts
