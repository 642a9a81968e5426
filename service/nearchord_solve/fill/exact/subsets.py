"""Engine for small cores: dynamic programming over sets of eliminated vertices.

Let Q(S, v) be the vertices outside S + v reached from v by paths through S.  Eliminating v when exactly S has gone
makes v adjacent to Q(S, v), so best(S + v) = min over v of best(S) + w(v, Q(S, v) - N(v)), where w sums products of
sizes.  A minimum triangulation has an elimination order that ends with any given clique of the graph, so only sets
outside a largest clique are visited.  If some Q(S, v) is a clique by then, v goes next without loss.  Sets
that already cost more than the limit are dropped.
Time O(2^k n^2) word operations and 3 * 2^k bytes for k vertices outside the clique
(Bodlaender, Fomin, Koster, Kratsch, Thilikos, Theory Comput. Syst. 50 (2012) 420-432).
"""

import numpy as np
from numpy.typing import NDArray

from nearchord_solve.fill.exact.core import Core, Mask, Pair, members
from nearchord_solve.fill.exact.status import Status
from nearchord_solve.kernels.compiled import I64, U64, kernel, lowest, ones

MOST_FREE = 24
MOST_VERTICES = 62
_MOST_COST = 2**16 - 2


def largest_clique(core: Core) -> Mask:
    """A clique of most vertices, by branch and bound on remaining candidates; meant for small cores."""
    best = 0
    stack = [(0, core.everything)]
    while stack:
        chosen, open_ = stack.pop()
        if not open_:
            if chosen.bit_count() > best.bit_count():
                best = chosen
            continue
        if chosen.bit_count() + open_.bit_count() <= best.bit_count():
            continue
        v = max(members(open_), key=lambda u: ((core.adj[u] & open_).bit_count(), -u))
        stack.append((chosen, open_ & ~(1 << v)))
        stack.append((chosen | 1 << v, open_ & core.adj[v]))
    return best


def free_vertices(core: Core) -> int:
    """Vertices outside a largest clique: the exponent of the engine's cost; a large number if the core is too big."""
    if core.n > MOST_VERTICES:
        return core.n
    return core.n - largest_clique(core).bit_count()


def solve_subsets(core: Core, limit: int, cells: I64) -> tuple[Status, list[Pair]]:
    """A minimum fill of at most ``limit`` edges.

    Returns (FOUND, fill), (NONE, []) if every fill costs more than ``limit``, or (STOPPED, []).  At most 62
    vertices, at most 24 of them outside a largest clique.
    """
    clique = largest_clique(core)
    order = [*members(core.everything & ~clique), *members(clique)]
    free = core.n - clique.bit_count()
    place = {v: i for i, v in enumerate(order)}
    adj = np.array([sum(1 << place[u] for u in members(core.adj[v])) for v in order], np.uint64)
    sizes = np.array([core.sizes[v] for v in order], np.int64)
    last = np.full(1 << free, -1, np.int8)
    status = Status(_sweep(adj, sizes, free, min(limit, _MOST_COST), last, cells))
    if status is not Status.FOUND:
        return status, []
    gone = (1 << free) - 1
    pairs = []
    sequence = []
    while gone:
        v = int(last[gone])
        sequence.append(v)
        gone ^= 1 << v
    rows = [int(a) for a in adj]
    left = core.everything
    for v in reversed(sequence):
        left &= ~(1 << v)
        near = rows[v] & left
        for u in members(near):
            for x in members(near & ~rows[u] & ~((2 << u) - 1)):
                pairs.append((min(order[u], order[x]), max(order[u], order[x])))
            rows[u] |= near & ~(1 << u)
    return Status.FOUND, pairs


@kernel
def _weight(words: np.uint64, sizes: I64, plain: bool) -> int:
    if plain:
        return ones(words)
    total = 0
    left = words
    while left != 0:
        total += sizes[lowest(left)]
        left &= left - np.uint64(1)
    return total


@kernel
def _sweep(adj: U64, sizes: I64, free: int, limit: int, last: NDArray[np.int8], cells: I64) -> int:
    """Visit the sets in ascending order, each after all its subsets.

    ``adj`` uint64[n], ``sizes`` int64[n]; ``last`` int8[2^free] is overwritten with the vertex eliminated last, -1 for
    sets not reached.  Costs are uint16 and stay at most ``limit`` <= 65534.
    """
    n = adj.shape[0]
    one = np.uint64(1)
    best = np.full(1 << free, 65535, np.uint16)
    best[0] = 0
    plain = sizes.max() == 1
    reached = np.empty(n, np.uint64)
    everything = (one << np.uint64(n)) - one
    outside = np.uint64(0)
    for gone in range(1 << free):
        if (gone & 4095) == 0 and cells[0] != 0:
            return 1
        so_far = np.int64(best[gone])
        if so_far > limit:
            continue
        inside = np.uint64(gone)
        outside = everything & ~inside
        left = outside
        while left != 0:
            v = lowest(left)
            left &= left - one
            reached[v] = adj[v]
        rest = inside
        while rest != 0:
            part = rest & (~rest + one)
            frontier = part
            near = np.uint64(0)
            while frontier != 0:
                u = lowest(frontier)
                frontier &= frontier - one
                near |= adj[u]
                fresh = adj[u] & inside & ~part
                part |= fresh
                frontier |= fresh
            rest &= ~part
            near &= outside
            left = near
            while left != 0:
                v = lowest(left)
                left &= left - one
                reached[v] |= near
        left = outside
        while left != 0:
            v = lowest(left)
            left &= left - one
            reached[v] = reached[v] & outside & ~(one << np.uint64(v))
        only = -1
        for v in range(free):
            if (inside >> np.uint64(v)) & one != 0:
                continue
            simplicial = True
            left = reached[v]
            while left != 0:
                u = lowest(left)
                left &= left - one
                if reached[v] & ~reached[u] & ~(one << np.uint64(u)) != 0:
                    simplicial = False
                    break
            if simplicial:
                only = v
                break
        for v in range(free):
            if (inside >> np.uint64(v)) & one != 0 or (only >= 0 and v != only):
                continue
            cost = so_far + sizes[v] * _weight(reached[v] & ~adj[v], sizes, plain)
            after = gone | (1 << v)
            if cost <= limit and cost < best[after]:
                best[after] = cost
                last[after] = v
    return 0 if best[(1 << free) - 1] <= limit else 2
