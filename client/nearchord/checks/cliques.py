"""Bounds on the heaviest clique, from an elimination order.

Each clique of G lies in one of the sets {v} + L(v), L(v) the neighbours in G that come after v in the order: take its
first vertex for v. So no clique outweighs the heaviest among those inside these sets, whatever the order is. Most sets
weigh no more than the bound as a whole; in each other one all cliques are tried that may be heavier.

A clique has at most one vertex of each independent set, so it weighs at most the sum of the largest weights of
independent sets that cover it.
"""

from __future__ import annotations

import numpy as np

from nearchord.checks.edges import Ints
from nearchord.checks.elimination import Rows
from nearchord.checks.open_bag import bits
from nearchord.checks.states import TooManyStates

MOST_STATES = 2_000_000
MOST_LOOKS = 50_000_000


def heavier_clique(rows: Rows, weights: Ints, bound: int) -> tuple[list[int] | None, int]:
    """A clique that weighs more than `bound`, as places, or None where there is none; and how often a vertex was tried.

    `rows` without fill, `weights` int64 by place. O(n + m) and the search; TooManyStates above MOST_STATES, or where it
    takes more than MOST_LOOKS at edges to see who is joined to whom.
    """
    running = np.concatenate((np.zeros(1, np.int64), np.cumsum(weights[rows.later])))  # may wrap, differences are right
    whole = weights + running[rows.start[1:]] - running[rows.start[:-1]]
    counts = np.diff(rows.start)
    states = looks = 0
    for v in np.flatnonzero(whole > bound).tolist():
        others = _row(rows, v)
        others = others[np.argsort(-weights[others], kind="stable")]
        looks += int(counts[others].sum()) + others.size
        if looks > MOST_LOOKS:
            raise TooManyStates
        near = _near(rows, others)
        target = bound - int(weights[v])
        found, more = _heavier_inside(near, weights[others].tolist(), target, MOST_STATES - states)
        states += more
        if found is not None:
            return [v, *others[list(bits(found))].tolist()], states
    return None, states


def _row(rows: Rows, v: int) -> Ints:
    return rows.later[rows.start[v] : rows.start[v + 1]]


def _near(rows: Rows, members: Ints) -> list[int]:
    """By position in `members`: positions of its neighbours, as bits."""
    position = {v: i for i, v in enumerate(members.tolist())}
    near = [0] * members.size
    for v, i in position.items():
        for j in (position[u] for u in _row(rows, v).tolist() if u in position):
            near[i] |= 1 << j
            near[j] |= 1 << i
    return near


def _heavier_inside(near: list[int], weights: list[int], bound: int, most: int) -> tuple[int | None, int]:
    """A clique heavier than `bound` (any number), as bits, or None; and how often a vertex was tried."""
    waiting = [(0, (1 << len(near)) - 1, 0)]
    states = 0
    while waiting:
        chosen, candidates, weight = waiting.pop()
        if weight > bound:
            return chosen, states
        reaches = _reaches(near, weights, candidates, weight)
        states += len(reaches)
        if states > most:
            raise TooManyStates
        for position, reach in reversed(reaches):
            if reach <= bound:
                break  # so are all before it: what is left reaches no further
            waiting.append((chosen | 1 << position, candidates & near[position], weight + weights[position]))
            candidates ^= 1 << position
    return None, states


def _reaches(near: list[int], weights: list[int], candidates: int, weight: int) -> list[tuple[int, int]]:
    """Candidates in an order, each with the most that `weight` and a clique of it and those before it come to.

    They fall into independent sets by greed, one set after the other.
    """
    reaches: list[tuple[int, int]] = []
    while candidates:
        fitting, heaviest = candidates, 0
        while fitting:
            lowest = fitting & -fitting
            position = lowest.bit_length() - 1
            candidates ^= lowest
            fitting &= ~(near[position] | lowest)
            heaviest = max(heaviest, weights[position])
            reaches.append((position, weight + heaviest))
        weight += heaviest
    return reaches
