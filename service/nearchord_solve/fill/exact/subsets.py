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

from nearchord_solve.arrays import I32, I64
from nearchord_solve.fill.exact.core import NO_PAIRS, Core, sorted_pairs
from nearchord_solve.fill.exact.kernels.subsets import largest_clique, replay, sweep
from nearchord_solve.fill.exact.kernels.words import permuted
from nearchord_solve.fill.exact.status import Status
from nearchord_solve.fill.kernels.dense import list_fill

MOST_FREE = 24
MOST_VERTICES = 62
MOST_TRIES = 20_000
_MOST_COST = 2**16 - 2


def split_off_clique(core: Core) -> tuple[I64, int]:
    """The vertices, a clique of most vertices last, and how many are outside it; at most 62 vertices.

    The clique is largest as far as :data:`MOST_TRIES` steps of branch and bound can tell.
    """
    clique = int(largest_clique(core.rows.ravel(), MOST_TRIES))
    inside = clique >> np.arange(core.n) & 1
    return np.argsort(inside, kind="stable"), core.n - clique.bit_count()


def free_vertices(core: Core) -> int:
    """Vertices outside a largest clique: the exponent of the engine's cost; a large number if the core is too big."""
    return core.n if core.n > MOST_VERTICES else split_off_clique(core)[1]


def solve_subsets(core: Core, limit: int, cells: I64) -> tuple[Status, I32]:
    """A minimum fill of at most ``limit`` edges.

    Returns (FOUND, fill), (NONE, none) if every fill costs more than ``limit``, or (STOPPED, none).  At most 62
    vertices, at most 24 of them outside a largest clique.
    """
    order, free = split_off_clique(core)
    rows = permuted(core.rows, order)
    last = np.full(1 << free, -1, np.int8)
    status = Status(sweep(rows.ravel(), core.sizes[order], free, min(limit, _MOST_COST), last, cells))
    if status is not Status.FOUND:
        return status, NO_PAIRS
    filled = rows.copy()
    replay(filled.ravel(), free, last)
    return status, sorted_pairs(np.sort(order[list_fill(rows, filled)], axis=1).astype(np.int32))
