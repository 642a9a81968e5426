"""Ordering the maximal cliques of a chordal graph so that those of each vertex stand together, if that can be.

Habib, McConnell, Paul, Viennot, Theor. Comput. Sci. 234 (2000) 59-84, section 5.  Cliques are kept in classes; the
order of the classes is settled, inside a class it is open.  A pivot vertex x pulls its cliques together: in the
first class that holds one of them they go to the end, in the last one to the beginning.  When a tree edge comes to
join two classes, the vertices it shares become pivots.  Without pivots, the clique of a class that the search found
last is set apart as its end.
"""

import numpy as np

from nearchord_solve.kernels.compiled import I32, I64, kernel

NEXT, PREV = 0, 1


@kernel
def _move(c: int, target: int, group: I32, link: I32, head: I32, tail: I32, size: I64) -> None:
    """Take clique c out of its class and append it to class ``target``."""
    g = group[c]
    before = link[c, PREV]
    after = link[c, NEXT]
    if before >= 0:
        link[before, NEXT] = after
    else:
        head[g] = after
    if after >= 0:
        link[after, PREV] = before
    else:
        tail[g] = before
    size[g] -= 1
    group[c] = target
    link[c, NEXT] = -1
    link[c, PREV] = tail[target]
    if tail[target] >= 0:
        link[tail[target], NEXT] = c
    else:
        head[target] = c
    tail[target] = c
    size[target] += 1


@kernel
def arrange(
    component: I32, clique_of_ptr: I64, clique_of: I32, parent: I32, shared_ptr: I64, shared: I32, position: I64
) -> bool:
    """Try to order the k cliques; True if the cliques of each vertex are consecutive.

    ``component`` int32[k] ascending from 0 in discovery order; row v of ``clique_of``: the cliques of vertex v,
    ascending; ``parent``, ``shared``: the clique tree; ``position`` int64[k] is overwritten with the places.
    Invariants: members of a class ascend in its list; begin[g] counts the cliques in earlier classes.
    O(n + total size of the cliques) time.
    """
    k = parent.shape[0]
    n = clique_of_ptr.shape[0] - 1
    classes = int(component[k - 1]) + 1 if k else 0
    group = component.copy()
    link = np.full((k, 2), -1, np.int32)
    head = np.full(2 * k + 2, -1, np.int32)
    tail = np.full(2 * k + 2, -1, np.int32)
    size = np.zeros(2 * k + 2, np.int64)
    begin = np.zeros(2 * k + 2, np.int64)
    for c in range(k):
        g = group[c]
        if size[g] == 0:
            head[g] = c
            begin[g] = c
        else:
            link[tail[g], NEXT] = c
            link[c, PREV] = tail[g]
        tail[g] = c
        size[g] += 1
    # Tree edges as lists of half-edges: 2c at child c, 2c + 1 at its parent; a cut edge leaves both lists.
    first, after, before = _half_edges(parent)
    pivots = np.empty(n, np.int32)
    pending = 0
    queued = np.zeros(n, np.uint8)
    member = np.full(k, -1, np.int64)
    single = np.empty(1, np.int32)
    turn = 0
    open_clique = 0
    while True:
        if pending > 0:
            pending -= 1
            x = pivots[pending]
            chosen = clique_of[clique_of_ptr[x] : clique_of_ptr[x + 1]]
            classes = _pull(chosen, group, link, head, tail, size, begin, classes)
        else:
            while open_clique < k and size[group[open_clique]] == 1:
                open_clique += 1
            if open_clique == k:
                break
            g = group[open_clique]
            single[0] = tail[g]
            chosen = single
            begin[classes] = begin[g] + size[g] - 1
            _move(tail[g], classes, group, link, head, tail, size)
            classes += 1
        for i in range(chosen.shape[0]):
            member[chosen[i]] = turn
        for i in range(chosen.shape[0]):
            half = first[chosen[i]]
            while half >= 0:
                following = after[half]
                child = half >> 1
                other = parent[child] if (half & 1) == 0 else child
                if member[other] != turn:
                    _cut(half, chosen[i], first, after, before)
                    _cut(half ^ 1, other, first, after, before)
                    for e in range(shared_ptr[child], shared_ptr[child + 1]):
                        if queued[shared[e]] == 0:
                            queued[shared[e]] = 1
                            pivots[pending] = shared[e]
                            pending += 1
                half = following
        turn += 1
    for c in range(k):
        position[c] = begin[group[c]]
    return _consecutive(clique_of_ptr, clique_of, position)


@kernel
def _half_edges(parent: I32) -> tuple[I32, I32, I32]:
    k = parent.shape[0]
    first = np.full(k, -1, np.int32)
    after = np.full(2 * k, -1, np.int32)
    before = np.full(2 * k, -1, np.int32)
    for c in range(k):
        if parent[c] < 0:
            continue
        for half in (2 * c, 2 * c + 1):
            at = c if (half & 1) == 0 else parent[c]
            after[half] = first[at]
            if first[at] >= 0:
                before[first[at]] = half
            first[at] = half
    return first, after, before


@kernel
def _cut(half: int, at: int, first: I32, after: I32, before: I32) -> None:
    if before[half] >= 0:
        after[before[half]] = after[half]
    else:
        first[at] = after[half]
    if after[half] >= 0:
        before[after[half]] = before[half]


@kernel
def _pull(chosen: I32, group: I32, link: I32, head: I32, tail: I32, size: I64, begin: I64, classes: int) -> int:
    """Bring the chosen cliques together where the order is open; returns the new number of classes."""
    left = group[chosen[0]]
    right = left
    for i in range(chosen.shape[0]):
        g = group[chosen[i]]
        if begin[g] < begin[left]:
            left = g
        if begin[g] > begin[right]:
            right = g
    if left == right:
        return classes
    inner = 0
    outer = 0
    for i in range(chosen.shape[0]):
        inner += group[chosen[i]] == left
        outer += group[chosen[i]] == right
    if inner < size[left]:
        begin[classes] = begin[left] + size[left] - inner
        for i in range(chosen.shape[0]):
            if group[chosen[i]] == left:
                _move(chosen[i], classes, group, link, head, tail, size)
        classes += 1
    if outer < size[right]:
        begin[classes] = begin[right]
        begin[right] += outer
        for i in range(chosen.shape[0]):
            if group[chosen[i]] == right:
                _move(chosen[i], classes, group, link, head, tail, size)
        classes += 1
    return classes


@kernel
def _consecutive(clique_of_ptr: I64, clique_of: I32, position: I64) -> bool:
    for v in range(clique_of_ptr.shape[0] - 1):
        begin = clique_of_ptr[v]
        end = clique_of_ptr[v + 1]
        low = position[clique_of[begin]]
        high = low
        for e in range(begin, end):
            low = min(low, position[clique_of[e]])
            high = max(high, position[clique_of[e]])
        if high - low + 1 != end - begin:
            return False
    return True
