"""What stands in for a core whose tables do not fit: a bound from cliques, a choice from greed.

Weight splitting: if a clique Q takes y from the residual weight of each of its members and adds y to the base
value, no independent set loses by it, as it meets Q at most once.
"""

import numpy as np

from nearchord_solve.kernels.compiled import I32, I64, U8, kernel
from nearchord_solve.kernels.layout import Cover


@kernel
def cover_core(homes: I32, low_ptr: I64, low: I32, residual: I64, seen: I32, cover: Cover) -> int:
    """Take all positive residual weight of ``homes`` by cliques of G; returns what they add to the base.

    ``homes``: places of one core, ascending.  Going down, the clique of i grows greedily over L(i), heavier
    residuals not preferred but higher places first.  ``seen`` int32[n] must be 0 and is so again on return.
    ``residual`` is changed; the cliques are written to ``cover``, which needs room for one clique a home and for
    all L(i) with i.  O(sum of squared degrees) time.
    """
    base = 0
    cliques = cover.cliques[0]
    entry = cover.ptr[cliques]
    for h in range(homes.shape[0] - 1, -1, -1):
        i = homes[h]
        gain = residual[i]
        if gain <= 0:
            continue
        base += gain
        residual[i] = 0
        cover.weight[cliques] = gain
        cover.place[entry] = i
        entry += 1
        around = np.sort(low[low_ptr[i] : low_ptr[i + 1]])
        for e in range(around.shape[0]):
            seen[around[e]] = 1
        size = 1
        for e in range(around.shape[0] - 1, -1, -1):
            u = around[e]
            if seen[u] != size or (residual[u] <= 0 and u >= homes[0]):
                continue
            residual[u] -= gain
            cover.place[entry] = u
            entry += 1
            for f in range(low_ptr[u], low_ptr[u + 1]):
                if seen[low[f]] == size:
                    seen[low[f]] = size + 1
            size += 1
        for e in range(around.shape[0]):
            seen[around[e]] = 0
        cliques += 1
        cover.ptr[cliques] = entry
    cover.cliques[0] = cliques
    return base


@kernel
def choose_greedily(homes: I32, low_ptr: I64, low: I32, residual: I64, chosen: U8, blocked: U8) -> None:
    """Choose homes by falling residual weight, ties to the lower place, next to what is chosen already.

    ``chosen`` uint8[n] is extended; ``blocked`` uint8[n] marks places with a chosen higher neighbour.
    """
    by_weight = np.argsort(-residual[homes], kind="mergesort")
    for h in by_weight:
        i = homes[h]
        if residual[i] <= 0:
            break
        if blocked[i] != 0:
            continue
        free = True
        for e in range(low_ptr[i], low_ptr[i + 1]):
            if chosen[low[e]] != 0:
                free = False
                break
        if free:
            chosen[i] = 1
            for e in range(low_ptr[i], low_ptr[i + 1]):
                blocked[low[e]] = 1
