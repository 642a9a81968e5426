"""Packings of parts: from multipliers of cuts, and for large cores from cycles that share no pair."""

import numpy as np

from nearchord_solve.arrays import I32, I64
from nearchord_solve.fill.exact.core import Core
from nearchord_solve.fill.exact.cuts import Multipliers
from nearchord_solve.fill.exact.cycles import Cycles
from nearchord_solve.fill.exact.kernels.cuts import disjoint_cycles
from nearchord_solve.fill.exact.ragged import picked
from nearchord_solve.fill.exact.result import Packing

PATHS = 2**31  # words that shortest paths may look at, about


def packing_of(core: Core, cycles: Cycles, multipliers: Multipliers) -> Packing:
    """The packing in vertices of the part; cycles without a multiplier are left out."""
    used = np.flatnonzero(multipliers.numerators)
    cycles = cycles.take(used)
    group, at = picked(core.start, cycles.vertex)
    return Packing(cycles.ptr, group, core.member[at], multipliers.numerators[used], multipliers.denominator)


def disjoint(core: Core, fill: I32, cells: I64) -> tuple[int, Cycles, Multipliers]:
    """Chordless cycles that share no non-edge, each as often as its cheapest chord allows, and the bound; greedy.

    ``fill``: that of some triangulation.  No load is above its weight, so the bound is the sum of (c - 3) * multiplier.
    """
    tries = PATHS // max(1, core.rows.size)
    ptr, vertex, cost = disjoint_cycles(core.rows, core.sizes, fill, tries, cells)
    return int((np.diff(ptr) - 3) @ cost), Cycles(ptr, vertex), Multipliers(cost, 1)
