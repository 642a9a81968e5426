"""Choosing in one bag, next to what is chosen in its adhesion."""

import numpy as np

from nearchord_solve.kernels.compiled import I32, I64, U8, U64, kernel
from nearchord_solve.kernels.words import full
from nearchord_solve.sweep.kernels.label_bags import Bag, most_chosen
from nearchord_solve.sweep.kernels.label_goals import NOTHING, Best, name_labels
from nearchord_solve.sweep.kernels.label_table import Table

ONE = np.uint64(1)


@kernel
def free_colour(taken: int) -> int:
    """The lowest colour, from 1 on, whose bit is not in ``taken``."""
    colour = 1
    while (taken >> colour) & 1:
        colour += 1
    return colour


@kernel
def _fixed_part(bag: Bag, colour: U8) -> tuple[I64, I32, U64]:
    """What is chosen in the adhesion: places, colours as named by first use, and all vertices that may be chosen."""
    fixed = np.empty(bag.lead, np.int64)
    label = np.empty(bag.lead, np.int32)
    candidates = full(bag.member.shape[0], bag.near.shape[1])
    count = int(np.int64(0))
    for j in range(bag.lead):
        if colour[bag.member[j]]:
            fixed[count] = j
            label[count] = colour[bag.member[j]]
            count += 1
        else:
            candidates[j >> 6] &= ~(ONE << np.uint64(j & 63))
    name = np.empty(count, np.int32)
    name_labels(label, count, name, np.empty(count, np.int32))
    return fixed[:count], name, candidates


@kernel
def choose_few(bag: Bag, fixed: I64, best: Best) -> None:
    """The best state of at most two vertices with the plain adhesion part ``fixed``, into ``best``."""
    count = fixed.shape[0]
    best.value[0] = 0
    best.size[0] = count
    for i in range(count):
        best.state[i] = fixed[i]
        best.label[i] = i
    for j in range(bag.lead, bag.member.shape[0]):
        if count > 1:
            break
        worth = bag.gain[j]
        if count == 1:
            worth += bag.pair[j, fixed[0]]
        if worth > best.value[0]:
            best.value[0] = worth
            best.size[0] = count + 1
            best.state[count] = j
            best.label[count] = count
        for i in range(bag.lead, j):
            if count == 0 and bag.gain[i] + worth + bag.pair[j, i] > best.value[0]:
                best.value[0] = bag.gain[i] + worth + bag.pair[j, i]
                best.size[0] = 2
                best.state[0], best.state[1] = i, j
                best.label[0], best.label[1] = 0, 1


@kernel
def start_choice(bag: Bag, table: Table, colours: int, colour: U8, entry: int) -> tuple[Best, U64]:
    """What is looked for in a bag, plain states of at most two vertices looked at; and the vertices to look among.

    ``colour`` uint8[n]: what is chosen so far; ``entry``: the one of the table that has to be met, -1 if none.
    """
    fixed, name, candidates = _fixed_part(bag, colour)
    count = fixed.shape[0]
    if colours == 0:
        for i in range(count):
            name[i] = table.pool[table.begin[entry] + count + i] if entry >= 0 else i
    room = most_chosen(bag, colours) + 1
    value = np.full(1, NOTHING, np.int64)
    picks = np.full(bag.child.shape[0], -1, np.int64)
    best = Best(name, value, np.zeros(1, np.int64), np.empty(room, np.int64), np.empty(room, np.int32), picks)
    if bag.closed and (count < 2 or (count == 2 and name[1] == 1)):
        choose_few(bag, fixed, best)
    return best, candidates


@kernel
def apply_best(bag: Bag, best: Best, named: bool, colour: U8, pick: I32) -> None:
    """Choose the homes of a state; with colours, classes keep those that they have in the adhesion."""
    given = np.zeros(bag.member.shape[0] + 1, np.int64)
    taken = 0
    for i in range(best.size[0]):
        v = bag.member[best.state[i]]
        if colour[v] and named:
            given[best.label[i]] = colour[v]
            taken |= 1 << colour[v]
    for i in range(best.size[0]):
        v = bag.member[best.state[i]]
        if not named:
            colour[v] = 1
        elif colour[v] == 0:
            if given[best.label[i]] == 0:
                given[best.label[i]] = free_colour(taken)
                taken |= 1 << given[best.label[i]]
            colour[v] = given[best.label[i]]
    for c in range(bag.child.shape[0]):
        pick[bag.child[c]] = best.picks[c]
