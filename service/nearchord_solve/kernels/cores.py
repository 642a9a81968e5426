"""All fill cores, one after another: take out, triangulate better where it pays, write down as bags."""

import numpy as np

from .cells import STEP, STOP
from .cliques import count_cliques, touched
from .compiled import I32, I64, U8, U64, kernel, lowest
from .dense import fill_by_degree, fill_by_missing, list_fill, number_from, set_pair, thin
from .forest import chain_bags
from .layout import (
    ADHESION_FILL,
    BAG_FILL,
    FILL_EDGES,
    FILL_LOWER,
    PARTS_FILL,
    PARTS_PLAIN,
    STATES,
    TABLE,
    Forest,
)
from .packing import pack_cycles



@kernel
def grown32(array: I32, need: int) -> I32:
    """``array``, or a longer copy if it holds fewer than ``need`` entries."""
    if need <= array.shape[0]:
        return array
    longer = np.empty(2 * need, np.int32)
    longer[: array.shape[0]] = array
    return longer


@kernel
def grown64(array: I64, need: int) -> I64:
    """``array``, or a longer copy if it holds fewer than ``need`` entries."""
    if need <= array.shape[0]:
        return array
    longer = np.empty(2 * need, np.int64)
    longer[: array.shape[0]] = array
    return longer


@kernel
def core_vertices(
    homes: I32, low_ptr: I64, low: I32, fill_end: I64, fill: I32, local: I32
) -> tuple[I32, int]:
    """Places of one core, ascending: its anchors L(top), then its homes.

    Sets ``local`` at these places to their index.  Returns (places int32[k], anchors).
    """
    top = homes[0]
    plain = low_ptr[top + 1] - low_ptr[top]
    anchors = plain + fill_end[top] - fill_end[top + 1]
    places = np.empty(anchors + homes.shape[0], np.int32)
    places[:plain] = low[low_ptr[top] : low_ptr[top + 1]]
    places[plain:anchors] = fill[fill_end[top + 1] : fill_end[top]]
    places[:anchors].sort()
    places[anchors:] = homes
    for i in range(places.shape[0]):
        local[places[i]] = i
    return places, anchors


@kernel
def dense_rows(
    places: I32, anchors: int, low_ptr: I64, low: I32, fill_end: I64, fill: I32, local: I32
) -> tuple[U64, U64]:
    """Bitset rows of G and of H on one core, by index in ``places``."""
    k = places.shape[0]
    real = np.zeros((k, (k + 63) >> 6), np.uint64)
    for i in range(anchors):
        for j in range(i):
            set_pair(real, i, j)
    for i in range(anchors, k):
        for e in range(low_ptr[places[i]], low_ptr[places[i] + 1]):
            set_pair(real, i, local[low[e]])
    full = real.copy()
    for i in range(anchors, k):
        for e in range(fill_end[places[i] + 1], fill_end[places[i]]):
            set_pair(full, i, local[fill[e]])
    return real, full


@kernel
def sparse_lists(
    places: I32, anchors: int, low_ptr: I64, low: I32, fill_end: I64, fill: I32, local: I32
) -> tuple[I64, I32, I64, I32]:
    """L(r) and its fill part for the order in which the core stands: rank = index in ``places``."""
    k = places.shape[0]
    size = np.int64(0)
    fills = np.int64(0)
    for i in range(anchors, k):
        p = places[i]
        fills += fill_end[p] - fill_end[p + 1]
        size += low_ptr[p + 1] - low_ptr[p]
    later_ptr = np.zeros(k + 1, np.int64)
    later = np.empty(size + fills, np.int32)
    fill_ptr = np.zeros(k + 1, np.int64)
    fill_rank = np.empty(fills, np.int32)
    write = 0
    put = 0
    for i in range(k):
        begin = write
        if i >= anchors:
            p = places[i]
            for e in range(low_ptr[p], low_ptr[p + 1]):
                later[write] = local[low[e]]
                write += 1
            for e in range(fill_end[p + 1], fill_end[p]):
                later[write] = local[fill[e]]
                fill_rank[put] = later[write]
                write += 1
                put += 1
            later[begin:write].sort()
        later_ptr[i + 1] = write
        fill_ptr[i + 1] = put
    return later_ptr, later, fill_ptr, fill_rank


@kernel
def dense_lists(real: U64, full: U64, anchors: int, order: I32) -> tuple[I64, I32, I64, I32]:
    """L(r) and its fill part, by rank, for the perfect elimination ``order`` of ``full``."""
    k, words = real.shape
    rank = np.empty(k, np.int32)
    for r in range(k):
        rank[order[r]] = r
    later_ptr = np.zeros(k + 1, np.int64)
    later = np.empty(64, np.int32)
    fill_ptr = np.zeros(k + 1, np.int64)
    fill_rank = np.empty(64, np.int32)
    write = 0
    put = 0
    for r in range(k):
        later = grown32(later, write + k)
        fill_rank = grown32(fill_rank, put + k)
        begin = write
        v = order[r]
        if r >= anchors:
            for w in range(words):
                word = full[v, w]
                while word != 0:
                    bit = lowest(word)
                    word &= word - np.uint64(1)
                    q = rank[(w << 6) + bit]
                    if q < r:
                        later[write] = q
                        write += 1
                        if (real[v, w] >> np.uint64(bit)) & np.uint64(1) == 0:
                            fill_rank[put] = q
                            put += 1
            later[begin:write].sort()
        later_ptr[r + 1] = write
        fill_ptr[r + 1] = put
    return later_ptr, later, fill_ptr, fill_rank


@kernel
def _kind(
    bag_rank: I32, begin: int, split: int, end: int, fill_ptr: I64, fill_rank: I32, mark: I32, b: int
) -> int:
    """Kind of bag b, whose ranks are marked with b; its adhesion stands in begin..split-1."""
    for e in range(begin, end):
        q = bag_rank[e]
        for g in range(fill_ptr[q], fill_ptr[q + 1]):
            if mark[fill_rank[g]] == b:
                return BAG_FILL | ADHESION_FILL if e < split else BAG_FILL
    return 0


@kernel
def write_bags(
    anchors: int, later_ptr: I64, later: I32, fill_ptr: I64, fill_rank: I32
) -> tuple[I64, I32, I32, I32, U8]:
    """Bags of one core by rank: (bag_ptr, bag_rank, adhesion, above, kind)."""
    deep, adhesion, above, _ = chain_bags(anchors, later_ptr, later)
    bags = deep.shape[0]
    bag_ptr = np.zeros(bags + 1, np.int64)
    for b in range(bags):
        bag_ptr[b + 1] = bag_ptr[b] + later_ptr[deep[b] + 1] - later_ptr[deep[b]] + 1
    bag_rank = np.empty(bag_ptr[bags], np.int32)
    kind = np.zeros(bags, np.uint8)
    mark = np.full(later_ptr.shape[0] - 1, -1, np.int32)
    for b in range(bags):
        r = deep[b]
        begin = bag_ptr[b]
        end = bag_ptr[b + 1]
        bag_rank[begin : end - 1] = later[later_ptr[r] : later_ptr[r + 1]]
        bag_rank[end - 1] = r
        for e in range(begin, end):
            mark[bag_rank[e]] = b
        kind[b] = _kind(bag_rank, begin, begin + adhesion[b], end, fill_ptr, fill_rank, mark, b)
    return bag_ptr, bag_rank, adhesion, above, kind


@kernel
def count_states(
    bag_ptr: I64, bag_rank: I32, adhesion: I32, kind: U8, fill_ptr: I64, fill_rank: I32, most: int, cells: I64
) -> tuple[int, int]:
    """States of all bags of a core that hold fill, and entries of the tables on their adhesions.

    Counting stops above ``most`` states.  A bag without fill needs no table: its states, the empty set and
    single vertices, are implicit.
    """
    states = np.int64(0)
    table = np.int64(0)
    where = np.full(fill_ptr.shape[0] - 1, -1, np.int32)
    for b in range(kind.shape[0]):
        if not kind[b] & BAG_FILL:
            continue
        slots, rows, edges = touched(bag_rank, bag_ptr[b], bag_ptr[b + 1], fill_ptr, fill_rank, where)
        states += 1 + bag_ptr[b + 1] - bag_ptr[b]
        states += count_cliques(rows, slots.shape[0], edges, most - states, cells)
        if states > most:
            return most + 1, table
        if kind[b] & ADHESION_FILL:
            lead = 0
            while lead < slots.shape[0] and slots[lead] <= bag_rank[bag_ptr[b] + adhesion[b] - 1]:
                lead += 1
            table += lead + count_cliques(rows, lead, edges, most, cells)
    return states, table


@kernel
def count_parts(above: I32, kind: U8) -> tuple[int, int]:
    """Parts of a core's forest: (parts with fill, bags without fill)."""
    cores = 0
    plain = 0
    for b in range(kind.shape[0]):
        if not kind[b] & BAG_FILL:
            plain += 1
        elif not kind[b] & ADHESION_FILL:
            cores += 1
    return cores, plain


@kernel
def judge(
    real: U64, full: U64, anchors: int, most: int, cells: I64
) -> tuple[int, int, I32]:
    """States (at most ``most`` + 1) and fill of a triangulation, and its elimination order."""
    order = np.empty(real.shape[0], np.int32)
    number_from(full, anchors, order)
    later_ptr, later, fill_ptr, fill_rank = dense_lists(real, full, anchors, order)
    bag_ptr, bag_rank, adhesion, _, kind = write_bags(anchors, later_ptr, later, fill_ptr, fill_rank)
    states, _ = count_states(bag_ptr, bag_rank, adhesion, kind, fill_ptr, fill_rank, most, cells)
    return states, fill_ptr[real.shape[0]], order


@kernel
def best_triangulation(
    real: U64, full: U64, anchors: int, easy: int, most: int, least_fill: bool, cells: I64
) -> tuple[U64, I32]:
    """The best of up to three minimal triangulations of one core, with its elimination order.

    Candidates: the given ``full`` (overwritten by its thinning), least degree, least missing pairs, each
    thinned.  Fewest states wins (fewest fill edges if ``least_fill``), then the other of the two, then the
    first.  If the first has at most ``easy`` states and ``least_fill`` is off, it is taken at once.
    """
    thin(full, list_fill(real, full), cells)
    states, fill, order = judge(real, full, anchors, most, cells)
    if states <= easy and not least_fill:
        return full, order
    for method in range(2):
        other = np.empty_like(real)
        if method == 0:
            done = fill_by_degree(real, other, cells)
        else:
            done = fill_by_missing(real, other, cells)
        if not done:
            break
        thin(other, list_fill(real, other), cells)
        other_states, other_fill, other_order = judge(real, other, anchors, most, cells)
        if cells[STOP] != 0:
            break
        if least_fill:
            better = other_fill < fill or (other_fill == fill and other_states < states)
        else:
            better = other_states < states or (other_states == states and other_fill < fill)
        if better:
            states, fill, full, order = other_states, other_fill, other, other_order
    return full, order


@kernel
def build_forest(
    core_ptr: I64,
    core_place: I32,
    low_ptr: I64,
    low: I32,
    fill_end: I64,
    fill: I32,
    dense_limit: int,
    most: int,
    least_fill: bool,
    cells: I64,
) -> tuple[bool, Forest]:
    """Build the forest of all cores; (False if stopped, forest).

    Cores of at most ``dense_limit`` vertices are triangulated anew on bitset rows; larger ones keep the
    elimination order of the whole graph.  ``most`` caps the counting of states per core.
    """
    cores = core_ptr.shape[0] - 1
    local = np.full(low_ptr.shape[0] - 1, -1, np.int32)
    core_top = np.empty(cores, np.int32)
    core_slot = np.zeros(cores + 1, np.int64)
    core_anchors = np.zeros(cores, np.int32)
    core_bag = np.zeros(cores + 1, np.int64)
    figures = np.zeros((cores, 6), np.int64)
    slot_place = np.empty(1024, np.int32)
    slot_fill_ptr = np.zeros(1024, np.int64)
    slot_fill = np.empty(1024, np.int32)
    bag_ptr = np.zeros(1024, np.int64)
    bag_slot = np.empty(1024, np.int32)
    bag_adhesion = np.empty(1024, np.int32)
    bag_above = np.empty(1024, np.int32)
    bag_kind = np.empty(1024, np.uint8)
    slots = np.int64(0)
    fills = np.int64(0)
    bags = np.int64(0)
    going = True
    for c in range(cores):
        cells[STEP] = c
        if cells[STOP] != 0:
            going = False
            break
        homes = core_place[core_ptr[c] : core_ptr[c + 1]]
        places, anchors = core_vertices(homes, low_ptr, low, fill_end, fill, local)
        k = places.shape[0]
        lower = np.int64(0)
        if k <= dense_limit:
            real, full = dense_rows(places, anchors, low_ptr, low, fill_end, fill, local)
            full, order = best_triangulation(real, full, anchors, 8 * k, most, least_fill, cells)
            later_ptr, later, fill_ptr, fill_rank = dense_lists(real, full, anchors, order)
            lower = pack_cycles(real, list_fill(real, full), cells)
            ranked = places[order]
        else:
            ranked = places
            later_ptr, later, fill_ptr, fill_rank = sparse_lists(
                places, anchors, low_ptr, low, fill_end, fill, local
            )
        for i in range(k):
            local[places[i]] = -1
        own_ptr, own_rank, adhesion, above, kind = write_bags(
            anchors, later_ptr, later, fill_ptr, fill_rank
        )
        states, table = count_states(
            own_ptr, own_rank, adhesion, kind, fill_ptr, fill_rank, most, cells
        )
        with_fill, without = count_parts(above, kind)
        if k <= dense_limit and cells[STOP] == 0:
            lower = max(lower, with_fill)
        figures[c, FILL_EDGES] = fill_ptr[k]
        figures[c, FILL_LOWER] = lower
        figures[c, STATES] = states
        figures[c, TABLE] = table
        figures[c, PARTS_FILL] = with_fill
        figures[c, PARTS_PLAIN] = without
        core_anchors[c] = anchors
        core_top[c] = homes[0]
        # append to the flat arrays
        count = kind.shape[0]
        slot_place = grown32(slot_place, slots + k)
        slot_fill_ptr = grown64(slot_fill_ptr, slots + k + 1)
        slot_fill = grown32(slot_fill, fills + fill_ptr[k])
        for r in range(k):
            slot_place[slots + r] = ranked[r]
            slot_fill_ptr[slots + r + 1] = fills + fill_ptr[r + 1]
        for g in range(fill_ptr[k]):
            slot_fill[fills + g] = slots + fill_rank[g]
        bag_ptr = grown64(bag_ptr, bags + count + 1)
        bag_slot = grown32(bag_slot, bag_ptr[bags] + own_ptr[count])
        bag_adhesion = grown32(bag_adhesion, bags + count)
        bag_above = grown32(bag_above, bags + count)
        if bags + count > bag_kind.shape[0]:
            longer = np.empty(2 * (bags + count), np.uint8)
            longer[:bags] = bag_kind[:bags]
            bag_kind = longer
        base = bag_ptr[bags]
        for e in range(own_ptr[count]):
            bag_slot[base + e] = slots + own_rank[e]
        for b in range(count):
            bag_ptr[bags + b + 1] = base + own_ptr[b + 1]
            bag_adhesion[bags + b] = adhesion[b]
            bag_above[bags + b] = bags + above[b] if above[b] >= 0 else -1
            bag_kind[bags + b] = kind[b]
        slots += k
        fills += fill_ptr[k]
        bags += count
        core_slot[c + 1] = slots
        core_bag[c + 1] = bags
    return going, Forest(
        core_top,
        core_slot,
        core_anchors,
        core_bag,
        figures,
        slot_place[:slots],
        slot_fill_ptr[: slots + 1],
        slot_fill[:fills],
        bag_ptr[: bags + 1],
        bag_slot[: bag_ptr[bags]],
        bag_adhesion[:bags],
        bag_above[:bags],
        bag_kind[:bags],
    )
