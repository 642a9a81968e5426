"""What the states of one bag with fill fall short of the optimum by.

The *gap* of a state s of a bag is the optimum less the most that a set I with I & bag = s is worth.  Let A be the
adhesion of the bag, t = s & A, M(t) the most that the subtree of the bag adds to t, and val(s) what it adds when the
bag holds s.  The best set with I & A = t has M(t) inside, so

    gap(s) = gap of t + M(t) - val(s),

where the gap of t is about all sets with I & A = t.  In the other direction, the gap of a state t of the adhesion of a
bag below is the least gap of the states s of this bag with s & adhesion = t, and the gap of choosing a vertex is the
least gap of the states that hold it.

The message of a bag without fill in its adhesion has two kinds of states, single vertices, whose gaps are those of the
vertices, and the empty one: its gap, what it costs to *avoid* the adhesion, is found by search (:func:`avoid`).

Overflow: gaps lie in 0..2**62; they are differences of values that may have wrapped, which is exact modulo 2**64.
"""

from typing import NamedTuple

import numpy as np

from nearchord_solve.kernels.cliques import depth_limit, touched
from nearchord_solve.kernels.compiled import I32, I64, U8, U64, inlined, kernel, lowest
from nearchord_solve.kernels.layout import ADHESION_FILL, Forest, Tries
from nearchord_solve.sweep.kernels.passes import split_bag
from nearchord_solve.sweep.kernels.tables import collect_messages, extend, fill_table, retract

ONE = np.uint64(1)
MOST_GAP = 2**62  # no gap is so large
KEPT_SEARCHES = 64


class Bag(NamedTuple):
    """A bag with fill, ready for searches of its states.

    ``own``: first node of the trie of its adhesion; there ``tries.delta`` holds gap of t + M(t), and ``none`` is the
    same for the empty t.  The rest as in :mod:`.tables`.
    """

    number: int
    slots: I32
    rows: U64
    edges: int
    lead: int
    gain: I64
    children: I32
    meet_ptr: I64
    meet_node: I64
    meet_child: I32
    own: int
    none: int


class Searches(NamedTuple):
    """Results of searches of one bag: a tree whose root is the chosen state.

    Search k leaves out the vertices ``without`` on the way from the root to k.
    """

    filled: I64  # [1] rows in use
    gap: I64
    above: I32
    first: I32
    following: I32
    without: I32  # place
    size: I32
    place: I32  # [., .] places of the best state


@inlined
def open_bag(
    number: int, forest: Forest, children: I32, tries: Tries, used: int, where: I32, residual: I64,
    price: I64, apart: I64, avoided: int,
) -> Bag:  # fmt: skip
    """Go through the states of a bag again and leave gap of t + M(t) behind node ``used`` of the tries.

    ``residual`` and ``tries`` as the inward pass left them.  ``price`` int64[n]: gaps of vertices, by place, known for
    the adhesion; ``apart`` int64[nodes]: gaps of the states of its kept message; ``avoided``: that of the empty one.
    """
    slots, rows, edges = touched(
        forest.bag_slot, forest.bag_ptr[number], forest.bag_ptr[number + 1], forest.slot_fill_ptr, forest.slot_fill,
        where,
    )  # fmt: skip
    lead, gain, spare, _ = split_bag(number, slots, forest, residual)
    meet_ptr, meet_node, meet_child = collect_messages(
        slots, children, tries.begin, tries.end, tries.label, tries.close
    )
    empty, end = fill_table(
        slots, rows, edges, lead, gain, meet_ptr, meet_node, meet_child, children.shape[0],
        tries.label, tries.close, tries.delta, used, spare,
    )  # fmt: skip
    if forest.bag_kind[number] & ADHESION_FILL:
        for x in range(used, end):
            tries.delta[x] += apart[tries.begin[number] + x - used]
    else:
        for x in range(used, end):
            tries.delta[x] += price[forest.slot_place[tries.label[x]]]
    return Bag(
        number, slots, rows, edges, lead, gain, children, meet_ptr, meet_node, meet_child, used, avoided + empty
    )  # fmt: skip


@kernel
def least_gap(bag: Bag, tries: Tries, allowed: U64, note: bool, price: I64, apart: I64, best: I32) -> tuple[int, int]:
    """The least gap of the states among ``allowed`` touched vertices (uint64[W], changed), and the size of the state.

    ``best`` int32[t] receives the state.  With ``note``, and everything allowed, ``price`` int64[t] receives the gaps
    of the touched vertices, and ``apart`` the gaps of the states of the messages from below that meet a state.
    O(states * (W + messages met)).
    """
    count, words = bag.rows.shape
    deepest = depth_limit(count, bag.edges) + 1
    stack = np.empty((deepest, words), np.uint64)
    value = np.empty(deepest, np.int64)
    least = np.empty(deepest, np.int64)
    node = np.empty(deepest, np.int64)
    cursor = np.empty(deepest, np.int64)
    chosen = np.empty(deepest, np.int64)
    current = np.full(bag.children.shape[0], -1, np.int64)
    met = np.empty(bag.children.shape[0], np.int32)
    meets = 0
    undo = np.empty(bag.meet_node.shape[0] + 1, np.int64)
    undone = int(np.int64(0))  # a literal 0 would compile what it is passed to twice
    stack[0] = allowed
    value[0] = 0
    least[0] = bag.none
    node[0] = -1
    cursor[0] = bag.own
    chosen[0] = -1
    most = bag.none
    length = 0
    depth = 0
    while depth >= 0:
        w = 0
        while w < words and stack[depth, w] == 0:
            w += 1
        if w == words:
            j = chosen[depth]
            if j >= 0:
                undone = retract(j, bag.meet_ptr, bag.meet_child, current, undo, undone)
                while meets > 0 and current[met[meets - 1]] < 0:
                    meets -= 1
                if note:
                    price[j] = min(price[j], least[depth])
                least[depth - 1] = min(least[depth - 1], least[depth])
            depth -= 1
            continue
        j = (w << 6) + lowest(stack[depth, w])
        stack[depth, w] &= stack[depth, w] - ONE
        before = undone
        more, undone = extend(
            j, bag.slots[j], bag.meet_ptr, bag.meet_node, bag.meet_child, tries.label, tries.close, tries.delta,
            current, undo, undone,
        )  # fmt: skip
        for e in range(bag.meet_ptr[j], bag.meet_ptr[j + 1]):
            if undo[before + e - bag.meet_ptr[j]] < 0:
                met[meets] = bag.meet_child[e]
                meets += 1
        total = value[depth] + more
        at = node[depth]
        if j < bag.lead:
            at = cursor[depth]
            while tries.label[at] != bag.slots[j]:
                at = tries.close[at]
            cursor[depth] = tries.close[at]
        else:
            total += bag.gain[j]
        depth += 1
        for y in range(words):
            stack[depth, y] = stack[depth - 1, y] & bag.rows[j, y]
        gap = (tries.delta[at] if at >= 0 else bag.none) - total
        value[depth] = total
        least[depth] = gap
        node[depth] = at
        cursor[depth] = at + 1
        chosen[depth] = j
        if gap < most:
            most = gap
            length = depth
            for d in range(depth):
                best[d] = chosen[d + 1]
        if note:
            for q in range(meets):
                x = current[met[q]]
                apart[x] = min(apart[x], gap)
    return most, length


@inlined
def all_of(count: int) -> U64:
    """A bitset of the first ``count`` vertices."""
    words = np.zeros((count + 63) >> 6, np.uint64)
    for j in range(count):
        words[j >> 6] |= ONE << np.uint64(j & 63)
    return words


@inlined
def price_bag(bag: Bag, forest: Forest, tries: Tries, residual: I64, price: I64, apart: I64) -> None:
    """Gaps of the homes of a bag, into ``price`` by place, and of the states of the messages from below, but the empty
    ones, into ``apart`` int64[nodes]."""
    count = bag.slots.shape[0]
    touched_price = np.full(count, MOST_GAP)
    best = np.empty(count, np.int32)
    least_gap(bag, tries, all_of(count), True, touched_price, apart, best)
    begin = forest.bag_ptr[bag.number]
    j = 0
    for e in range(begin, forest.bag_ptr[bag.number + 1]):
        s = forest.bag_slot[e]
        home = e >= begin + forest.bag_adhesion[bag.number]
        if j < count and bag.slots[j] == s:
            if home:
                price[forest.slot_place[s]] = touched_price[j]
            j += 1
        elif home:
            price[forest.slot_place[s]] = bag.none - residual[forest.slot_place[s]]
    for b in bag.children:
        x = tries.begin[b]
        while x < tries.end[b]:
            if apart[x] == MOST_GAP:  # a vertex that touches fill only further down: no other stands beside it
                apart[x] = price[forest.slot_place[tries.label[x]]]
            x = tries.close[x]


@inlined
def search_bag(
    bag: Bag, forest: Forest, tries: Tries, price: I64, apart: I64, shut: I64, stamp: int, places: I32
) -> tuple[int, int]:
    """The least gap of the states without the places where ``shut`` int64[n] is ``stamp``, and the size of the state.

    ``places`` int32[.] receives its places.
    """
    count = bag.slots.shape[0]
    allowed = all_of(count)
    for j in range(count):
        if shut[forest.slot_place[bag.slots[j]]] == stamp:
            allowed[j >> 6] ^= ONE << np.uint64(j & 63)
    best = np.empty(count, np.int32)
    least, size = least_gap(bag, tries, allowed, False, price, apart, best)
    for d in range(size):
        places[d] = forest.slot_place[bag.slots[best[d]]]
    j = 0
    for e in range(forest.bag_ptr[bag.number], forest.bag_ptr[bag.number + 1]):
        s = forest.bag_slot[e]
        if j < count and bag.slots[j] == s:
            j += 1
        elif shut[forest.slot_place[s]] != stamp and price[forest.slot_place[s]] < least:
            least = price[forest.slot_place[s]]
            size = 1
            places[0] = forest.slot_place[s]
    return least, size


@inlined
def open_searches(bag: Bag, forest: Forest, chosen: U8) -> Searches:
    """No search yet; the root is what of the bag is in the best set, ``chosen`` uint8[n] by place."""
    deepest = depth_limit(bag.slots.shape[0], bag.edges) + 1
    room = KEPT_SEARCHES + 1
    found = Searches(
        np.ones(1, np.int64), np.zeros(room, np.int64), np.full(room, -1, np.int32), np.full(room, -1, np.int32),
        np.full(room, -1, np.int32), np.full(room, -1, np.int32), np.zeros(room, np.int32),
        np.empty((room, deepest), np.int32),
    )  # fmt: skip
    for e in range(forest.bag_ptr[bag.number], forest.bag_ptr[bag.number + 1]):
        p = forest.slot_place[forest.bag_slot[e]]
        if chosen[p]:
            found.place[0, found.size[0]] = p
            found.size[0] += 1
    return found


@inlined
def avoid(
    bag: Bag, forest: Forest, tries: Tries, price: I64, apart: I64,
    mark: I64, stamp: int, searches: Searches, shut: I64, serial: I64,
) -> int:  # fmt: skip
    """The least gap of the states without any place where ``mark`` int64[n] is ``stamp``.

    A state of least gap among those that leave out X either avoids the marked places, and then is the answer when
    all of X is marked, or holds a marked place v; then the answer leaves out X + v.  So X grows from nothing, and as
    many adhesions below a bag need the same X, searches are kept: usually a few serve all.  ``shut`` int64[n] and
    ``serial`` int64[1] hold stamps of their own.
    """
    k = 0
    while True:
        hit = -1
        for d in range(searches.size[k]):
            if mark[searches.place[k, d]] == stamp:
                hit = searches.place[k, d]
                break
        if hit < 0:
            return int(searches.gap[k])
        following = searches.first[k]
        while following >= 0 and searches.without[following] != hit:
            following = searches.following[following]
        if following < 0:
            full = searches.filled[0] == KEPT_SEARCHES
            following = searches.filled[0]
            serial[0] += 1
            if full:  # the last row is not kept: leave out all marked places at once
                for e in range(forest.bag_ptr[bag.number], forest.bag_ptr[bag.number + 1]):
                    p = forest.slot_place[forest.bag_slot[e]]
                    if mark[p] == stamp:
                        shut[p] = serial[0]
            else:
                searches.filled[0] += 1
                searches.above[following] = k
                searches.without[following] = hit
                searches.following[following] = searches.first[k]
                searches.first[k] = following
                up = following
                while up > 0:
                    shut[searches.without[up]] = serial[0]
                    up = searches.above[up]
            searches.gap[following], searches.size[following] = search_bag(
                bag, forest, tries, price, apart, shut, serial[0], searches.place[following]
            )
        k = following
