"""Vertices that must be chosen, but cannot be together: they close a cycle, or need more colours than there are."""

from __future__ import annotations

import numpy as np

from nearchord.checks.classes_of_choice import check_forest
from nearchord.checks.confirmed import Confirmed
from nearchord.checks.edges import Mask
from nearchord.errors import CheckFailed
from nearchord.graph import Graph
from nearchord.question import ColourableSubgraph, InducedForest

MOST_STEPS = 1_000_000
FALSE = "the verdict is INFEASIBLE, but the pins do not contradict each other"


def check_must(graph: Graph, question: ColourableSubgraph | InducedForest, must: Mask) -> Confirmed:
    """Confirms that no choice has all `must` vertices; CheckFailed if these are one.

    O(n + m) for forests and up to two colours; with more a search, which is left open above MOST_STEPS.
    """
    if isinstance(question, InducedForest):
        try:
            check_forest(graph, must)
        except CheckFailed:
            return Confirmed(("the pins contradict each other: the vertices that must be chosen close a cycle",), ())
        raise CheckFailed(FALSE)
    colourable = _colourable(_neighbours(graph, must), question.colours)
    if colourable:
        raise CheckFailed(FALSE)
    what = f"the vertices that must be chosen need more than {question.colours} colours"
    if colourable is None:
        return Confirmed((), (f"that {what}: finding out would take too long",))
    return Confirmed((f"the pins contradict each other: {what}",), ())


def _neighbours(graph: Graph, inside: Mask) -> list[list[int]]:
    """Neighbours within a set, whose vertices are numbered from 0."""
    number = np.cumsum(inside) - 1
    u, v = graph.edges()
    kept = inside[u] & inside[v]
    near: list[list[int]] = [[] for _ in range(int(inside.sum()))]
    for a, b in zip(number[u[kept]].tolist(), number[v[kept]].tolist(), strict=True):
        near[a].append(b)
        near[b].append(a)
    return near


def _colourable(near: list[list[int]], colours: int) -> bool | None:
    """Whether so many colours suffice; None where that takes too long. One component after the other."""
    steps = MOST_STEPS
    reached = [False] * len(near)
    for start in range(len(near)):
        if reached[start]:
            continue
        found, used = _colours_of(near, _walk(near, start, reached), colours, steps)
        if not found:
            return found
        steps -= used
    return True


def _walk(near: list[list[int]], start: int, reached: list[bool]) -> list[int]:
    """A component in an order in which each vertex but the first has a neighbour before it."""
    order = [start]
    reached[start] = True
    for v in order:
        for u in near[v]:
            if not reached[u]:
                reached[u] = True
                order.append(u)
    return order


def _colours_of(near: list[list[int]], order: list[int], colours: int, most: int) -> tuple[bool | None, int]:
    """Whether a component can be coloured, by trying colours along the order; and the steps taken.

    A colour that nobody has is tried once only. With two colours each vertex after the first has no choice.
    """
    given: dict[int, int] = {}
    tried = [0] * len(order)
    highest = [0] * (len(order) + 1)
    place = steps = 0
    while 0 <= place < len(order):
        steps += 1
        if steps > most:
            return None, steps
        v = order[place]
        given.pop(v, None)
        taken = {given[u] for u in near[v] if u in given}
        colour = tried[place] + 1
        while colour in taken:
            colour += 1
        if colour > min(colours, highest[place] + 1):
            tried[place] = 0
            place -= 1
            continue
        tried[place] = given[v] = colour
        highest[place + 1] = max(highest[place], colour)
        place += 1
    return place == len(order), steps
