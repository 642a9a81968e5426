"""The heaviest independent set of a graph of known structure."""

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from nearchord_solve.arrays import I64, U8, U32
from nearchord_solve.kernels.layout import TABLE, Cover, Tries
from nearchord_solve.monitor import Monitor, Phase
from nearchord_solve.proof import Certificate, certify_sweep, room_for_cover
from nearchord_solve.structure import Structure
from nearchord_solve.sweep.kernels import passes as kernels


@dataclass(frozen=True, eq=False)
class Swept:
    """``bound`` is the optimum if all cores were settled exactly, else an upper bound; ``chosen`` uint8[n].

    ``chosen`` is None if the sweep was stopped before the choice was complete.  ``certify`` writes the proof of the
    bound, once.  ``residual`` int64[n], by place, and ``tries``: as the inward pass left them.
    """

    bound: int
    chosen: U8 | None
    certify: Callable[[], Certificate]
    structure: Structure
    residual: I64
    tries: Tries


def sweep(structure: Structure, weights: I64, fits: U8, monitor: Monitor) -> Swept | None:
    """Collect values inwards, then choose outwards; None if stopped before a bound was known.

    ``weights`` int64[n], by vertex; ``fits`` uint8[C]: cores to settle by tables.  Time O(n + m) outside
    cores, plus states times their size inside.
    """
    numbering, cores, forest = structure.numbering, structure.cores, structure.forest
    n = weights.size
    monitor.enter(Phase.SWEEP, n)
    residual = weights[numbering.order]
    tries = _empty_tries(structure, fits)
    share = np.empty(forest.slot_place.size, np.int64)
    cover = _empty_cover(structure, fits)
    done, bound = kernels.inward(
        numbering, forest, cores.ptr, cores.place, fits, tries, residual, share, cover, monitor.cells
    )
    if not done:
        return None

    def certify() -> Certificate:
        return certify_sweep(int(bound), structure, weights, fits, residual, share, cover)

    by_place = np.empty(n, np.uint8)
    done = kernels.outward(numbering, forest, cores.ptr, cores.place, fits, tries, residual, by_place, monitor.cells)
    if not done:
        return Swept(int(bound), None, certify, structure, residual, tries)
    chosen = np.empty(n, np.uint8)
    chosen[numbering.order] = by_place
    return Swept(int(bound), chosen, certify, structure, residual, tries)


def _empty_tries(structure: Structure, fits: U8) -> Tries:
    bags = structure.forest.bag_kind.size
    kept = int(structure.forest.figures[fits != 0, TABLE].sum())
    # behind the kept messages there is room for any one message, once more or of single vertices only
    room = kept + max(
        int(structure.forest.figures[:, TABLE].max(initial=0)), int(np.diff(structure.forest.bag_ptr).max(initial=0))
    )
    return Tries(
        np.zeros(bags, np.int64),
        np.zeros(bags, np.int64),
        np.empty(room, np.int32),
        np.empty(room, np.int64),
        np.empty(room, np.int64),
    )


def _empty_cover(structure: Structure, fits: U8) -> Cover:
    cores, low_ptr = structure.cores, structure.numbering.low_ptr
    homes = cores.place[np.repeat(fits == 0, np.diff(cores.ptr))]
    return room_for_cover(homes.size, int((low_ptr[homes + 1] - low_ptr[homes]).sum()))


def as_vertices(chosen: U8) -> U32:
    """Chosen vertices, ascending."""
    return np.flatnonzero(chosen).astype(np.uint32)
