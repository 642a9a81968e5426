"""Greedy elimination on bit rows, with prices."""

import numpy as np

from nearchord_solve.fill.exact.kernels.words import F64, contains, fill_up, leave_out, unpack
from nearchord_solve.fill.kernels.dense import holds, set_pair
from nearchord_solve.kernels.compiled import I64, U64, kernel

BY_DEGREE, BY_FILL = 0, 1


@kernel
def _score(rows: U64, left: U64, v: int, rule: int, price: F64, size: F64, near: I64) -> float:
    """Cost of eliminating v next: total size of its neighbours, or the prices of their missing pairs."""
    count = unpack(rows[v] & left, near)
    total = 0.0
    if rule == BY_DEGREE:
        for i in range(count):
            total += size[near[i]]
        return total
    for i in range(count):
        a = near[i]
        for j in range(i + 1, count):
            b = near[j]
            if not holds(rows, a, b):
                total += size[a] * size[b] if price.shape[0] == 0 else price[a, b]
    return total


@kernel
def _join(rows: U64, left: U64, near: I64, count: int, touched: U64) -> None:
    """Make near[:count] a clique; adds to ``touched`` the vertices left that see a new pair."""
    for i in range(count):
        for j in range(i + 1, count):
            if not holds(rows, near[i], near[j]):
                set_pair(rows, near[i], near[j])
                for w in range(left.shape[0]):
                    touched[w] |= rows[near[i], w] & rows[near[j], w] & left[w]


@kernel
def eliminate(rows: U64, rule: int, price: F64, size: F64, noise: F64) -> None:
    """Eliminate a vertex of least score + noise at a time and add the missing pairs among its neighbours.

    ``rows`` uint64[n, W] is overwritten with the triangulation.  ``rule`` BY_DEGREE or BY_FILL; ``price`` float64[n, n]
    symmetric, or of shape (0, 0) for the products of sizes; ``size`` and ``noise`` float64[n].  Ties go to the lowest
    vertex.  Invariant: the scores of the vertices left are up to date.  O(n) rounds, each
    O(affected vertices * degree^2).
    """
    n, width = rows.shape
    left = np.empty(width, np.uint64)
    fill_up(left, n)
    near = np.empty(n, np.int64)
    spare = np.empty(n, np.int64)
    score = np.empty(n, np.float64)
    for v in range(n):
        score[v] = _score(rows, left, v, rule, price, size, spare)
    for _ in range(n):
        best = -1
        for v in range(n):
            if contains(left, v) and (best < 0 or score[v] + noise[v] < score[best] + noise[best] - 1e-12):
                best = v
        leave_out(left, best)
        touched = rows[best] & left
        count = unpack(touched, near)
        _join(rows, left, near, count, touched)
        count = unpack(touched, near)
        for i in range(count):
            score[near[i]] = _score(rows, left, near[i], rule, price, size, spare)
