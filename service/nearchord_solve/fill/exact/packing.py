"""Packings of parts: from multipliers of cuts, and for large cores from cycles that share no pair."""

import numpy as np

from nearchord_solve.arrays import I32, I64
from nearchord_solve.fill.exact.core import Core
from nearchord_solve.fill.exact.cuts import Cuts, Multipliers
from nearchord_solve.fill.exact.cycles import Cycles
from nearchord_solve.fill.exact.kernels.cuts import disjoint_cycles
from nearchord_solve.fill.exact.ragged import picked
from nearchord_solve.fill.exact.result import Packing

PATHS = 2**31  # words that shortest paths may look at, about


def packing_of(core: Core, cuts: Cuts, multipliers: Multipliers) -> Packing:
    """The packing in vertices of the part; cycles without a multiplier are left out."""
    used = np.flatnonzero(multipliers.numerators)
    cycles = cuts.cycles.take(used)
    group, at = picked(core.start, cycles.vertex)
    return Packing(cycles.ptr, group, core.member[at], multipliers.numerators[used], multipliers.denominator)


def disjoint(core: Core, fill: I32, cells: I64) -> tuple[Cuts, Multipliers]:
    """Chordless cycles that share no non-edge, each as often as its cheapest chord allows; greedy.

    ``fill``: that of some triangulation.  No load is above its weight, so the bound is the sum of (c - 3) * multiplier.
    """
    tries = PATHS // (core.n * core.rows.shape[1])
    cuts = Cuts.of(core, Cycles(*disjoint_cycles(core.rows, fill, tries, cells)))
    if not cuts.count:
        return cuts, Multipliers(np.empty(0, np.int64), 1)
    weights = core.sizes[cuts.pair // core.n] * core.sizes[cuts.pair % core.n]
    return cuts, Multipliers(np.minimum.reduceat(weights, cuts.start[:-1]), 1)
