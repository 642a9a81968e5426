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

from nearchord_solve.arrays import I64
from nearchord_solve.fill.exact.core import Core, Mask, Pair, members, missing
from nearchord_solve.fill.exact.kernels.subsets import sweep
from nearchord_solve.fill.exact.status import Status

MOST_FREE = 24
MOST_VERTICES = 62
MOST_TRIES = 20_000
_MOST_COST = 2**16 - 2


def largest_clique(core: Core) -> Mask:
    """A clique of most vertices as far as :data:`MOST_TRIES` steps of branch and bound can tell."""
    best = 0
    stack = [(0, core.everything)]
    for _ in range(MOST_TRIES):
        if not stack:
            break
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
    status = Status(sweep(adj, sizes, free, min(limit, _MOST_COST), last, cells))
    if status is not Status.FOUND:
        return status, []
    gone = (1 << free) - 1
    pairs: list[Pair] = []
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
        lacking = [(order[u], order[x]) for u, x in missing(rows, near)]
        pairs += [(min(pair), max(pair)) for pair in lacking]
        for u in members(near):
            rows[u] |= near & ~(1 << u)
    return Status.FOUND, pairs
