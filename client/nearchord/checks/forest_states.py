"""Forests in a bag with fill: all sets of its vertices without a cycle, and what lies below and connects them.

A state is a set X of the bag without a cycle of the graph, and for each bag below one of its entries for the part of X
in the common adhesion A. An entry says which vertices of that part are connected by what lies below; edges inside A do
not count for that, because they are edges of this bag as well. Contract what each entry connects: the choice as a whole
has no cycle exactly if the edges inside X together with one star for each connected group have none. (Below, all is
without a cycle by itself, and what lies below meets X in A alone, so a cycle would run through two vertices of a group
and leave it between them.) What the bag sends up are the groups that its own adhesion falls into, again without edges
inside the adhesion.
"""

from __future__ import annotations

from typing import NamedTuple

from nearchord.checks.open_bag import OpenBag, bits, moved
from nearchord.checks.states import TooManyStates

Trees = tuple[int, ...]
Entry = tuple[int, Trees]
"""A set of an adhesion, and groups of two or more of its vertices that are connected below."""
Table = dict[Entry, int]
NOTHING: Entry = (0, ())


def best_by_trees(bag: OpenBag[Entry], most: int) -> tuple[Table, int]:
    """For each entry of the adhesion the most that bag and bags below come to; and the number of states.

    TooManyStates above `most`. Each set is met once, by ascending positions. What may still join a set is kept as bits:
    a vertex with two neighbours in one of its trees may not.
    """
    below = [(adhesion, _by_set(table)) for adhesion, table in bag.below]
    base = sum(table[NOTHING] for _, table in bag.below)
    near = [~apart & ~(1 << position) for position, apart in enumerate(bag.apart)]
    ties = bag.fill_in_adhesion
    table: Table = {}
    states = 0
    waiting = [_Grown(0, (1 << bag.size) - 1, (), (), (), (), base)]
    while waiting:
        state = waiting.pop()
        ways, tried = _ways(below, state)
        states += tried
        if states + len(waiting) > most:
            raise TooManyStates
        inside = state.chosen & bag.adhesion
        for (_, sent), value in ways.items():
            entry = inside, _groups(sent, inside) if ties else ()
            if value > table.get(entry, value - 1):
                table[entry] = value
        waiting.extend(_with(state, position, near[position], bag, ties) for position in bits(state.allowed))
    return table, states


class _Grown(NamedTuple):
    """A set and what may still join it; its trees, and the neighbours of each; its trees without the edges of the
    adhesion; its members as bits; what it is worth so far."""

    chosen: int
    allowed: int
    trees: Trees
    around: Trees
    sent: Trees
    members: tuple[int, ...]
    worth: int


def _with(state: _Grown, position: int, near: int, bag: OpenBag[Entry], ties: bool) -> _Grown:
    """The set with one vertex more, which is joined to at most one vertex of each tree."""
    bit = whole = 1 << position
    once, twice = near, 0
    trees, around = [], []
    for tree, neighbours in zip(state.trees, state.around, strict=True):
        if tree & near:
            whole |= tree
            twice |= once & neighbours
            once |= neighbours
        else:
            trees.append(tree)
            around.append(neighbours)
    sent = state.sent
    if ties:
        star = near & state.chosen if position >= bag.lead else 0
        sent = joined(sent, star, bit) or ()
    return _Grown(
        state.chosen | bit, state.allowed & ~twice & (-2 << position), (*trees, whole), (*around, once), sent,
        (*state.members, bit), state.worth + bag.gain(position, state.members),
    )  # fmt: skip


def joined(trees: Trees, star: int, fresh: int = 0) -> Trees | None:
    """Trees once the vertices of `star` are connected; None if two of them are in one tree. `fresh` is in none yet."""
    apart, whole = [], fresh
    for tree in trees:
        met = tree & star
        if not met:
            apart.append(tree)
        elif met & (met - 1):
            return None
        else:
            whole |= tree
    return (*apart, whole)


def _ways(
    below: list[tuple[int, dict[int, list[tuple[Trees, int]]]]], state: _Grown
) -> tuple[dict[tuple[Trees, Trees], int], int]:
    """The best of all combinations of entries below that close no cycle, by what is connected then; and how many."""
    ways, tried = {(state.trees, state.sent): state.worth}, 1
    for adhesion, table in below:
        if not adhesion & state.chosen:
            continue
        following: dict[tuple[Trees, Trees], int] = {}
        entries, least = table[state.chosen & adhesion], table[0][0][1]
        tried += len(ways) * len(entries) - 1
        for (whole, sent), value in ways.items():
            for groups, more in entries:
                pair = _with_groups(whole, sent, groups)
                if pair is not None:
                    following[pair] = max(following.get(pair, value + more - least), value + more - least)
        ways = following
    return ways, max(1, tried)


def _with_groups(whole: Trees, sent: Trees, groups: Trees) -> tuple[Trees, Trees] | None:
    """Trees once the vertices of each group are connected; None where that closes a cycle."""
    for group in groups:
        grown = joined(whole, group)
        if grown is None:
            return None
        whole = grown
        if sent:  # trees without some edges: no cycle here either; empty where they are of no account
            sent = joined(sent, group) or ()
    return whole, sent


def _groups(trees: Trees, inside: int) -> Trees:
    """The parts of trees in a set that have two vertices or more, ascending."""
    return tuple(sorted([tree & inside for tree in trees if (tree & inside) & ((tree & inside) - 1)]))


def _by_set(table: Table) -> dict[int, list[tuple[Trees, int]]]:
    entries: dict[int, list[tuple[Trees, int]]] = {}
    for (chosen, groups), value in table.items():
        entries.setdefault(chosen, []).append((groups, value))
    return entries


def renamed(table: Table, where: list[int]) -> Table:
    """The same table by positions of the bag above."""
    return {
        (moved(chosen, where), tuple(sorted([moved(group, where) for group in groups]))): value
        for (chosen, groups), value in table.items()
    }


def worth_of(table: Table, vertices: tuple[int, ...]) -> int:
    """The most for up to two vertices of an adhesion without fill: they are joined, so nothing below connects them."""
    return table[sum(1 << v for v in vertices), ()]
