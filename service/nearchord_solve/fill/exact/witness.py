"""Packings as plain cycles with shares, which anybody can check.

Cycles on four or more vertices without a chord get shares y >= 0 such that the shares of the cycles through any pair
that is no edge sum to at most 1.  A fill holds c - 3 chords at least of a cycle on c vertices, so the sum of y (c - 3),
rounded up, bounds the fill from below; cycles inside different fill cores may be rounded up core by core.
"""

from collections.abc import Iterator, Sequence
from itertools import product
from math import gcd, prod

import numpy as np

from nearchord_solve.arrays import I64, U32
from nearchord_solve.fill.exact.packing import DENOMINATOR, sides_and_chords
from nearchord_solve.fill.exact.result import Packing, Ring
from nearchord_solve.fill.exact.whole import PartFill
from nearchord_solve.graph import Graph

ONE = 2**60
MOST_CHOICES = 4096  # a ring of groups is written out only if it stands for at most so many cycles


def packing_columns(graph: Graph, parts: Sequence[PartFill]) -> dict[str, U32 | I64]:
    """Cycle i is ``packing_vertex[packing_start[i]:packing_start[i+1]]``, around it, in vertices of the graph."""
    cycles: list[tuple[int, ...]] = []
    shares: list[int] = []
    for part in parts:
        for packing in (piece.packing for piece in part.result.pieces if piece.packing) if part.result else ():
            for cycle, share in _plain(graph, packing, part.vertices.tolist()):
                cycles.append(cycle)
                shares.append(share)
    common = [gcd(share, ONE) for share in shares]
    return {
        "packing_start": np.cumsum([0, *map(len, cycles)], dtype=np.int64),
        "packing_vertex": np.array([v for cycle in cycles for v in cycle], np.uint32),
        "packing_numerator": np.array([y // d for y, d in zip(shares, common, strict=True)], np.int64),
        "packing_denominator": np.array([ONE // d for d in common], np.int64),
    }


def _plain(graph: Graph, packing: Packing, names: list[int]) -> Iterator[tuple[tuple[int, ...], int]]:
    """Chordless cycles of a packing with shares over ONE.

    A ring of groups is the mean of its cycles.  Rings with an open side have none and are left out.  Where that, or a
    rounding, leaves a pair with more than 1, the share is cut.
    """
    room: dict[tuple[int, int], int] = {}
    for ring, numerator in zip(packing.rings, packing.numerators, strict=True):
        named = tuple(tuple(names[v] for v in group) for group in ring)
        choices = prod(map(len, ring))
        if choices > MOST_CHOICES or not _closed(graph, named):
            continue
        wanted = numerator * (ONE // DENOMINATOR) // choices
        for cycle in product(*named):
            _, chords = sides_and_chords(cycle)
            share = min(wanted, *(room.get(pair, ONE) for pair in chords))
            if share > 0:
                room.update({pair: room.get(pair, ONE) - share for pair in chords})
                yield cycle, share


def _closed(graph: Graph, ring: Ring) -> bool:
    """Whether groups that follow each other are joined."""
    for one, other in zip(ring, (*ring[1:], ring[0]), strict=True):
        row = graph.adj[graph.ptr[one[0]] : graph.ptr[one[0] + 1]]
        at = int(np.searchsorted(row, other[0]))
        if at == row.size or row[at] != other[0]:
            return False
    return True
