"""The heaviest independent sets of one graph for many vectors of weights."""

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np

from nearchord_solve.arrays import I64, U32
from nearchord_solve.kernels.layout import STATES, TABLE
from nearchord_solve.monitor import Monitor, Phase
from nearchord_solve.structure import Structure
from nearchord_solve.sweep.kernels import wide_passes as kernels
from nearchord_solve.sweep.kernels.wide_tables import WIDEST, Ways, WideTries


@dataclass(frozen=True, eq=False)
class Swath:
    """What was found for some vectors: their optima, and their choices, one behind the other.

    The choice of the r-th is ``chosen[ptr[r]:ptr[r+1]]``, ascending.
    """

    optima: I64
    ptr: I64
    chosen: U32


def width(vectors: int) -> int:
    """How many vectors are swept together: blocks of about equal size, a multiple of what a register holds."""
    blocks = max(1, -(-vectors // WIDEST))
    return -(-vectors // (4 * blocks)) * 4


def wide_bytes(structure: Structure, vectors: int) -> int:
    """Memory of :func:`sweep_wide` beside the structure and the weights."""
    wide = width(vectors)
    n = structure.numbering.order.size
    table = structure.forest.figures[:, TABLE]
    most = max(int(table.max(initial=0)), int(np.diff(structure.forest.bag_ptr).max(initial=0)))
    return n * (8 * wide + 12) + (int(table.sum()) + most) * (12 + 8 * wide) + most * 4 * wide + 8 * structure.states


def sweep_wide(structure: Structure, weights: I64, monitor: Monitor) -> Iterator[Swath]:
    """Settle all cores by tables for all vectors, :func:`width` at a time, ending early when stopped.

    ``weights`` int64[R, n].  O((n + m + states) * R) additions, but the numbers that belong to one vertex or state
    stand side by side, so the graph is gone through once for a block of vectors.
    """
    numbering, forest = structure.numbering, structure.forest
    vectors, n = weights.shape
    place = np.empty(n, np.int32)
    place[numbering.order] = np.arange(n, dtype=np.int32)
    wide = width(vectors)
    tries, ways = _empty_tables(structure, wide)
    residual = np.empty((n, wide), np.int64)
    chosen = np.empty(n, np.uint64)
    base = np.empty(wide, np.int64)
    for first in range(0, vectors, wide):
        count = min(wide, vectors - first)
        monitor.enter(Phase.SWEEP, n)
        kernels.gather(weights, first, count, place, residual)
        if not kernels.inward_wide(numbering, forest, tries, ways, residual, chosen, base, monitor.cells):
            return
        if not kernels.outward_wide(numbering, forest, tries, ways, residual, chosen, monitor.cells):
            return
        ptr, vertices = kernels.list_chosen(place, chosen, count)
        yield Swath(base[:count].copy(), ptr, vertices)


def _empty_tables(structure: Structure, wide: int) -> tuple[WideTries, Ways]:
    forest = structure.forest
    table = forest.figures[:, TABLE]
    bags = forest.bag_kind.size
    most = max(int(table.max(initial=0)), int(np.diff(forest.bag_ptr).max(initial=0)))
    room = int(table.sum()) + most
    tries = WideTries(
        np.zeros(bags, np.int64),
        np.zeros(bags, np.int64),
        np.empty(room, np.int32),
        np.empty(room, np.int64),
        np.empty((room, wide), np.int64),
    )
    states = int(forest.figures[:, STATES].max(initial=0))
    ways = Ways(
        np.empty(states, np.int32),
        np.empty(states, np.int32),
        np.empty(wide, np.int32),
        np.empty((most, wide), np.int32),
    )
    return tries, ways
