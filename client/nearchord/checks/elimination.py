"""Elimination orders: what the columns `proof_order` and `proof_fill` say, and the bags that follow from them.

G is the graph on the vertices that pins leave open, F the pairs of `proof_fill`, H = G + F, and L(v) the neighbours of
v in H that come after it in the order. The first of L(v) is called p(v). One thing is checked:

    (*)  L(v) without p(v) lies in L(p(v)), for every v that has a later neighbour.

Let B(v) be v together with every vertex from which steps to p lead to v.

*Every neighbour in H that B(v) has outside itself lies in L(v).* Proof. Let x in B(v) and y outside be neighbours. If y
comes after x, then y is in L(x). Either x = v, or p(x) is in B(v) too, so y is not p(x) and lies in L(p(x)) by (*); and
so on up to v. If y comes before x, then x is in L(y); either p(y) = x, or x lies in L(p(y)) by (*), where p(y) still
comes before x. Steps to p go up in the order, so they lead from y to x and further to v: then y is in B(v), against the
assumption.

*{v} + L(v) is a clique of H*: by (*) all of L(v) but p(v) is joined to p(v); apply the same to L(p(v)), which has them.

So a choice inside B(v) meets the rest of the graph in L(v) alone. A dynamic program that gives each v the best choice
in B(v) for each choice in L(v) is exact, whatever the order is: nothing in a proof of this kind has to be trusted, only
whether (*) holds and how much work it takes depend on the order.

**Bags.** p(v) joins the bag of v when L(v) = {p(v)} + L(p(v)); in the order, the first v that can takes it. A bag is
{d} + L(d) for its first member d; d and the vertices that joined are its homes, L of the last of them is its adhesion,
which lies in the bag that has the first vertex of the adhesion at home.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from nearchord.checks.edges import Edges, Ints, Mask, pair_keys
from nearchord.checks.states import TooManyStates
from nearchord.errors import CheckFailed

SHIFT = np.int64(32)
MOST_FILLED = 2_000_000


def has_order(columns: Mapping[str, NDArray[Any]]) -> bool:
    """Whether an answer brings an elimination order."""
    return "proof_order" in columns


def ordered(columns: Mapping[str, NDArray[Any]], left: Mask) -> Ints:
    """Place in the order of each vertex, -1 where pins decide; CheckFailed unless all others stand in it once."""
    order = _vertices(columns, "proof_order", left.size)
    times = np.bincount(order, minlength=left.size)
    for wrong, what in (
        (times > 1, "has vertex {} twice"),
        ((times > 0) & ~left, "has vertex {}, which the pins decide"),
        ((times == 0) & left, "lacks vertex {}"),
    ):
        if wrong.any():
            raise CheckFailed("the order of the proof " + what.format(int(wrong.argmax())))
    place = np.full(left.size, -1, np.int64)
    place[order] = np.arange(order.size)
    return place


def _vertices(columns: Mapping[str, NDArray[Any]], name: str, n: int) -> Ints:
    column = columns.get(name)
    if column is None or column.ndim != 1 or column.dtype != np.uint32:
        raise CheckFailed(f"the proof has no column {name} of one dimension and type uint32")
    if column.size and int(column.max()) >= n:
        raise CheckFailed(f"the proof has vertex {int(column.max())}, but the graph has {n} vertices")
    return column.astype(np.int64)


@dataclass(frozen=True)
class Rows:
    """Later neighbours by place: `later[start[i] : start[i + 1]]` are places, the latest first; `filled` marks those
    that a pair of F joins."""

    start: Ints
    later: Ints
    filled: Mask


def rows_of(edges: Edges, place: Ints, fill: Ints) -> Rows:
    """L(v) of every vertex in the order, with pairs F as int64[f, 2]. O((m + f) log(m + f))."""
    inside = (place[edges.u] >= 0) & (place[edges.v] >= 0)
    u, v = (place[np.concatenate((end[inside], fill[:, i]))] for i, end in enumerate((edges.u, edges.v)))
    low, high = np.minimum(u, v), np.maximum(u, v)
    filled = np.arange(low.size) >= low.size - len(fill)
    count = int((place >= 0).sum())
    by_place = np.argsort(low << SHIFT | count - high, kind="stable")
    start = np.concatenate((np.zeros(1, np.int64), np.cumsum(np.bincount(low, minlength=count))))
    return Rows(start, high[by_place], filled[by_place])


def no_fill() -> Ints:
    """No pairs, as int64[0, 2]."""
    return np.zeros((0, 2), np.int64)


def filled(columns: Mapping[str, NDArray[Any]], edges: Edges, place: Ints) -> Ints:
    """The pairs F, int64[f, 2]; CheckFailed unless each has both ends in the order, is no edge, and stands once."""
    ends = _vertices(columns, "proof_fill", edges.n)
    if ends.size % 2:
        raise CheckFailed("the last pair that the proof fills has one end")
    pairs = ends.reshape(-1, 2)
    u, v = pairs[:, 0], pairs[:, 1]
    keys = np.sort(pair_keys(u, v))
    for wrong, what in (
        (u >= v, "does not have its smaller end first"),
        ((place[u] < 0) | (place[v] < 0), "has a vertex that the pins decide"),
        (edges.joined(u, v), "is an edge of the graph"),
        (np.isin(pair_keys(u, v), keys[1:][keys[1:] == keys[:-1]]), "stands twice"),
    ):
        if wrong.any():
            raise CheckFailed(f"pair {int(wrong.argmax())} that the proof fills {what}")
    return pairs


@dataclass(frozen=True)
class Bags:
    """Bags in an order in which each follows what hangs from it.

    `members[b]`: places of bag b, the latest first, the homes last; `lead[b]`: vertices of its adhesion; `above[b]`:
    the bag that it hangs from, -1 for roots; `where[b]`: the position there of each vertex of the adhesion.
    `fill[b]`: pairs of positions that are filled, the smaller first.
    """

    members: list[Ints]
    lead: list[int]
    above: list[int]
    where: list[Ints]
    fill: list[list[tuple[int, int]]]


def bags_of(rows: Rows) -> Bags:
    """The bags; CheckFailed where (*) does not hold. O((m + f) log(m + f)), and the pairs in bags with fill.

    TooManyStates above MOST_FILLED filled pairs in all bags: each of them is a state at least.
    """
    start = rows.start
    counts = np.diff(start)
    owner = np.repeat(np.arange(counts.size), counts)
    parent = np.full(counts.size, -1, np.int64)
    parent[counts > 0] = rows.later[start[1:][counts > 0] - 1]
    where = _positions(rows, owner, parent[owner])
    deep, tops, bag = _chains(counts.tolist(), parent.tolist())
    number = np.full(len(deep), -1, np.int64)
    number[np.argsort(tops, kind="stable")] = np.arange(len(deep))
    bags, count = Bags([], [], [], [], []), 0
    filled = _filled_rows(rows, owner)
    touched = np.zeros(counts.size, np.bool_)
    touched[list(filled)] = True
    held = np.concatenate((np.zeros(1, np.int64), np.cumsum(touched[rows.later])))
    for b in np.argsort(tops, kind="stable").tolist():
        first, top = deep[b], tops[b]
        members = np.append(rows.later[start[first] : start[first + 1]], first)
        suspect = touched[first] or held[start[first]] < held[start[first + 1]]
        bags.members.append(members)
        bags.lead.append(int(counts[top]))
        bags.above.append(int(number[bag[parent[top]]]) if counts[top] else -1)
        bags.where.append(where[start[top] : start[top + 1]])
        bags.fill.append(_fill_inside(members.tolist(), filled) if suspect else [])
        count += len(bags.fill[-1])
        if count > MOST_FILLED:
            raise TooManyStates
    return bags


def _positions(rows: Rows, owner: Ints, parent: Ints) -> Ints:
    """For each entry of L(v) its position in L(p(v)) + {p(v)}, the latest first; CheckFailed unless (*) holds."""
    if not owner.size:
        return owner
    count = rows.start.size - 1
    keys = owner << SHIFT | count - rows.later
    own = rows.later == parent
    wanted = parent << SHIFT | count - rows.later
    found = np.minimum(np.searchsorted(keys, wanted), keys.size - 1)
    missing = np.flatnonzero((keys[found] != wanted) & ~own)
    if missing.size:
        raise CheckFailed(
            f"the proof lacks fill: the vertices at places {int(parent[missing[0]])} and {int(rows.later[missing[0]])} "
            f"of its order are later neighbours of the one at place {int(owner[missing[0]])}, but are not joined"
        )
    last = rows.start[parent + 1] - rows.start[parent]
    return np.where(own, last, found - rows.start[parent])


def _chains(counts: list[int], parent: list[int]) -> tuple[list[int], list[int], list[int]]:
    """First and last home of each bag, and the bag of each place."""
    bag = [-1] * len(counts)
    deep: list[int] = []
    top: list[int] = []
    for v, size in enumerate(counts):
        if bag[v] < 0:
            bag[v] = len(deep)
            deep.append(v)
            top.append(v)
        top[bag[v]] = v
        if size and bag[parent[v]] < 0 and counts[parent[v]] == size - 1:
            bag[parent[v]] = bag[v]
    return deep, top, bag


def _filled_rows(rows: Rows, owner: Ints) -> dict[int, set[int]]:
    """Later ends of filled pairs by their earlier end."""
    filled: dict[int, set[int]] = {}
    for one, other in zip(owner[rows.filled].tolist(), rows.later[rows.filled].tolist(), strict=True):
        filled.setdefault(one, set()).add(other)
    return filled


def _fill_inside(members: list[int], filled: dict[int, set[int]]) -> list[tuple[int, int]]:
    """Pairs of positions of a bag that are filled; later vertices have smaller positions."""
    position = {v: i for i, v in enumerate(members)}
    return [(position[other], i) for i, v in enumerate(members) for other in filled.get(v, set()) & position.keys()]
