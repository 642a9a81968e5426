"""Colours in a bag with fill: all ways to split a part of it into at most q independent sets of the graph.

A state is such a split. Which colour a class has does not matter, so a split is a set of classes; it goes together with
the split of a bag below that has the same classes in the common adhesion, and glued together they are independent,
because whatever is below meets the bag in the adhesion alone. What a state is worth is what its vertices are worth here
and what the best such splits below are worth.
"""

from __future__ import annotations

from nearchord.checks.open_bag import OpenBag, bits, moved
from nearchord.checks.states import TooManyStates

Split = tuple[int, ...]
Table = dict[Split, int]
NOTHING: Split = ()


def best_by_split(colours: int, bag: OpenBag[Split], most: int) -> tuple[Table, int]:
    """For each split of the adhesion the most that bag and bags below come to; and the number of states.

    TooManyStates above `most`. Each split is met once: vertices join by ascending position, the lowest of each class
    opens it.
    """
    adhesion = bag.adhesion
    base = sum(table[NOTHING] for _, table in bag.below)
    table: Table = {}
    states = 0
    everything = (1 << bag.size) - 1
    # classes, what may still join each, later positions, members as bits, worth so far
    waiting: list[tuple[Split, Split, int, tuple[int, ...], int]] = [((), (), everything, (), base)]
    while waiting:
        classes, allowed, later, members, worth = waiting.pop()
        states += 1
        if states + len(waiting) > most:
            raise TooManyStates
        key = part(classes, adhesion)
        value = worth + _from_below(bag, classes, sum(members)) if bag.below else worth
        if value > table.get(key, value - 1):
            table[key] = value
        choices = list(enumerate(allowed))
        if len(classes) < colours:
            choices.append((len(classes), later))
        for kind, mask in choices:
            for position in bits(mask):
                bit, after = 1 << position, -2 << position
                joined = [c & after for c in allowed]
                own = bag.apart[position] & after
                if kind < len(classes):
                    joined[kind] &= own
                    grown = (*classes[:kind], classes[kind] | bit, *classes[kind + 1 :])
                else:
                    joined.append(own)
                    grown = (*classes, bit)
                more = worth + bag.gain(position, members)
                waiting.append((grown, tuple(joined), later & after, (*members, bit), more))
    return table, states


def part(classes: Split, where: int) -> Split:
    """The classes of a split in a part of the bag."""
    return tuple(sorted([c & where for c in classes if c & where]))


def _from_below(bag: OpenBag[Split], classes: Split, chosen: int) -> int:
    """How much the state changes what comes from below, against choosing nothing."""
    change = 0
    for adhesion, table in bag.below:
        if adhesion & chosen:
            change += table[part(classes, adhesion)] - table[NOTHING]
    return change


def renamed(table: Table, where: list[int]) -> Table:
    """The same table by positions of the bag above."""
    return {tuple(sorted([moved(c, where) for c in classes])): value for classes, value in table.items()}


def worth_of(table: Table, vertices: tuple[int, ...]) -> int:
    """The most for vertices of an adhesion without fill: each is a class of its own."""
    return table[tuple(sorted([1 << v for v in vertices]))]
