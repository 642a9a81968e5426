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

from nearchord.checks.open_bag import OpenBag, bits, moved
from nearchord.checks.states import TooManyStates

Trees = tuple[int, ...]
Entry = tuple[int, Trees]
"""A set of an adhesion, and groups of two or more of its vertices that are connected below."""
Table = dict[Entry, int]
NOTHING: Entry = (0, ())


def best_by_trees(bag: OpenBag[Entry], most: int) -> tuple[Table, int]:
    """For each entry of the adhesion the most that bag and bags below come to; and the number of states.

    TooManyStates above `most`. Each set is met once, by ascending positions.
    """
    below = [(adhesion, _by_set(table)) for adhesion, table in bag.below]
    base = sum(table[NOTHING] for _, table in bag.below)
    table: Table = {}
    states = 0
    # set, what may still join it, its trees, its trees without the edges of the adhesion, members as bits, worth so far
    waiting: list[tuple[int, int, Trees, Trees, tuple[int, ...], int]] = [(0, (1 << bag.size) - 1, (), (), (), base)]
    while waiting:
        chosen, allowed, trees, sent, members, worth = waiting.pop()
        ways, tried = _ways(below, chosen, trees, sent, worth)
        states += tried
        if states > most:
            raise TooManyStates
        inside = chosen & bag.adhesion
        for (_, tied), value in ways.items():
            entry = inside, _groups(tied, inside)
            if value > table.get(entry, value - 1):
                table[entry] = value
        grown = []
        for position in bits(allowed):
            bit = 1 << position
            met = chosen & ~bag.apart[position]
            one = joined(trees, met | bit, bit)
            if one is None:
                allowed ^= bit
                continue
            links = joined(sent, (met if position >= bag.lead else 0) | bit, bit)
            assert links is not None, "fewer edges close no cycle"
            grown.append((position, bit, one, links))
        for position, bit, one, links in grown:
            more = worth + bag.gain(position, members)
            waiting.append((chosen | bit, allowed & (-2 << position), one, links, (*members, bit), more))
    return table, states


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
    below: list[tuple[int, dict[int, list[tuple[Trees, int]]]]], chosen: int, trees: Trees, sent: Trees, worth: int
) -> tuple[dict[tuple[Trees, Trees], int], int]:
    """The best of all combinations of entries below that close no cycle, by what is connected then; and how many."""
    ways, tried = {(trees, sent): worth}, 1
    for adhesion, table in below:
        if not adhesion & chosen:
            continue
        following: dict[tuple[Trees, Trees], int] = {}
        least = table[0][0][1]
        tried += len(ways) * len(table[chosen & adhesion]) - 1
        for (whole, tied), value in ways.items():
            for groups, more in table[chosen & adhesion]:
                pair = _with_groups(whole, tied, groups)
                if pair is not None:
                    following[pair] = max(following.get(pair, value + more - least), value + more - least)
        ways = following
    return ways, max(1, tried)


def _with_groups(whole: Trees, tied: Trees, groups: Trees) -> tuple[Trees, Trees] | None:
    for group in groups:
        grown = joined(whole, group)
        if grown is None:
            return None
        whole, tied = grown, joined(tied, group) or ()
    return whole, tied


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
