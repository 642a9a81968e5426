"""Engine for cores with few minimal separators: dynamic programming over potential maximal cliques.

A component C of G - S that sees all of S is a *block* with separator S = N(C).  If a potential maximal clique Omega
lies in S + C and contains S, it splits the block into the components of C - Omega, which are blocks again, so

    cost(C) = min over such Omega of fill(Omega) - fill(S) + sum of cost(D) over the components D of C - Omega,

and the minimum fill is the least fill(Omega) + sum of cost(D) over all components D of G - Omega (Fomin, Kratsch,
Todinca, Villanger, SIAM J. Comput. 38 (2008) 1058-1079).  Only cliques within the budget are needed (module
:mod:`separators`).
"""

import numpy as np
from numpy.typing import NDArray

from nearchord_solve.arrays import I32, I64, U64
from nearchord_solve.fill.exact.core import NO_PAIRS, Core, sorted_pairs
from nearchord_solve.fill.exact.kernels.blocks import cheapest, list_splits
from nearchord_solve.fill.exact.kernels.separators import connected_order
from nearchord_solve.fill.exact.kernels.words import permuted
from nearchord_solve.fill.exact.separators import minimal_separators, potential_cliques
from nearchord_solve.fill.exact.status import Status
from nearchord_solve.kernels.cells import STOP

BOOL = NDArray[np.bool_]

MOST_CLIQUES = 200_000


def solve_blocks(
    core: Core, limit: int, prices: I64, slack: int, most_separators: int, cells: I64
) -> tuple[Status, I32]:
    """A minimum fill of at most ``limit`` edges of a connected core.

    ``prices`` int64[n, n]: only fills matter whose pairs have prices of at most ``slack`` together; 0 everywhere always
    holds.  Returns (FOUND, fill), (NONE, none) if every fill costs more than the limit, (TOO_LARGE, none) if there are
    more separators or cliques than allowed, or (STOPPED, none).
    """
    order = connected_order(core.rows)
    rows = permuted(core.rows, order)
    sizes = core.sizes[order]
    separators = minimal_separators(rows, most_separators, cells)
    if separators is None:
        return (Status.STOPPED if cells[STOP] else Status.TOO_LARGE), NO_PAIRS
    prices = np.ascontiguousarray(prices[order][:, order])
    cliques = potential_cliques(rows, separators, prices, slack, MOST_CLIQUES, cells)
    if cliques is None:
        return (Status.STOPPED if cells[STOP] else Status.TOO_LARGE), NO_PAIRS
    splits = list_splits(rows, sizes, cliques, cells)
    if cells[STOP]:
        return Status.STOPPED, NO_PAIRS
    cost, chosen = cheapest(*splits, limit)
    if cost > limit:
        return Status.NONE, NO_PAIRS
    return Status.FOUND, sorted_pairs(np.sort(order[_inside(rows, cliques[chosen])], axis=1).astype(np.int32))


def _inside(rows: U64, cliques: U64) -> I64:
    """The pairs that are not adjacent and lie in some clique together, each once: int64[k, 2]."""
    n = rows.shape[0]
    members = _bits(cliques, n)
    together = (members.T.astype(np.float32) @ members.astype(np.float32)) > 0
    return np.argwhere(np.triu(together & ~_bits(rows, n), 1))


def _bits(sets: U64, n: int) -> BOOL:
    """Sets as a matrix of truth values."""
    packed = sets.astype("<u8").view(np.uint8).reshape(sets.shape[0], -1)
    return np.unpackbits(packed, axis=1, bitorder="little")[:, :n].astype(np.bool_)
