"""Oracles of plans that serve everybody, from the definitions, and the checker as a judge of outcomes."""

from __future__ import annotations

from fractions import Fraction
from functools import cache
from itertools import combinations

import nearchord
import nearchord_solve as ns
import numpy as np
from nearchord.checks.confirmed import Confirmed
from nearchord.checks.plan import check_plan
from nearchord.stages import WhenOver
from scipy.optimize import linprog

Pairs = list[tuple[int, int]]
QUESTIONS = {True: nearchord.Colouring, False: nearchord.FractionalColouring}


def maximal_independent_sets(n: int, edges: Pairs) -> list[frozenset[int]]:
    """By trying all subsets, larger ones first."""
    linked = {frozenset(pair) for pair in edges}
    found: list[frozenset[int]] = []
    for size in range(n, 0, -1):
        for subset in map(frozenset, combinations(range(n), size)):
            if any(subset < other for other in found):
                continue
            if not any(frozenset(pair) in linked for pair in combinations(subset, 2)):
                found.append(subset)
    return found


def fewest_units(n: int, edges: Pairs, demand: list[int]) -> int:
    """Fewest independent sets, with repetition, that cover each vertex as often as it demands: by trying, for a vertex
    that still demands something, all maximal sets with it."""
    sets = maximal_independent_sets(n, edges)

    @cache
    def fewest(left: tuple[int, ...]) -> int:
        v = next((v for v, need in enumerate(left) if need), None)
        if v is None:
            return 0
        return 1 + min(
            fewest(tuple(max(0, need - (u in one)) for u, need in enumerate(left))) for one in sets if v in one
        )

    return fewest(tuple(demand))


def shortest_length(n: int, edges: Pairs, demand: list[int]) -> float:
    """Length of the shortest plan in fractions, about, by HiGHS over all maximal independent sets."""
    sets = maximal_independent_sets(n, edges)
    if not sets:
        return 0.0
    rows = np.array([[-(v in one) for one in sets] for v in range(n)])
    return float(linprog(np.ones(len(sets)), A_ub=rows, b_ub=-np.array(demand), method="highs").fun)


def planned(
    n: int, edges: Pairs, demand: list[int] | None = None, *, whole: bool = True, budget: ns.Budget | None = None,
    when_over: str = "bound", monitor: ns.Monitor | None = None,
) -> ns.Outcome:  # fmt: skip
    """Solve with defaults."""
    question = ns.Colouring() if whole else ns.FractionalColouring()
    weights = None if demand is None else np.array(demand, np.int64)
    graph = ns.Graph.from_edges(n, edges)
    return ns.solve(question, graph, weights, budget or ns.Budget(), when_over, monitor or ns.Monitor())


def as_answer(graph: nearchord.Graph, outcome: ns.Outcome, whole: bool) -> nearchord.Answer:
    """The outcome as a session would give it."""
    origin = nearchord.Provenance(
        graph.address, "", "1", 1, nearchord.Budget(), WhenOver.BOUND, 1, (), 0.0, 0.0, 0, None
    )
    return nearchord.Answer(
        "j", 0, "", QUESTIONS[whole](), nearchord.Verdict(outcome.verdict.value), outcome.value, outcome.bound,
        np.zeros(0, np.uint32), outcome.reason, outcome.fill, outcome.fill_lower_bound, outcome.states, outcome.bags,
        outcome.largest_bag, outcome.parts, outcome.fill_cores, nearchord.ProofKind(outcome.proof),
        tuple(map(nearchord.ProofKind, outcome.proof_kinds)), 0.0, graph.n, "", origin, outcome.columns,
    )  # fmt: skip


def judged(n: int, edges: Pairs, demand: list[int] | None, outcome: ns.Outcome, whole: bool = True) -> Confirmed:
    """What the checker confirms; it raises CheckFailed for a plan or a proof that is wrong."""
    graph = nearchord.Graph.from_edges(n, edges)
    need = np.ones(n, np.int64) if demand is None else np.array(demand, np.int64)
    return check_plan(graph, as_answer(graph, outcome, whole), need)


def near(value: Fraction | int | None, length: float) -> bool:
    """Whether an exact value is what a floating-point solver found."""
    return value is not None and abs(float(value) - length) <= 1e-7 * max(1.0, length)
