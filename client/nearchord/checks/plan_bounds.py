"""Why no plan is shorter: a clique, whose vertices are served one after the other, or prices.

Let y >= 0 be prices of the vertices under which no independent set is worth more than 1. A plan serves one independent
set at a time, so what it serves is worth at most its length; it serves everybody, so it is at least as long as the sum
of price times demand. In whole units that is rounded up.
"""

from __future__ import annotations

from fractions import Fraction
from math import ceil

import numpy as np

from nearchord.answer import Answer
from nearchord.checks.columns import column_of
from nearchord.checks.edges import Edges, Ints
from nearchord.checks.splitting import Splitting, has_splitting
from nearchord.errors import CheckFailed
from nearchord.graph import Graph


def check_plan_bound(graph: Graph, answer: Answer, demand: Ints, whole: bool) -> str | None:
    """Words for a bound that holds: plain, or by the proof in the answer; None where that has none.

    `whole`: plans are in whole units. CheckFailed where the proof is wrong or comes to less. Time as the checks of
    independent sets take.
    """
    bound = answer.bound
    assert bound is not None, "callers refuse its absence"
    if bound <= int(demand.max(initial=0)):
        return f"the bound {bound}: one vertex alone demands as much"
    if "proof_clique" in answer.columns:
        return _check_clique(graph, answer, demand, bound)
    if "bottleneck_numerator" in answer.columns and has_splitting(answer.columns):
        return _check_prices(graph, answer, demand, bound, whole)
    return None


def _check_clique(graph: Graph, answer: Answer, demand: Ints, bound: int | Fraction) -> str:
    clique = column_of(answer, "proof_clique", np.uint32)
    if clique.size and int(clique.max()) >= graph.n:
        raise CheckFailed(f"the clique of the proof has vertex {int(clique.max())} of {graph.n} vertices")
    if bool((np.diff(clique) <= 0).any()):
        raise CheckFailed("the clique of the proof does not ascend")
    inside = np.zeros(graph.n, np.bool_)
    inside[clique] = True
    u, v = graph.edges()
    if int((inside[u] & inside[v]).sum()) != clique.size * (clique.size - 1) // 2:
        raise CheckFailed(f"the {clique.size} vertices of the proof are not pairwise adjacent")
    worth = sum(demand[clique].tolist())
    if worth < bound:
        raise CheckFailed(f"the bound is given as {bound}, but the clique of the proof demands {worth}")
    return f"the bound {bound}: {clique.size} pairwise adjacent vertices demand {worth}"


def _check_prices(graph: Graph, answer: Answer, demand: Ints, bound: int | Fraction, whole: bool) -> str:
    numerator = column_of(answer, "bottleneck_numerator", np.int64)
    (denominator,) = _single(column_of(answer, "bottleneck_denominator", np.int64))
    if numerator.size != graph.n or bool((numerator < 0).any()):
        raise CheckFailed(f"there is not one bottleneck price of at least 0 for each of {graph.n} vertices")
    proof = Splitting(graph.n, answer.columns)
    u, v = graph.edges()
    most = proof.bound(Edges(graph.n, u, v), numerator)
    if most > denominator:
        raise CheckFailed(f"an independent set may be worth {Fraction(most, denominator)} of the bottleneck prices")
    worth = Fraction(sum(y * d for y, d in zip(numerator.tolist(), demand.tolist(), strict=True) if y), denominator)
    if (ceil(worth) if whole else worth) < bound:
        raise CheckFailed(f"the bound is given as {bound}, but the demands are worth {worth}")
    return f"the bound {bound}: the demands are worth {worth}, no independent set more than 1; {proof.summary}"


def _single(column: Ints) -> list[int]:
    if column.size != 1 or int(column[0]) < 1:
        raise CheckFailed("the bottleneck prices do not have one denominator above 0")
    return [int(column[0])]
