"""The outward pass of prices: for every vertex, what choosing it costs, and what leaving it out costs.

Gaps are those of :mod:`.gaps`: the gap of a condition is the optimum less the most that a set under it is worth.  The
price of choosing v is the gap of "v is chosen".  Leaving v out costs nothing unless the best set found holds v.

Outside fill cores, let r be what i was worth at its turn inwards.  A set that avoids L(i) gains max(0, r) in the
subtree of i, by choosing i or not, and the choice of i gains r.  So with the gap g of avoiding L(i), the clique of
earlier neighbours,

    gap of choosing i = g + max(0, -r),        gap of avoiding K(i) = g + max(0, r).

All that meets L(i) meets K(p), p the parent: a set that avoids L(i) holds nothing of K(p), or one vertex of K(p) that
is not in L(i), as K(p) is a clique.  So g is the least of the gap of avoiding K(p) and the gaps of choosing a vertex of
K(p) - L(i); it is 0 where the best set avoids L(i).  If L(i) is all of K(p) nothing has to be looked at; if it is about
as large, K(p) is looked through; if it is much smaller, K(p) is put in the order of gaps as far as a vertex outside
L(i) needs, once for all that hang from it.  Mostly that is one vertex or two, and together O(n + m).
"""

from typing import NamedTuple

import numpy as np

from nearchord_solve.kernels.cells import POLL, STEP, STOP
from nearchord_solve.kernels.compiled import I32, I64, U8, inlined, kernel
from nearchord_solve.kernels.layout import BAG_FILL, Forest, Numbering, Tries
from nearchord_solve.sweep.kernels.gaps import MOST_GAP, avoid, open_bag, open_searches, price_bag
from nearchord_solve.sweep.kernels.passes import link_bags, senders

SMALL = 4  # a clique with so many times fewer vertices than the one it hangs from is worth sorting for


class Prices(NamedTuple):
    """What the pass writes."""

    chosen: I64  # [n] gap of choosing the place
    left_out: I64  # [n] gap of leaving it out
    none: I64  # [n] gap of avoiding K(i), for places outside cores
    avoided: I64  # [n + B] gap of avoiding L(i), and of avoiding the adhesion of bag b, at n + b
    apart: I64  # [nodes] gap of each state of a kept message


class Hanging(NamedTuple):
    """What hangs from the bags of cores, and the rows that were sorted.

    Place i is named i, bag b n + b: both hang by a clique, L(i) or the adhesion.
    """

    first: I32  # [B] the first that hangs from a bag, -1 for none
    following: I32  # [n + B] the next one
    mark: I64  # [n] name of whose clique was marked last, or -2 - p for {p}
    row: I32  # [m] lower neighbours; those of i are copied when head[i] becomes positive
    head: I32  # [n] how many of the lower neighbours stand in front in the order of their gaps


@kernel
def clique_of(name: int, numbering: Numbering, forest: Forest) -> I32:
    """The clique by which a place or a bag hangs."""
    n = numbering.order.shape[0]
    if name < n:
        return numbering.low[numbering.low_ptr[name] : numbering.low_ptr[name + 1]].copy()
    b = name - n
    size = forest.bag_adhesion[b]
    clique = np.empty(size, np.int32)
    for e in range(size):
        clique[e] = forest.slot_place[forest.bag_slot[forest.bag_ptr[b] + e]]
    return clique


@inlined
def home_slots(forest: Forest, n: int) -> tuple[I32, I32]:
    """(slot, bag) at which each place of a core is at home, int32[n] each; others are not written."""
    slot = np.empty(n, np.int32)
    bag = np.empty(n, np.int32)
    for b in range(forest.bag_kind.shape[0]):
        for e in range(forest.bag_ptr[b] + forest.bag_adhesion[b], forest.bag_ptr[b + 1]):
            p = forest.slot_place[forest.bag_slot[e]]
            slot[p] = forest.bag_slot[e]
            bag[p] = b
    return slot, bag


@kernel
def hang(numbering: Numbering, forest: Forest) -> Hanging:
    """Find the bag from which each place and each bag hangs.

    A clique of G whose highest place is settled by a core lies in that core, and in the bag at which its member of the
    highest slot is at home.
    """
    n = numbering.order.shape[0]
    bags = forest.bag_kind.shape[0]
    first = np.full(bags, -1, np.int32)
    following = np.full(n + bags, -1, np.int32)
    slot, bag = home_slots(forest, n)
    for name in range(n + bags):
        if name < n:
            p = numbering.parent[name]
            if numbering.core[name] >= 0 or p < 0 or numbering.core[p] < 0:
                continue
            above = np.int32(-1)
        else:
            above = forest.bag_above[name - n]
        if above < 0:
            clique = clique_of(name, numbering, forest)
            if clique.shape[0] == 0:
                continue
            core = numbering.core[clique.max()]
            if core < 0:
                continue
            deep = np.int32(-1)
            for p in clique:
                if numbering.core[p] == core and slot[p] > deep:
                    deep = slot[p]
                    above = bag[p]
        following[name] = first[above]
        first[above] = name
    return Hanging(first, following, np.full(n, -1), np.empty(numbering.low.shape[0], np.int32), np.zeros(n, np.int32))


@kernel
def mark_clique(clique: I32, name: int, chosen: U8, mark: I64) -> bool:
    """Mark a clique with ``name``; returns whether a vertex of it is in the best set."""
    hit = False
    for p in clique:
        mark[p] = name
        hit = hit or chosen[p] != 0
    return hit


@kernel
def first_unmarked(row: I32, head: int, gap: I64, mark: I64, name: int) -> tuple[int, int]:
    """The least gap of a place of ``row`` that is not marked with ``name``, MOST_GAP without one; how many places of
    the row are now in order.

    The first ``head`` places of the row are in order of gap, and as many more are put in order as are looked at.
    """
    size = row.shape[0]
    for k in range(size):
        if k == head:
            for q in range(k + 1, size):
                if gap[row[q]] < gap[row[k]]:
                    row[k], row[q] = row[q], row[k]
            head += 1
        if mark[row[k]] != name:
            return gap[row[k]], head
    return MOST_GAP, head


@kernel
def avoid_at(top: int, size: int, name: int, numbering: Numbering, hanging: Hanging, prices: Prices) -> int:
    """Gap of avoiding the ``size`` marked places of a clique whose highest place ``top`` is in no core."""
    begin = numbering.low_ptr[top]
    end = numbering.low_ptr[top + 1]
    least = prices.none[top]
    if end - begin <= SMALL * size:
        for e in range(begin, end):
            p = numbering.low[e]
            if hanging.mark[p] != name:
                least = min(least, prices.chosen[p])
        return int(least)
    if hanging.head[top] == 0:
        hanging.row[begin:end] = numbering.low[begin:end]
    other, hanging.head[top] = first_unmarked(
        hanging.row[begin:end], hanging.head[top], prices.chosen, hanging.mark, name
    )
    return int(min(least, other))


@inlined
def list_asked(b: int, forest: Forest, hanging: Hanging, chosen: U8) -> I64:
    """What has to be avoided in a bag: each chosen home p alone, named -2 - p, and the cliques that hang from it."""
    begin = forest.bag_ptr[b] + forest.bag_adhesion[b]
    end = forest.bag_ptr[b + 1]
    count = end - begin
    name = hanging.first[b]
    while name >= 0:
        count += 1
        name = hanging.following[name]
    names = np.empty(count, np.int64)
    count = 0
    for e in range(begin, end):
        p = forest.slot_place[forest.bag_slot[e]]
        if chosen[p]:
            names[count] = -2 - p
            count += 1
    name = hanging.first[b]
    while name >= 0:
        names[count] = name
        count += 1
        name = hanging.following[name]
    return names[:count]


@kernel
def price_plain(
    b: int, numbering: Numbering, forest: Forest, hanging: Hanging, residual: I64, chosen: U8, prices: Prices
) -> None:
    """Gaps of a bag of a core without fill, as for places outside cores, and of what hangs from it."""
    n = residual.shape[0]
    begin = forest.bag_ptr[b]
    end = forest.bag_ptr[b + 1]
    none = prices.avoided[n + b]
    clique = np.empty(end - begin, np.int32)
    for e in range(begin, end):
        p = forest.slot_place[forest.bag_slot[e]]
        clique[e - begin] = p
        if e >= begin + forest.bag_adhesion[b]:
            prices.chosen[p] = none + max(0, -residual[p])
            none += max(0, residual[p])
    head = 0
    for name in list_asked(b, forest, hanging, chosen):
        hit = name < 0
        if hit:
            hanging.mark[-2 - name] = name
        else:
            hit = mark_clique(clique_of(name, numbering, forest), name, chosen, hanging.mark)
        gap = 0
        if hit:
            other, head = first_unmarked(clique, head, prices.chosen, hanging.mark, name)
            gap = min(none, other)
        if name < 0:
            prices.left_out[-2 - name] = gap
        else:
            prices.avoided[name] = gap


@kernel
def price_filled(
    b: int, numbering: Numbering, forest: Forest, children: I32, tries: Tries, used: int, where: I32,
    hanging: Hanging, shut: I64, serial: I64, residual: I64, chosen: U8, prices: Prices,
) -> None:  # fmt: skip
    """Gaps of a bag with fill, and of what hangs from it."""
    n = residual.shape[0]
    bag = open_bag(
        b, forest, children, tries, used, where, residual, prices.chosen, prices.apart, prices.avoided[n + b]
    )
    price_bag(bag, forest, tries, residual, prices.chosen, prices.apart)
    searches = open_searches(bag, forest, chosen)
    for name in list_asked(b, forest, hanging, chosen):
        if name < 0:
            hanging.mark[-2 - name] = name
            hit = True
        else:
            hit = mark_clique(clique_of(name, numbering, forest), name, chosen, hanging.mark)
        gap = 0
        if hit:
            gap = avoid(
                bag, forest, tries, prices.chosen, prices.apart, hanging.mark, name, searches, shut, serial
            )  # fmt: skip
        if name < 0:
            prices.left_out[-2 - name] = gap
        else:
            prices.avoided[name] = gap


@inlined
def price_core(
    c: int, numbering: Numbering, forest: Forest, first: I32, following: I32, tries: Tries, used: int, where: I32,
    hanging: Hanging, shut: I64, serial: I64, residual: I64, chosen: U8, prices: Prices,
) -> None:  # fmt: skip
    """Gaps of all that a core settles."""
    n = residual.shape[0]
    for b in range(forest.core_bag[c], forest.core_bag[c + 1]):
        clique = clique_of(n + b, numbering, forest)
        if clique.shape[0] == 0:
            prices.avoided[n + b] = 0
        elif forest.bag_above[b] < 0 and numbering.core[clique.max()] < 0:
            prices.avoided[n + b] = 0
            if mark_clique(clique, n + b, chosen, hanging.mark):
                prices.avoided[n + b] = avoid_at(
                    clique.max(), clique.shape[0], n + b, numbering, hanging, prices
                )  # fmt: skip
        if forest.bag_kind[b] & BAG_FILL:
            price_filled(
                b, numbering, forest, senders(b, first, following), tries, used, where,
                hanging, shut, serial, residual, chosen, prices,
            )  # fmt: skip
        else:
            price_plain(b, numbering, forest, hanging, residual, chosen, prices)


@kernel
def outward_prices(
    numbering: Numbering, forest: Forest, tries: Tries, used: int, residual: I64, chosen: U8, prices: Prices, cells: I64
) -> bool:
    """Write ``prices``, from the low places to the high ones; False if stopped.

    ``residual``, ``tries`` (``used`` nodes of them) as the inward pass left them, all cores by tables; the tries need
    room for the message of any bag behind that.  ``chosen`` uint8[n], by place: an optimum.  ``prices.apart`` must
    hold MOST_GAP everywhere, ``prices.left_out`` 0.
    """
    low_ptr, low, parent, core = numbering.low_ptr, numbering.low, numbering.parent, numbering.core
    gap_of, left_out, none = prices.chosen, prices.left_out, prices.none
    n = residual.shape[0]
    first, following = link_bags(forest.bag_above, forest.bag_kind)
    hanging = hang(numbering, forest)
    mark = hanging.mark
    where = np.full(forest.slot_place.shape[0], -1, np.int32)
    shut = np.zeros(n, np.int64)
    serial = np.zeros(1, np.int64)
    for i in range(n):
        if (i & POLL) == 0:
            cells[STEP] = i
            if cells[STOP] != 0:
                return False
        c = core[i]
        if c >= 0:
            if forest.core_top[c] == i:
                if cells[STOP] != 0:
                    return False
                price_core(
                    c, numbering, forest, first, following, tries, used, where,
                    hanging, shut, serial, residual, chosen, prices,
                )  # fmt: skip
            continue
        # a place outside cores; what is called once a place is written out here
        p = parent[i]
        begin = low_ptr[i]
        end = low_ptr[i + 1]
        gap = 0
        if p >= 0 and core[p] >= 0:
            gap = prices.avoided[i]
        elif p >= 0 and end - begin == low_ptr[p + 1] - low_ptr[p] + 1:
            gap = none[p]
        elif p >= 0:
            hit = False
            for e in range(begin, end):
                if chosen[low[e]]:
                    hit = True
                    break
            if hit:
                for e in range(begin, end):
                    mark[low[e]] = i
                if low_ptr[p + 1] - low_ptr[p] > SMALL * (end - begin):
                    gap = avoid_at(p, end - begin, i, numbering, hanging, prices)
                else:
                    gap = none[p]
                    for e in range(low_ptr[p], low_ptr[p + 1]):
                        if mark[low[e]] != i:
                            gap = min(gap, gap_of[low[e]])
        r = residual[i]
        gap_of[i] = gap + max(0, -r)
        none[i] = gap + max(0, r)
        if chosen[i]:
            gap = none[i]
            for e in range(begin, end):
                gap = min(gap, gap_of[low[e]])
            left_out[i] = gap
    return True
