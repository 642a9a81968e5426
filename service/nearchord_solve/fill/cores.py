"""Fill cores: where the fill is, and a good triangulation of each."""

from dataclasses import dataclass

import numpy as np

from nearchord_solve.arrays import I32, I64
from nearchord_solve.fill.kernels import cores as core_kernels
from nearchord_solve.kernels import elimination
from nearchord_solve.kernels.layout import Forest, Numbering
from nearchord_solve.monitor import Monitor
from nearchord_solve.order import Unfinished

DENSE_LIMIT = 4096  # vertices of a core that is triangulated on bitset rows: 2 MiB a candidate at the limit


@dataclass(frozen=True, eq=False)
class Cores:
    """The places in fill cores, and how many cliques stand outside them.

    Core c is ``place[ptr[c]:ptr[c+1]]``, ascending.  ``cliques``: maximal cliques outside cores, the largest
    of ``largest`` vertices; each is a bag and a part of its own.
    """

    ptr: I64
    place: I32
    cliques: int
    largest: int


def find_cores(numbering: Numbering, monitor: Monitor) -> Cores | Unfinished:
    """Cut the tree of bags at adhesions without fill; sets ``numbering.core``.

    Let H be the triangulation of G and contract every edge of its clique tree whose adhesion holds fill.  The
    resulting unions of bags are the *parts*.  An adhesion that survives is a clique of G.  A pair that is no
    edge of G and lies in two parts would lie in every adhesion between them, hence in a clique of G: so no
    such pair is shared.  Therefore the restrictions of any triangulation of G to the parts use disjoint fill,
    and triangulations of the parts, glued along cliques, give one of G: the least fill of G is the sum over
    parts, and each part can be triangulated on its own.  Parts that hold fill are the cores.  O(n + m).
    """
    sizes = np.zeros(4, np.int64)
    nb = numbering
    done, _ = elimination.mark_cores(nb.low_ptr, nb.low, nb.parent, nb.fill_end, nb.fill, nb.core, sizes, monitor.cells)
    if not done:
        return Unfinished.STOPPED
    ptr, place = elimination.list_cores(nb.core, int(sizes[0]), int(sizes[3]))
    return Cores(ptr, place, int(sizes[1]), int(sizes[2]))


def triangulate(
    numbering: Numbering, cores: Cores, most_states: int, least_fill: bool, monitor: Monitor, known: I32 | None = None
) -> Forest | Unfinished:
    """Triangulate every core and write all down as a forest of bags.

    ``most_states`` caps the counting of states in each core.  With ``least_fill`` the candidate with the least
    fill is taken, otherwise the one with the fewest states.  ``known`` int32[k, 2], pairs of vertices: a minimal
    fill, to be taken in all cores of at most ``DENSE_LIMIT`` vertices.
    """
    given_ptr, given = np.empty(0, np.int64), np.empty((0, 2), np.int32)
    if known is not None:
        given_ptr, given = _by_core(numbering, cores, known)
    done, forest = core_kernels.build_forest(
        numbering, cores.ptr, cores.place, DENSE_LIMIT, most_states, least_fill, given_ptr, given, monitor.cells
    )
    return forest if done else Unfinished.STOPPED


def _by_core(numbering: Numbering, cores: Cores, known: I32) -> tuple[I64, I32]:
    """Pairs of vertices as pairs of places, core by core.

    Two vertices of a core that are not adjacent are not both shared with what lies above it, so the one at the
    higher place is settled by the core.
    """
    place = np.empty(numbering.order.size, np.int32)
    place[numbering.order] = np.arange(place.size, dtype=np.int32)
    pairs = place[known]
    core = numbering.core[pairs.max(axis=1, initial=0)]
    ptr = np.concatenate((np.zeros(1, np.int64), np.cumsum(np.bincount(core, minlength=cores.ptr.size - 1))))
    return ptr, np.ascontiguousarray(pairs[np.argsort(core, kind="stable")])
