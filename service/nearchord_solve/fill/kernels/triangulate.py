"""The best of a few triangulations of one core."""

import numpy as np

from nearchord_solve.fill.kernels.core_lists import dense_lists
from nearchord_solve.fill.kernels.dense import fill_by_degree, fill_by_missing, list_fill, number_from, thin
from nearchord_solve.kernels.bags import count_states, write_bags
from nearchord_solve.kernels.cells import STOP
from nearchord_solve.kernels.compiled import I32, I64, U64, kernel

EFFORT = 1_000_000_000  # words that one candidate for one core may touch: about a second


@kernel
def judge(real: U64, full: U64, anchors: int, most: int, cells: I64) -> tuple[int, int, I32]:
    """States (at most ``most`` + 1) and fill of a triangulation, and its elimination order."""
    order: I32 = np.empty(real.shape[0], np.int32)
    number_from(full, anchors, order)
    later_ptr, later, fill_ptr, fill_rank = dense_lists(real, full, anchors, order)
    bag_ptr, bag_rank, adhesion, _, kind = write_bags(anchors, later_ptr, later, fill_ptr, fill_rank)
    states, _ = count_states(bag_ptr, bag_rank, adhesion, kind, fill_ptr, fill_rank, most, cells)
    return states, int(fill_ptr[real.shape[0]]), order


@kernel
def best_triangulation(
    real: U64, full: U64, anchors: int, easy: int, most: int, least_fill: bool, cells: I64
) -> tuple[U64, I32, bool]:
    """The best of up to three triangulations of one core, its elimination order, and whether it is minimal.

    Candidates: the given ``full`` (overwritten by its thinning), least degree, least missing pairs, each
    thinned.  Fewest states wins (fewest fill edges if ``least_fill``), then the other of the two, then the
    first.  If the first has at most ``easy`` states and ``least_fill`` is off, it is taken at once.  Each
    candidate may cost ``EFFORT`` words; beyond it is left out, or left unthinned.  Any ``most`` that is neither
    below ``easy`` nor below the states of the result gives the same result.
    """
    effort = np.array([EFFORT])
    _, minimal = thin(full, list_fill(real, full), effort, cells)
    states, fill, order = judge(real, full, anchors, most, cells)
    if states <= min(easy, most) and not least_fill:
        return full, order, minimal
    for method in range(2):
        other = np.empty_like(real)
        effort[0] = EFFORT
        if method == 0:
            done = fill_by_degree(real, other, effort, cells)
        else:
            done = fill_by_missing(real, other, effort, cells)
        if not done:
            continue
        _, other_minimal = thin(other, list_fill(real, other), effort, cells)
        other_states, other_fill, other_order = judge(real, other, anchors, most, cells)
        if cells[STOP] != 0:
            break
        if least_fill:
            better = other_fill < fill or (other_fill == fill and other_states < states)
        else:
            better = other_states < states or (other_states == states and other_fill < fill)
        if better:
            states, fill, minimal = other_states, other_fill, other_minimal
            full, order = other, other_order
    return full, order, minimal
