"""Certificates that are an elimination order: bounds on cliques, colour classes and forests.

For each vertex v let L(v) be its neighbours that come after it in the order, fill pairs counted as edges.

*Cliques.*  Each clique of G lies in v and those of L(v) that are neighbours in G, for its first vertex v.  So the most
that a clique inside one of these sets weighs is a bound, in any order; no fill is needed.

*Colour classes and forests.*  The dynamic program over the bags {v} + L(v), the bag of v below that of the first
vertex of L(v), is exact whenever the order is a perfect elimination order of G + fill: a checker computes the very
optimum from the definition, so order and fill prove every bound that holds.  They only have to be good enough for its
work to be small, which is why such a certificate is written within limits only, see :func:`certify_order`.
"""

from dataclasses import dataclass

import numpy as np

from nearchord_solve.arrays import I32, I64, U32
from nearchord_solve.kernels.layout import BAG_FILL, Forest
from nearchord_solve.predict import colour_states

# What a checker in plain Python is asked to do: states to try in bags with fill; entries of its tables, of which a bag
# has one for every way to fill q places with its vertices or leave them empty, over all bags and in one bag.
MOST_STATES = 2_000_000
MOST_CELLS = 10**9
MOST_CELLS_OF_BAG = 1 << 24
HEAVIEST = 2**60  # sums of weights, so that it can compute with int64


@dataclass(frozen=True, eq=False)
class OrderCertificate:
    """Proves ``bound``.  ``order`` int32[n], first to go first; ``fill`` int32[f, 2] or None where none is needed."""

    bound: int
    order: I32
    fill: I32 | None

    def columns(self, vertices: I64) -> dict[str, U32 | I64]:
        """Columns of the answer; ``vertices`` int64: number of each vertex in the graph of the question."""
        order = vertices[self.order].astype(np.uint32)
        if self.fill is None:
            return {"proof_order": order}
        return {"proof_order": order, "proof_fill": vertices[self.fill].reshape(-1).astype(np.uint32)}


def certify_order(
    bound: int, order: I32, forest: Forest, colours: int, states: int, weight: int
) -> OrderCertificate | None:
    """The certificate of an optimum; None where a checker would have too much to do.

    ``order`` int32[n]: the vertex of each rank of ``forest``, the highest goes first.  ``colours`` 0 means forests.
    ``states``: of all bags that count for a state budget.  ``weight``: of all vertices, those that must be chosen
    with more than all others on top.
    """
    if not _checkable(forest, colours, states, weight):
        return None
    return OrderCertificate(bound, order[::-1], _fill_pairs(order, forest.slot_fill_ptr, forest.slot_fill))


def _checkable(forest: Forest, colours: int, states: int, weight: int) -> bool:
    sizes = np.diff(forest.bag_ptr)
    q = colours or 2
    if q > 2:  # the checker needs no states in bags without fill
        plain, count = np.unique(sizes[forest.bag_kind & BAG_FILL == 0], return_counts=True)
        states -= sum(n * colour_states(size, q) for size, n in zip(plain.tolist(), count.tolist(), strict=True))
    cells = (sizes + 1.0) ** q
    small = cells.sum() <= MOST_CELLS and cells.max(initial=0) <= MOST_CELLS_OF_BAG
    return bool(small) and states <= MOST_STATES and weight < HEAVIEST


def _fill_pairs(order: I32, ptr: I64, low: I32) -> I32:
    """Pairs of vertices int32[f, 2], the smaller first, of ranks r and ``low[ptr[r]:ptr[r+1]]``."""
    ends = np.empty((low.size, 2), np.int32)
    ends[:, 0] = np.repeat(order, np.diff(ptr))
    ends[:, 1] = order[low]
    ends.sort(axis=1)
    return ends
