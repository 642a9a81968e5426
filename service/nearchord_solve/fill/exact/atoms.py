"""Minimal triangulation and decomposition by clique minimal separators.

The fill number of a graph is the sum over its atoms: a clique separator S splits a graph into pieces S + D, no
non-edge lies in two pieces (it would lie in the clique S), a triangulation induces one of each piece, and
triangulations of the pieces meet in a clique, so their union is a triangulation.

The triangulation is that of MCS-M (Berry, Blair, Heggernes, Peyton, Algorithmica 39 (2004) 287-298).  In its order, a
vertex whose later neighbours S form a clique of the graph cuts off S and the component of the rest that holds it
(Berry, Pogorelcnik, Simonet, Algorithms 3 (2010) 197-215; Leimer, Discrete Math. 113 (1993) 99-123).
"""

import numpy as np

from nearchord_solve.arrays import I32, I64, U64
from nearchord_solve.fill.exact.kernels.atoms import cut_off, search_minimal

EFFORT = 2**32  # neighbours that the search of one core may look at: some ten seconds


def atoms(rows: U64, cells: I64) -> tuple[I64, I32]:
    """Atoms of a graph given by bit rows, its pieces without clique separators: atom i is vertex[ptr[i]:ptr[i+1]].

    Ascending inside, in the order of MCS-M.  Simplicial vertices come out as clique atoms.  O(n m) time.  When stopped,
    or when the graph is too large to be searched, the whole comes out as one piece.
    """
    done, order, later = search_minimal(rows, EFFORT, cells)
    if not done:
        return np.array([0, rows.shape[0]]), np.arange(rows.shape[0], dtype=np.int32)
    return cut_off(rows, order, later, cells)


def triangulation_fill(rows: U64, cells: I64) -> I32 | None:
    """Fill edges of the minimal triangulation of MCS-M, int32[k, 2]; None if stopped."""
    done, _, later = search_minimal(rows, EFFORT, cells)
    if not done:
        return None
    n, width = rows.shape
    lacking = (later & ~rows).astype("<u8").view(np.uint8).reshape(n, 8 * width)
    ends = np.argwhere(np.unpackbits(lacking, axis=1, bitorder="little"))
    return np.ascontiguousarray(np.sort(ends, axis=1), np.int32)
