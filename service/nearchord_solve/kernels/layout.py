"""The flat arrays that kernels hand to each other.

``Numbering`` describes the whole graph by places (numbers in the visiting order; elimination goes downwards).
``Forest`` describes all fill cores.  Slots number the vertices of the cores, core by core and by rank within
the core; a vertex shared by cores has a slot in each.  ``Tries`` holds the messages kept between bags.
"""

from typing import NamedTuple

from nearchord_solve.kernels.compiled import I32, I64, U8


class Numbering(NamedTuple):
    """Elimination lists: L(i) is ``low`` row i (neighbours) plus ``fill`` row i (fill edges)."""

    order: I32  # [n] vertex at each place
    low_ptr: I64  # [n+1]
    low: I32  # [m] lower neighbouring places
    parent: I32  # [n] highest place of L(i), -1 for roots
    fill_end: I64  # [n+1] fill of i is fill[fill_end[i+1]:fill_end[i]]
    fill: I32
    core: I32  # [n] core whose table settles the place, -1 if none


class Forest(NamedTuple):
    """Bags of all fill cores."""

    core_top: I32  # [C] lowest place of each core
    core_slot: I64  # [C+1] slots of each core; the first core_anchors of them are its anchors
    core_anchors: I32  # [C] vertices shared with what lies above the core: a clique of G
    core_bag: I64  # [C+1] bags of each core; each bag follows the bag above it
    figures: I64  # [C, 6] see FILL_EDGES..PARTS_PLAIN
    slot_place: I32  # [S] place of each slot
    slot_fill_ptr: I64  # [S+1] fill edges from each slot to lower slots
    slot_fill: I32
    bag_ptr: I64  # [B+1] slots of each bag, ascending: adhesion first, then homes
    bag_slot: I32
    bag_adhesion: I32  # [B] size of the adhesion
    bag_above: I32  # [B] bag above, -1 for a root
    bag_kind: U8  # [B] BAG_FILL: the bag holds fill; ADHESION_FILL: its adhesion does


class Tries(NamedTuple):
    """Messages kept between bags: preorder tries, see :mod:`nearchord_solve.sweep.kernels.tables`."""

    begin: I64  # [B]
    end: I64  # [B]
    label: I32  # slot
    close: I64  # first node behind the subtree
    delta: I64


class Cover(NamedTuple):
    """Cliques with weights, written one behind the other: clique k is ``place[ptr[k]:ptr[k+1]]``."""

    cliques: I64  # [1] how many there are
    ptr: I64
    place: I32
    weight: I64


FILL_EDGES, FILL_LOWER, STATES, TABLE, PARTS_FILL, PARTS_PLAIN = 0, 1, 2, 3, 4, 5
BAG_FILL, ADHESION_FILL = 1, 2
EASY = 8  # states per vertex of a core that are taken without looking for fewer
