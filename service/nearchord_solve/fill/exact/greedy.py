"""Upper bounds: greedy elimination with prices, made minimal."""

import numpy as np
from numpy.typing import NDArray

from nearchord_solve.fill.exact.atoms import triangulation_fill
from nearchord_solve.fill.exact.core import Core, Pair, joined
from nearchord_solve.fill.exact.words import has, new_pairs, put, rows_of, take, unpack
from nearchord_solve.kernels.compiled import I64, U64, kernel

F64 = NDArray[np.float64]

BY_DEGREE, BY_FILL = 0, 1


@kernel
def _score(rows: U64, left: U64, v: int, rule: int, price: F64, size: F64, near: I64) -> float:
    """Cost of eliminating v next: sum of prices of the missing pairs, or total size of the neighbours."""
    count = unpack(rows[v] & left, near)
    total = 0.0
    if rule == 0:
        for i in range(count):
            total += size[near[i]]
        return total
    for i in range(count):
        a = near[i]
        for j in range(i + 1, count):
            if not has(rows, a, near[j]):
                total += price[a, near[j]]
    return total


@kernel
def eliminate(rows: U64, rule: int, price: F64, size: F64, noise: F64) -> None:
    """Eliminate a vertex of least score at a time and add the missing pairs among its neighbours.

    ``rows`` uint64[n, W] is overwritten with the triangulation.  ``price`` float64[n, n] symmetric, ``size`` and
    ``noise`` float64[n]; ties by least score + noise, then lowest vertex.  Invariant: scores of the vertices left are
    up to date with the pairs added.  O(n) rounds, each O(affected vertices * degree^2).
    """
    n, width = rows.shape
    left = np.zeros(width, np.uint64)
    for v in range(n):
        left[v >> 6] |= np.uint64(1) << np.uint64(v & 63)
    near = np.empty(n, np.int64)
    spare = np.empty(n, np.int64)
    score = np.empty(n, np.float64)
    for v in range(n):
        score[v] = _score(rows, left, v, rule, price, size, spare)
    touched = np.zeros(width, np.uint64)
    for _ in range(n):
        best = -1
        for v in range(n):
            if has_bit(left, v) and (best < 0 or score[v] + noise[v] < score[best] + noise[best] - 1e-12):
                best = v
        left[best >> 6] &= ~(np.uint64(1) << np.uint64(best & 63))
        count = unpack(rows[best] & left, near)
        for w in range(width):
            touched[w] = rows[best, w] & left[w]
        for i in range(count):
            for j in range(i + 1, count):
                if not has(rows, near[i], near[j]):
                    put(rows, near[i], near[j])
                    for w in range(width):
                        touched[w] |= rows[near[i], w] & rows[near[j], w] & left[w]
        count = unpack(touched, near)
        for i in range(count):
            score[near[i]] = _score(rows, left, near[i], rule, price, size, spare)


@kernel
def has_bit(words: U64, v: int) -> bool:
    """Whether v is in the set."""
    return (words[v >> 6] >> np.uint64(v & 63)) & np.uint64(1) != 0


@kernel
def thin(filled: U64, graph: U64) -> int:
    """Remove fill edges one at a time while the graph stays chordal; returns how many.

    ``filled`` uint64[n, W] chordal, contains ``graph``; overwritten.  An edge uv of a chordal graph can go iff the
    common neighbours of u and v form a clique.  Rounds repeat until one removes nothing, which gives a minimal
    triangulation (Rose, Tarjan, Lueker, SIAM J. Comput. 5 (1976) 266-283).
    """
    n, width = filled.shape
    near = np.empty(n, np.int64)
    common = np.empty(width, np.uint64)
    removed = 0
    changed = True
    while changed:
        changed = False
        for u in range(n):
            for v in range(u + 1, n):
                if not has(filled, u, v) or has(graph, u, v):
                    continue
                for w in range(width):
                    common[w] = filled[u, w] & filled[v, w]
                count = unpack(common, near)
                clique = True
                for i in range(count):
                    x = near[i]
                    for w in range(width):
                        rest = common[w] & ~filled[x, w]
                        if x >> 6 == w:
                            rest &= ~(np.uint64(1) << np.uint64(x & 63))
                        if rest != 0:
                            clique = False
                            break
                    if not clique:
                        break
                if clique:
                    take(filled, u, v)
                    removed += 1
                    changed = True
    return removed


def prices_of(core: Core) -> F64:
    """What a fill edge between two vertices costs: float64[n, n]."""
    sizes = np.array(core.sizes, np.float64)
    return np.outer(sizes, sizes)


def completed(core: Core, rule: int, price: F64, noise: F64) -> list[Pair]:
    """Fill of one greedy elimination, made minimal."""
    graph = rows_of(core.adj)
    filled = graph.copy()
    eliminate(filled, rule, price, np.array(core.sizes, np.float64), noise)
    thin(filled, graph)
    return new_pairs(core.adj, filled)


def portfolio(core: Core, restarts: int) -> list[Pair]:
    """The cheapest of: MCS-M, minimum degree, minimum fill, and ``restarts`` of minimum fill with shaken ties.

    All minimal triangulations.  Deterministic: the shaking is a fixed sequence.
    """
    still = np.zeros(core.n)
    price = prices_of(core)
    found = [
        triangulation_fill(core.adj, core.everything),
        completed(core, BY_DEGREE, price, still),
        completed(core, BY_FILL, price, still),
    ]
    random = np.random.default_rng(core.n)
    for turn in range(restarts):
        noise = random.random(core.n) * (0.5 if turn % 2 else 2.0)
        found.append(completed(core, BY_FILL, price, noise))
    return min(found, key=core.cost)


def is_triangulation(core: Core, pairs: list[Pair]) -> bool:
    """Whether adding ``pairs`` makes the core chordal."""
    filled = joined(core.adj, pairs)
    left = core.everything
    while left:
        for v in range(core.n):
            near = filled[v] & left
            if left >> v & 1 and all(not near & ~filled[u] & ~(1 << u) for u in range(core.n) if near >> u & 1):
                left ^= 1 << v
                break
        else:
            return False
    return True
