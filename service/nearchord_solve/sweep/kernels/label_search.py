"""Growing the states of one bag, vertex by vertex in ascending order.

Colours: at most q disjoint cliques of the fill graph; labels name them in the order of their lowest vertices.
Forests: sets with no cycle of G inside; their trees are kept with all edges, and without those inside the adhesion.
"""

from typing import Any, NamedTuple

import numpy as np

from nearchord_solve.kernels.compiled import I32, I64, U64, kernel, lowest
from nearchord_solve.kernels.words import holds
from nearchord_solve.sweep.kernels.label_bags import Bag

ONE = np.uint64(1)


class Search(NamedTuple):
    """A state and those that it grew from: row d holds what is known of its first d vertices."""

    allow: U64  # [D+1, K, W] what may join each label
    open_: U64  # [D+1, K, W] what of it was not tried yet
    set_: U64  # [D+1, W]
    chosen: I64  # [D+1] vertices, as places in the bag
    label: I32  # [D+1] their classes; 0 in forests
    used: I64  # [D+1] classes in use
    own: I64  # [D+1] what the state is worth in the bag itself
    whole: I32  # [D+1, D+1] trees of the forest
    tied: I32  # [D+1, D+1] trees without the edges inside the adhesion
    climbs: U64  # [W] vertices with a fill edge to a higher one


@kernel
def new_search(bag: Bag, colours: int, deepest: int, candidates: U64) -> Search:
    """The empty state, to be grown by ``candidates`` uint64[W]; ``colours`` 0 means forests."""
    words = candidates.shape[0]
    kinds = max(colours, 1)
    rows = deepest + 1
    allow = np.zeros((rows, kinds, words), np.uint64)
    open_ = np.zeros((rows, kinds, words), np.uint64)
    for k in range(kinds):
        allow[0, k] = candidates
    open_[0, 0] = candidates
    trees = rows if colours == 0 else 0
    climbs = np.zeros(words, np.uint64)
    for v in range(bag.near.shape[0]):
        for w in range(v >> 6, words):
            if bag.near[v, w] & _above(v, w) != 0:
                climbs[v >> 6] |= ONE << np.uint64(v & 63)
    return Search(
        allow, open_, np.zeros((rows, words), np.uint64), np.zeros(rows, np.int64), np.zeros(rows, np.int32),
        np.zeros(rows, np.int64), np.zeros(rows, np.int64), np.zeros((trees, trees), np.int32),
        np.zeros((trees, trees), np.int32), climbs,
    )  # fmt: skip


@kernel
def next_vertex(search: Search, depth: int) -> tuple[int, int]:
    """A vertex that has not been tried yet and its label, -1 without one; it counts as tried from now on."""
    for kind in range(search.open_.shape[1]):
        for w in range(search.open_.shape[2]):
            word = search.open_[depth, kind, w]
            if word != 0:
                search.open_[depth, kind, w] = word & (word - ONE)
                return (w << 6) + lowest(word), kind
    return -1, 0


@kernel
def join(tree: I32, size: int, a: int, b: int) -> None:
    """Make one tree of two: ``tree`` int32[size] names the tree of each vertex."""
    old, new = tree[a], tree[b]
    for i in range(size):
        if tree[i] == old:
            tree[i] = new


@kernel
def _grow_classes(bag: Bag, search: Search, depth: int, v: int, kind: int) -> None:
    """What may join the classes once ``v`` is in class ``kind``."""
    below = depth + 1
    search.used[below] = max(search.used[depth], kind + 1)
    for k in range(search.allow.shape[1]):
        for w in range(search.allow.shape[2]):
            word = search.allow[depth, k, w]
            if k == kind:
                word &= bag.near[v, w]
            search.allow[below, k, w] = word & _above(v, w)
            search.open_[below, k, w] = search.allow[below, k, w] if k <= search.used[below] else np.uint64(0)


@kernel
def _above(v: int, w: int) -> Any:
    """Word w of the set of all vertices above v."""
    if w < v >> 6 or (w == v >> 6 and v & 63 == 63):
        return np.uint64(0)
    if w > v >> 6:
        return ~np.uint64(0)
    return ~((ONE << np.uint64((v & 63) + 1)) - ONE)


@kernel
def _grow_trees(bag: Bag, search: Search, depth: int, v: int) -> None:
    """The trees with ``v``, and what may join: whatever has two neighbours in one tree would close a cycle."""
    below = depth + 1
    whole, tied = search.whole[below], search.tied[below]
    for i in range(depth):
        whole[i] = search.whole[depth, i]
        tied[i] = search.tied[depth, i]
    whole[depth] = depth
    tied[depth] = depth
    lonely = True
    for i in range(depth):
        if not holds(bag.near[v], search.chosen[i]):
            lonely = False
            join(whole, below, i, depth)
            if v >= bag.lead:
                join(tied, below, i, depth)
    for w in range(search.allow.shape[2]):
        kept = search.allow[depth, 0, w] & _above(v, w)
        if not lonely and kept != 0:
            once = np.uint64(0)
            for i in range(below):
                if whole[i] == whole[depth]:
                    ties = ~bag.near[search.chosen[i], w]
                    kept &= ~(once & ties)
                    once |= ties
        search.allow[below, 0, w] = kept
        search.open_[below, 0, w] = kept


@kernel
def _drop_plain(bag: Bag, search: Search, v: int) -> None:
    """Do not try a second vertex u next to ``v`` that makes a plain state from which only plain ones could grow.

    A third vertex x, above both, has a fill edge to one of them: so u is below a fill neighbour of v, or climbs.
    """
    below = np.uint64(0)
    for w in range(search.climbs.shape[0] - 1, -1, -1):
        word = bag.near[v, w]
        smeared = below
        if below == 0 and word != 0:
            smeared = word
            for shift in (1, 2, 4, 8, 16, 32):
                smeared |= smeared >> np.uint64(shift)
            below = ~np.uint64(0)
        for k in range(search.open_.shape[1]):
            search.open_[1, k, w] &= smeared | search.climbs[w]


@kernel
def add_vertex(bag: Bag, search: Search, depth: int, v: int, kind: int, forest: bool) -> None:
    """Write row ``depth + 1``: the state of row ``depth`` with vertex ``v``, above all others, under label ``kind``."""
    below = depth + 1
    search.chosen[depth] = v
    search.label[depth] = kind
    more = bag.gain[v]
    for i in range(depth):
        more += bag.pair[v, search.chosen[i]]
    search.own[below] = search.own[depth] + more
    for w in range(search.set_.shape[1]):
        search.set_[below, w] = search.set_[depth, w]
    search.set_[below, v >> 6] |= ONE << np.uint64(v & 63)
    if forest:
        _grow_trees(bag, search, depth, v)
    else:
        _grow_classes(bag, search, depth, v, kind)
    if bag.closed and depth == 0:
        _drop_plain(bag, search, v)


@kernel
def is_plain(bag: Bag, search: Search, size: int, forest: bool) -> bool:
    """Whether a state is known without being completed: at most two vertices, in two classes or joined by an edge.

    Two vertices of a forest without an edge can still be connected by what lies below.
    """
    if size < 2:
        return True
    if size > 2:
        return False
    if forest:
        return not holds(bag.near[search.chosen[1]], search.chosen[0])
    return bool(search.label[0] != search.label[1])
