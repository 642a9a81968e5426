"""Prices of vertices and of conflicts. Whether they are right takes a new computation; here they are held against what
follows from the definition alone.

The side of a vertex that the best choice is on costs 0. In all questions that have prices, leaving a vertex out leaves
a choice feasible, so that without v no more than its weight is lost, and with v no more than its neighbours in the
choice. Of independent sets: if the conflict of u and v is dropped and both are chosen, leaving out either makes the
choice feasible again, so that no more than the lighter of those that may go is gained.
"""

from __future__ import annotations

import numpy as np

from nearchord.answer import Answer
from nearchord.checks.choice import chosen_mask
from nearchord.checks.columns import numbers_of
from nearchord.checks.edges import Ints, Mask
from nearchord.checks.pins import pins_of, weights_of
from nearchord.errors import CheckFailed
from nearchord.graph import Graph
from nearchord.question import Choice, IndependentSet

NEVER = -1
"""The price of what is impossible."""


def check_prices(graph: Graph, answer: Answer, question: Choice) -> str:
    """Words for prices of vertices that the definition does not contradict; CheckFailed for others. O(n + m)."""
    chosen, pins, weights = chosen_mask(graph, answer.chosen), pins_of(graph, question), weights_of(graph)
    price_in, price_out = (numbers_of(answer, name, graph.n) for name in ("price_in", "price_out"))
    _refuse(graph, (price_in < NEVER) | (price_out < NEVER), "has a price below 0")
    _refuse(graph, np.where(chosen, price_in, price_out) != 0, "is where the choice has it, but not at the price 0")
    _refuse(graph, pins.must & (price_out != NEVER), "must be chosen, but has a price out")
    _refuse(graph, pins.never & (price_in != NEVER), "must not be chosen, but has a price in")
    _refuse(graph, ~pins.must & (price_out == NEVER), "may be left out, but has no price out")
    _refuse(graph, ~pins.must & (price_out > weights), "costs more to leave out than its weight")
    _check_taking_in(graph, question, price_in, chosen)
    return "no price contradicts the choice: none is below 0 or above what a change by hand costs"


def _check_taking_in(graph: Graph, question: Choice, price_in: Ints, chosen: Mask) -> None:
    """A vertex without neighbours that must be chosen can come in for its chosen neighbours; of independent sets, none
    other can."""
    (u, v), pins, weights = graph.edges(), pins_of(graph, question), weights_of(graph)
    beside = np.zeros(graph.n, np.bool_)
    beside[v[pins.must[u]]] = True
    beside[u[pins.must[v]]] = True
    if isinstance(question, IndependentSet):
        _refuse(graph, beside & (price_in != NEVER), "cannot be chosen beside what must be, but has a price in")
    open_ones = ~beside & ~pins.never
    _refuse(graph, open_ones & (price_in == NEVER), "may be chosen, but has no price in")
    displaced = np.zeros(graph.n, np.int64)
    np.add.at(displaced, u[chosen[v]], weights[v[chosen[v]]])
    np.add.at(displaced, v[chosen[u]], weights[u[chosen[u]]])
    costly = price_in > np.maximum(0, displaced - weights)
    _refuse(graph, open_ones & costly, "costs more to take in than the neighbours that would have to go")


def _refuse(graph: Graph, wrong: Mask, what: str) -> None:
    if wrong.any():
        raise CheckFailed(f"vertex {graph.label(int(wrong.argmax()))} {what}")


def check_conflict_prices(graph: Graph, answer: Answer, question: IndependentSet) -> str:
    """Words for prices of conflicts that the definition does not contradict; CheckFailed for others. O(n + m)."""
    price, pins, weights = numbers_of(answer, "conflict_price", graph.m), pins_of(graph, question), weights_of(graph)
    u, v = graph.edges()
    free = np.iinfo(np.int64).max
    most = np.minimum(np.where(pins.must[u], free, weights[u]), np.where(pins.must[v], free, weights[v]))
    most[pins.never[u] | pins.never[v]] = 0
    wrong = np.flatnonzero((price < 0) | (price > most))
    if wrong.size:
        edge = int(wrong[0])
        pair = f"{{{graph.label(int(u[edge]))}, {graph.label(int(v[edge]))}}}"
        raise CheckFailed(f"the price {int(price[edge])} of the conflict {pair} is not from 0 to {int(most[edge])}")
    return "no price of a conflict is below 0 or above the lighter end"
