"""A feasible set and a bound in linear time, for solves that are stopped before they have anything better."""

from nearchord_solve.kernels.compiled import I32, I64, U8, kernel


@kernel
def choose_in_order(ptr: I64, adj: I32, sequence: I64, weights: I64, chosen: U8) -> int:
    """Take each vertex of ``sequence`` of positive weight that has no neighbour taken yet; returns the weight.

    ``chosen`` uint8[n] is overwritten.  O(n + m).
    """
    chosen[:] = 0
    total = 0
    for v in sequence:
        free = weights[v] > 0
        if free:
            for e in range(ptr[v], ptr[v + 1]):
                if chosen[adj[e]]:
                    free = False
                    break
        if free:
            chosen[v] = 1
            total += weights[v]
    return total


@kernel
def split_over_edges(ptr: I64, adj: I32, residual: I64) -> int:
    """An upper bound from disjoint shares of edges: no independent set has both ends of an edge.

    Going through the edges, each takes from both its ends the lighter residual.  ``residual`` int64[n] holds
    the weights and is overwritten.  O(n + m).
    """
    total = 0
    for v in range(residual.shape[0]):
        for e in range(ptr[v], ptr[v + 1]):
            u = adj[e]
            share = min(residual[v], residual[u])
            if u > v and share > 0:
                residual[v] -= share
                residual[u] -= share
                total += share
        total += residual[v]
    return total
