"""Bounds on the heaviest choice that falls into q independent sets, or has no cycle, from an elimination order.

The dynamic program over the bags of `elimination`: each bag gives the best for every choice in its adhesion, from what
the bags below gave. It is exact. In bags without fill the choices in an adhesion are at most q vertices (two, for
forests) and `worths` does without trying them one by one; in bags with fill all states are tried.

*Pins.* What may not be chosen leaves the graph. What must be chosen weighs E >= 0 more; every choice with all of it
then weighs E more for each, so the optimum of the heavier weights less E for each is a bound for all these choices,
whatever E is. With E above the sum of all weights it is the optimum, or below 0 where there is no such choice.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, field
from functools import partial
from itertools import combinations
from typing import Generic

from nearchord.canonical import weight_sum
from nearchord.checks import colour_states, forest_states, worths
from nearchord.checks.edges import Ints
from nearchord.checks.elimination import Bags
from nearchord.checks.open_bag import Key, OpenBag
from nearchord.checks.states import TooManyStates

MOST_STATES = 2_000_000
MOST_CELLS = 10**9
MOST_CELLS_OF_BAG = 1 << 24
MOST_CELLS_KEPT = 1 << 26


@dataclass(frozen=True)
class Rules(Generic[Key]):
    """What tells colours and forests apart: `q`, the most vertices of a clique, and how a bag with fill is settled."""

    q: int
    best: Callable[[OpenBag[Key], int], tuple[dict[Key, int], int]]
    renamed: Callable[[dict[Key, int], list[int]], dict[Key, int]]
    worth_of: Callable[[dict[Key, int], tuple[int, ...]], int]


def colour_rules(colours: int) -> Rules[colour_states.Split]:
    """Rules for q classes, q from 2."""
    best = partial(colour_states.best_by_split, colours)
    return Rules(colours, best, colour_states.renamed, colour_states.worth_of)


FORESTS = Rules(2, forest_states.best_by_trees, forest_states.renamed, forest_states.worth_of)


def extra_weight(weights: Ints, must: int, q: int) -> int:
    """E: more than all weights together; 0 without pins.

    Worths of q vertices are sums of 2^(q - 1) values less as many; TooManyStates where int64 would not hold them.
    """
    total = weight_sum(weights)
    extra = total + 1 if must else 0
    if total + extra * must > 2**63 - 1 >> (q - 1):
        raise TooManyStates("its weights are larger than this client computes with")
    return extra


@dataclass
class Program(Generic[Key]):
    """One run over the bags; `weights` int64 by place; `states` counts those tried in bags with fill."""

    bags: Bags
    weights: Ints
    rules: Rules[Key]
    states: int = 0
    _worths: dict[int, Ints] = field(default_factory=dict)
    _held: int = 0
    _tables: dict[int, list[tuple[int, dict[Key, int]]]] = field(default_factory=dict)

    def best(self) -> int:
        """The weight of the heaviest choice; TooManyStates above the limits of this module."""
        q = self.rules.q
        cells = [(len(members) + 1) ** q for members in self.bags.members]
        if sum(cells) > MOST_CELLS or max(cells, default=0) > MOST_CELLS_OF_BAG:
            raise TooManyStates
        total = 0
        for b, members in enumerate(self.bags.members):
            lead, own = self.bags.lead[b], self._opened_worths(b)
            for position, weight in enumerate(self.weights[members[lead:]].tolist(), lead):
                worths.weigh(own, position, weight)
            sent = self._settle_open(b, own) if self.bags.fill[b] else _settle_plain(own, lead)
            if self.bags.above[b] < 0:
                total += int(sent[(0,) * q])
            else:
                self._send(b, sent)
        return total

    def _opened_worths(self, b: int) -> Ints:
        """What came from below, which is no longer kept."""
        own = self._worths.pop(b, None)
        if own is None:
            return worths.no_worths(len(self.bags.members[b]), self.rules.q)
        self._held -= own.size
        return own

    def _send(self, b: int, sent: Ints) -> None:
        above = self.bags.above[b]
        there = self._worths.get(above)
        if there is None:
            self._held += (len(self.bags.members[above]) + 1) ** self.rules.q
            if self._held > MOST_CELLS_KEPT:
                raise TooManyStates
            there = self._worths[above] = worths.no_worths(len(self.bags.members[above]), self.rules.q)
        worths.add_from_below(there, sent, self.bags.where[b])

    def _settle_open(self, b: int, own: Ints) -> Ints:
        """Try all states; what they come to goes up as worths if the adhesion holds no fill, else as a table."""
        lead, where = self.bags.lead[b], self.bags.where[b].tolist()
        apart = _apart(len(self.bags.members[b]), self.bags.fill[b])
        rows = worths.rows_of_worths(own)
        bag = OpenBag(len(rows), lead, apart, rows, self.rules.q, self._tables.pop(b, []))
        table, states = self.rules.best(bag, MOST_STATES - self.states)
        self.states += states
        sent = own[(slice(0, lead + 1),) * self.rules.q]
        if bag.fill_in_adhesion:
            adhesion = sum(1 << position for position in where)
            self._tables.setdefault(self.bags.above[b], []).append((adhesion, self.rules.renamed(table, where)))
            return sent
        return sent + self._as_worths(table, lead)

    def _as_worths(self, table: dict[Key, int], lead: int) -> Ints:
        values = worths.no_worths(lead, self.rules.q)
        for size in range(min(self.rules.q, lead) + 1):
            for some in combinations(range(lead), size):
                values[(0,) * (self.rules.q - size) + tuple(v + 1 for v in some)] = self.rules.worth_of(table, some)
        worths.spread(values)
        worths.to_worths(values)
        return values


def _settle_plain(own: Ints, lead: int) -> Ints:
    worths.to_values(own)
    sent = worths.eliminate(own, lead)
    worths.to_worths(sent)
    return sent


def _apart(size: int, fill: list[tuple[int, int]]) -> list[int]:
    """By position, what is not joined to it in the graph: only filled pairs of a bag are not."""
    apart = [0] * size
    for i, j in fill:
        apart[i] |= 1 << j
        apart[j] |= 1 << i
    return apart
