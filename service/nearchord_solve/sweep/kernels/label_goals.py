"""What is done with each state of a bag.

COLLECT: offer it to the bag above.  CHOOSE: keep the best.  MEASURE: collect, but only what plain parts are worth.
BELIEVE: tell everything that it touches what it is worth in all, with the best of what lies outside.
"""

from typing import NamedTuple

import numpy as np

from nearchord_solve.kernels.compiled import I32, I64, U8, kernel, ones
from nearchord_solve.kernels.words import holds
from nearchord_solve.sweep.kernels.label_bags import Bag, own_entry
from nearchord_solve.sweep.kernels.label_search import Search
from nearchord_solve.sweep.kernels.label_table import Table, find, labelled, record

ONE = np.uint64(1)
COLLECT, CHOOSE, BELIEVE, MEASURE = 0, 1, 2, 3
NOTHING = -(2**62)  # less than any value of a choice


class Best(NamedTuple):
    """The best state with a given part in the adhesion."""

    wanted: I32  # [lead] labels of the adhesion's chosen vertices, as named by the order of their first use
    value: I64  # [1]
    size: I64  # [1] vertices of the state
    state: I64  # places in the bag
    label: I32
    picks: I64  # [C] the entry taken of each bag below, -1 for what needs none


class Belief(NamedTuple):
    """What is worth how much in all; totals are those of the whole graph."""

    entry: I64  # [E] best total with an entry; what lies outside its bag adds to it once the bag is visited
    sets: I64  # [D] the same for sets of adhesions without fill
    few_ptr: I64  # [B+1] the plain parts of the adhesion of each bag, see few_place()
    few: I64  # best total with each
    chosen: I64  # [n] best total with a vertex
    left: I64  # [n] best total without it, for vertices in ``kept``
    kept: U8  # [n] the best choice


class Goal(NamedTuple):
    """What to do, and the arrays for it."""

    mode: int
    few: I64  # [lead + 1, lead + 1] by plain parts: the best collected, or what lies outside is worth
    best: Best
    belief: Belief


@kernel
def few_place(high: int, low: int) -> int:
    """Where plain part (high, low) stands (see :func:`.label_bags.collect_few`): behind all with lower ``high``."""
    return 1 + high * (high - 1) // 2 + low if high > 0 else 0


@kernel
def no_best() -> Best:
    """Nothing to compare with."""
    nothing = np.empty(0, np.int32)
    one = np.empty(1, np.int64)
    return Best(nothing, one, one, one, nothing, one)


@kernel
def lead_of(bag: Bag, search: Search, size: int) -> int:
    """How many vertices of a state lie in the adhesion."""
    lead = int(np.int64(0))
    while lead < size and search.chosen[lead] < bag.lead:
        lead += 1
    return lead


@kernel
def name_labels(label: I32, count: int, name: I32, names: I32) -> None:
    """Name labels int32[count] in the order of their first use.  ``name`` is overwritten, ``names`` is scratch."""
    used = 0
    for i in range(count):
        found = -1
        for k in range(used):
            if names[k] == label[i]:
                found = k
        if found < 0:
            names[used] = label[i]
            found = used
            used += 1
        name[i] = found


@kernel
def reach(
    bag: Bag, table: Table, search: Search, goal: Goal, size: int, value: int, name: I32, picks: I64, key: I32
) -> Table:
    """A state was completed: do what the goal says.

    ``name`` int32[>= lead]: labels that its adhesion part is sent under; ``picks`` int64[C]; ``key`` is scratch.
    """
    lead = lead_of(bag, search, size)
    if goal.mode == CHOOSE:
        _compare(search, goal.best, size, lead, value, name, picks)
        return table
    plain = bag.closed and (lead < 2 or (lead == 2 and name[0] != name[1]))
    high = search.chosen[lead - 1] + 1 if lead > 0 else 0
    low = search.chosen[lead - 2] + 1 if lead > 1 else 0
    if plain and goal.mode != BELIEVE:
        goal.few[high, low] = max(goal.few[high, low], value)
        return table
    if plain:
        _tell(bag, search, goal.belief, size, goal.few[high, low] + value, picks)
        return table
    if goal.mode == MEASURE:
        return table
    if bag.first >= 0:
        at = own_entry(bag, search.chosen, lead)
        if goal.mode == COLLECT:
            table.sets[at] = max(table.sets[at], value)
        else:
            _tell(bag, search, goal.belief, size, goal.belief.sets[at] + value, picks)
        return table
    for i in range(lead):
        key[i] = bag.member[search.chosen[i]]
    if goal.mode == COLLECT:
        return record(table, bag.number, key, name, lead, value)
    entry = labelled(table, find(table, bag.number, key, lead), name, lead)
    _tell(bag, search, goal.belief, size, goal.belief.entry[entry] + value, picks)
    return table


@kernel
def _compare(search: Search, best: Best, size: int, lead: int, value: int, name: I32, picks: I64) -> None:
    """Keep a state if it has the wanted adhesion part and is better than what is kept."""
    if lead != best.wanted.shape[0] or value <= best.value[0]:
        return
    for i in range(lead):
        if name[i] != best.wanted[i]:
            return
    best.value[0] = value
    best.size[0] = size
    for i in range(size):
        best.state[i] = search.chosen[i]
        best.label[i] = search.label[i]
    for c in range(picks.shape[0]):
        best.picks[c] = picks[c]


@kernel
def _plain_part(bag: Bag, search: Search, size: int, c: int) -> tuple[int, int]:
    """The part of a state in the adhesion of bag ``c`` below, of at most two vertices, as in few_place()."""
    high = int(np.int64(0))
    low = int(np.int64(0))
    for i in range(size):
        j = search.chosen[i]
        if holds(bag.inside[c], j):
            low = high
            high = ones(bag.inside[c, j >> 6] & ((ONE << np.uint64(j & 63)) - ONE)) + 1
            for w in range(j >> 6):
                high += ones(bag.inside[c, w])
    return high, low


@kernel
def _tell(bag: Bag, search: Search, belief: Belief, size: int, total: int, picks: I64) -> None:
    """Tell a total to the vertices of a state, to those that it leaves out, and to the bags below."""
    for i in range(size):
        v = bag.member[search.chosen[i]]
        belief.chosen[v] = max(belief.chosen[v], total)
    for j in range(bag.lead, bag.member.shape[0]):
        if belief.kept[bag.member[j]] and not holds(search.set_[size], j):
            belief.left[bag.member[j]] = max(belief.left[bag.member[j]], total)
    for c in range(picks.shape[0]):
        if bag.below[c] >= 0:
            belief.sets[picks[c]] = max(belief.sets[picks[c]], total)
            continue
        if picks[c] >= 0:
            belief.entry[picks[c]] = max(belief.entry[picks[c]], total)
            continue
        high, low = _plain_part(bag, search, size, c)
        at = belief.few_ptr[bag.child[c]] + few_place(high, low)
        belief.few[at] = max(belief.few[at], total)
