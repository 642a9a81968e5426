"""Exact minimum fill of parts, with proofs.

>>> import numpy as np
>>> from nearchord_solve.monitor import Monitor
>>> square = np.array([0, 2, 4, 6, 8]), np.array([1, 3, 0, 2, 1, 3, 0, 2], np.int32)
>>> result = minimum_fill(*square, limit=None, monitor=Monitor())
>>> result.edges.tolist(), result.lower_bound, str(result.proof)
([[0, 2]], 1, 'packing')
"""

from nearchord_solve.fill.exact.result import Branch, FillResult, Packing, PieceProof, ProofKind
from nearchord_solve.fill.exact.search import fill_of_parts, minimum_fill
from nearchord_solve.fill.exact.whole import GraphFill, PartFill, fill_of_graph

__all__ = [
    "Branch",
    "FillResult",
    "GraphFill",
    "Packing",
    "PartFill",
    "PieceProof",
    "ProofKind",
    "fill_of_graph",
    "fill_of_parts",
    "minimum_fill",
]
