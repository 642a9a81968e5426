"""All fill cores, one after another: take out, triangulate better where it pays, write down as bags."""

from typing import NamedTuple

import numpy as np

from nearchord_solve.fill.kernels.core_lists import core_vertices, dense_lists, dense_rows, sparse_lists
from nearchord_solve.fill.kernels.dense import list_fill, number_from, set_pair
from nearchord_solve.fill.kernels.packing import pack_cycles
from nearchord_solve.fill.kernels.triangulate import best_triangulation
from nearchord_solve.kernels.bags import count_parts, count_states, write_bags
from nearchord_solve.kernels.cells import STEP, STOP
from nearchord_solve.kernels.compiled import I32, I64, U8, kernel
from nearchord_solve.kernels.grow import grown8, grown32, grown64
from nearchord_solve.kernels.layout import (
    EASY,
    FILL_EDGES,
    FILL_LOWER,
    PARTS_FILL,
    PARTS_PLAIN,
    STATES,
    TABLE,
    Forest,
    Numbering,
)


class Plan(NamedTuple):
    """One core in its elimination order: ``place`` by rank, L and its fill part by rank."""

    place: I32
    later_ptr: I64
    later: I32
    fill_ptr: I64
    fill: I32
    lower: int  # lower bound of the fill
    minimal: bool  # no fill edge can go


class Draft(NamedTuple):
    """A forest being written: arrays with room at the end, see :class:`.layout.Forest`."""

    slot_place: I32
    slot_fill_ptr: I64
    slot_fill: I32
    bag_ptr: I64
    bag_slot: I32
    bag_adhesion: I32
    bag_above: I32
    bag_kind: U8


@kernel
def empty_draft() -> Draft:
    """A draft with little room."""
    room = 1024
    return Draft(
        np.empty(room, np.int32),
        np.zeros(room, np.int64),
        np.empty(room, np.int32),
        np.zeros(room, np.int64),
        np.empty(room, np.int32),
        np.empty(room, np.int32),
        np.empty(room, np.int32),
        np.empty(room, np.uint8),
    )


@kernel
def plan_core(
    nb: Numbering, places: I32, anchors: int, dense_limit: int, most: int, least_fill: bool,
    local: I32, cells: I64,
) -> Plan:  # fmt: skip
    """Choose the elimination order of one core.

    At most ``dense_limit`` vertices: the best triangulation on bitset rows.  More: the order of the whole graph.
    """
    if places.shape[0] > dense_limit:
        lists = sparse_lists(places, anchors, nb.low_ptr, nb.low, nb.fill_end, nb.fill, local)
        return Plan(places, lists[0], lists[1], lists[2], lists[3], 0, False)
    real, full = dense_rows(places, anchors, nb.low_ptr, nb.low, nb.fill_end, nb.fill, local)
    easy = EASY * places.shape[0]
    full, order, minimal = best_triangulation(real, full, anchors, easy, most, least_fill, cells)
    lower = pack_cycles(real, list_fill(real, full), minimal, cells)
    lists = dense_lists(real, full, anchors, order)
    return Plan(places[order], lists[0], lists[1], lists[2], lists[3], lower, minimal)


@kernel
def plan_given(nb: Numbering, places: I32, anchors: int, given: I32, local: I32) -> Plan:
    """Elimination order of one core of a known minimal fill: ``given`` int32[k, 2], places of its vertices."""
    real, full = dense_rows(places, anchors, nb.low_ptr, nb.low, nb.fill_end, nb.fill, local)
    full = real.copy()
    for e in range(given.shape[0]):
        set_pair(full, local[given[e, 0]], local[given[e, 1]])
    order = np.empty(places.shape[0], np.int32)
    number_from(full, anchors, order)
    lists = dense_lists(real, full, anchors, order)
    return Plan(places[order], lists[0], lists[1], lists[2], lists[3], 0, True)


@kernel
def append_slots(draft: Draft, plan: Plan, slots: int) -> Draft:
    """Write the slots of a core behind the first ``slots`` ones."""
    k = plan.place.shape[0]
    slot_place = grown32(draft.slot_place, slots + k)
    slot_fill_ptr = grown64(draft.slot_fill_ptr, slots + k + 1)
    base = slot_fill_ptr[slots]
    slot_fill = grown32(draft.slot_fill, base + plan.fill_ptr[k])
    for r in range(k):
        slot_place[slots + r] = plan.place[r]
        slot_fill_ptr[slots + r + 1] = base + plan.fill_ptr[r + 1]
    for e in range(plan.fill_ptr[k]):
        slot_fill[base + e] = slots + plan.fill[e]
    return Draft(
        slot_place, slot_fill_ptr, slot_fill,
        draft.bag_ptr, draft.bag_slot, draft.bag_adhesion, draft.bag_above, draft.bag_kind,
    )  # fmt: skip


@kernel
def append_bags(draft: Draft, ptr: I64, rank: I32, adhesion: I32, above: I32, kind: U8, slots: int, bags: int) -> Draft:
    """Write the bags of a core, whose slots begin at ``slots``, behind the first ``bags`` ones."""
    count = kind.shape[0]
    bag_ptr = grown64(draft.bag_ptr, bags + count + 1)
    base = bag_ptr[bags]
    bag_slot = grown32(draft.bag_slot, base + ptr[count])
    bag_adhesion = grown32(draft.bag_adhesion, bags + count)
    bag_above = grown32(draft.bag_above, bags + count)
    bag_kind = grown8(draft.bag_kind, bags + count)
    for e in range(ptr[count]):
        bag_slot[base + e] = slots + rank[e]
    for b in range(count):
        bag_ptr[bags + b + 1] = base + ptr[b + 1]
        bag_adhesion[bags + b] = adhesion[b]
        bag_above[bags + b] = bags + above[b] if above[b] >= 0 else -1
        bag_kind[bags + b] = kind[b]
    return Draft(
        draft.slot_place, draft.slot_fill_ptr, draft.slot_fill,
        bag_ptr, bag_slot, bag_adhesion, bag_above, bag_kind,
    )  # fmt: skip


@kernel
def note_figures(figures: I64, plan: Plan, kind: U8, states: int, table: int) -> None:
    """Write the figures int64[6] of one core.

    If no fill edge can go, each part that holds fill is not chordal and needs one fill edge at least.
    """
    with_fill, without = count_parts(kind)
    figures[FILL_EDGES] = plan.fill_ptr[plan.place.shape[0]]
    figures[FILL_LOWER] = plan.lower
    if plan.minimal:
        figures[FILL_LOWER] = max(plan.lower, with_fill)
    figures[STATES] = states
    figures[TABLE] = table
    figures[PARTS_FILL] = with_fill
    figures[PARTS_PLAIN] = without


@kernel
def build_forest(
    nb: Numbering, core_ptr: I64, core_place: I32, dense_limit: int, most: int, least_fill: bool,
    given_ptr: I64, given: I32, cells: I64,
) -> tuple[bool, Forest]:  # fmt: skip
    """Build the forest of all cores; (False if stopped, forest).

    If ``given_ptr`` int64[cores+1] is not empty, then ``given[given_ptr[c]:given_ptr[c+1]]``, pairs of places, are a
    minimal fill of core c, if it has at most ``dense_limit`` vertices.

    Cores of at most ``dense_limit`` vertices are triangulated anew on bitset rows; larger ones keep the
    elimination order of the whole graph.  ``most`` caps the counting of states per core.
    """
    cores = core_ptr.shape[0] - 1
    local = np.full(nb.order.shape[0], -1, np.int32)
    core_top = np.zeros(cores, np.int32)
    core_slot = np.zeros(cores + 1, np.int64)
    core_anchors = np.zeros(cores, np.int32)
    core_bag = np.zeros(cores + 1, np.int64)
    figures = np.zeros((cores, 6), np.int64)
    draft = empty_draft()
    for c in range(cores):
        cells[STEP] = c
        if cells[STOP] != 0:
            break
        homes = core_place[core_ptr[c] : core_ptr[c + 1]]
        places, anchors = core_vertices(homes, nb.low_ptr, nb.low, nb.fill_end, nb.fill, local)
        if given_ptr.shape[0] > 0 and places.shape[0] <= dense_limit:
            plan = plan_given(nb, places, anchors, given[given_ptr[c] : given_ptr[c + 1]], local)
        else:
            plan = plan_core(nb, places, anchors, dense_limit, most, least_fill, local, cells)
        for p in places:
            local[p] = -1
        ptr, rank, adhesion, above, kind = write_bags(anchors, plan.later_ptr, plan.later, plan.fill_ptr, plan.fill)
        states, table = count_states(ptr, rank, adhesion, kind, plan.fill_ptr, plan.fill, most, cells)
        note_figures(figures[c], plan, kind, states, table)
        draft = append_slots(draft, plan, core_slot[c])
        draft = append_bags(draft, ptr, rank, adhesion, above, kind, core_slot[c], core_bag[c])
        core_top[c] = homes[0]
        core_anchors[c] = anchors
        core_slot[c + 1] = core_slot[c] + places.shape[0]
        core_bag[c + 1] = core_bag[c] + kind.shape[0]
    slots = core_slot[cores]
    bags = core_bag[cores]
    return cells[STOP] == 0, Forest(
        core_top,
        core_slot,
        core_anchors,
        core_bag,
        figures,
        draft.slot_place[:slots],
        draft.slot_fill_ptr[: slots + 1],
        draft.slot_fill[: draft.slot_fill_ptr[slots]],
        draft.bag_ptr[: bags + 1],
        draft.bag_slot[: draft.bag_ptr[bags]],
        draft.bag_adhesion[:bags],
        draft.bag_above[:bags],
        draft.bag_kind[:bags],
    )
