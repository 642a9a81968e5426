"""Plans and their proofs: confirmed where they are right, refused where a number is not."""

from __future__ import annotations

import random
from fractions import Fraction
from itertools import pairwise
from math import ceil

import nearchord
import nearchord_solve as ns
import numpy as np
import pytest
import strategies
from hypothesis import given, settings
from hypothesis import strategies as st
from nearchord.checks.plan import check_plan
from plans import as_answer, judged, planned, shortest_length

BUDGETS = (ns.Budget(), ns.Budget(states=1), ns.Budget(states=12), ns.Budget(fill=0), ns.Budget(memory=1))
WHEELS = [(0, v) for v in range(1, 6)] + [(v, v + 1) for v in range(1, 5)] + [(1, 5)]
WHEELS += [(0, v) for v in range(6, 10)] + [(5, 6), (6, 7), (7, 8), (8, 9), (5, 9)]


@settings(deadline=None)
@given(strategies.graphs(), st.sampled_from(BUDGETS), st.booleans(), st.data())
def test_plans_hold_within_any_budget(
    drawn: tuple[int, list[tuple[int, int]]], budget: ns.Budget, whole: bool, data: st.DataObject
) -> None:
    """Whatever is called certificate is confirmed; whatever is proven without one says search."""
    n, edges = drawn
    demand = data.draw(st.lists(st.integers(0, 6), min_size=n, max_size=n))
    outcome = planned(n, edges, demand, whole=whole, budget=budget)
    found = judged(n, edges, demand, outcome, whole)
    assert found.not_confirmed == () or outcome.proof == "search" or outcome.verdict is ns.Verdict.BOUNDED
    if outcome.proof == "certificate":
        assert found.not_confirmed == ()


@settings(deadline=None)
@given(strategies.chordal_graphs(), st.data())
def test_on_chordal_graphs_the_heaviest_clique_decides(
    drawn: tuple[int, list[tuple[int, int]]], data: st.DataObject
) -> None:
    """Chordal graphs are perfect: the fewest colours are the clique number, with demands as without."""
    n, edges = drawn
    demand = data.draw(st.lists(st.integers(0, 50), min_size=n, max_size=n))
    weights = np.array(demand, np.int64)
    clique = ns.solve(ns.Clique(), ns.Graph.from_edges(n, edges), weights, ns.Budget(), "bound", ns.Monitor())
    for whole in (True, False):
        outcome = planned(n, edges, demand, whole=whole)
        assert (outcome.verdict, outcome.value) == (ns.Verdict.PROVEN, clique.value)


def verdict_on(graph: nearchord.Graph, outcome: ns.Outcome, whole: bool, demand: list[int], **changes: object) -> bool:
    """Whether the checker confirms everything about a changed outcome; anything but CheckFailed is a defect."""
    fields = {**vars(outcome), **changes}
    answer = as_answer(graph, ns.Outcome(**fields), whole)
    try:
        return not check_plan(graph, answer, np.array(demand, np.int64)).not_confirmed
    except nearchord.CheckFailed:
        return False


def changed(columns: dict[str, np.ndarray], name: str, rng: random.Random) -> dict[str, np.ndarray]:
    """One number of one column changed, or two exchanged."""
    column = columns[name].copy()
    at = rng.randrange(column.size)
    if rng.random() < 0.3:
        other = rng.randrange(column.size)
        column[[at, other]] = column[[other, at]]
    elif column.dtype == np.uint32:
        column[at] = rng.randrange(12)
    else:
        column[at] += rng.choice((-2, -1, 1, 2))
    return {**columns, name: column}


def serves(n: int, edges: list[tuple[int, int]], demand: list[int], columns: dict[str, np.ndarray], whole: bool) -> int:
    """Whether columns are a plan, read from the definition with sets; then how many units, or the length."""
    items: list[set[int]] = [set() for _ in range(n)]
    if whole:
        start = columns.get("colour_start", np.arange(n + 1)).tolist()
        lists = [columns["colour"].tolist()[start[v] : start[v + 1]] for v in range(n)]
        items = [set(one) for one in lists]
        right = all(len(one) == need and one == sorted(set(one)) for one, need in zip(lists, demand, strict=True))
        right = right and start[0] == 0 and start[-1] == columns["colour"].size and start == sorted(start)
        used = set().union(*items)
        length: int | Fraction = len(used) if used == set(range(1, len(used) + 1)) else -1
    else:
        start = columns["share_start"].tolist()
        shares = [Fraction(int(x), int(columns["share_denominator"][0])) for x in columns["share_numerator"].tolist()]
        sets = [columns["share_vertex"].tolist()[a:b] for a, b in pairwise(start)]
        right = all(share > 0 for share in shares) and all(one and one == sorted(set(one)) for one in sets)
        right = right and start[0] == 0 and start[-1] == columns["share_vertex"].size
        right = right and all(v < n for one in sets for v in one)
        if right:
            for number, one in enumerate(sets):
                for v in one:
                    items[v].add(number)
            right = all(sum(shares[i] for i in one) >= need for one, need in zip(items, demand, strict=True))
        length = sum(shares, Fraction(0))
    right = right and not any(items[u] & items[v] for u, v in edges)
    return length if right else -1  # type: ignore[return-value]


@pytest.mark.parametrize("whole", [True, False])
@pytest.mark.parametrize("seed", range(12))
def test_no_change_of_a_plan_passes_unless_it_is_a_plan(seed: int, whole: bool) -> None:
    """Two hundred changes a graph, judged again with sets and fractions."""
    rng = random.Random(seed)
    n = 10
    demand = [1] * n if seed % 3 == 0 else [rng.randrange(4) for _ in range(n)]
    outcome = planned(n, WHEELS, demand, whole=whole)
    graph = nearchord.Graph.from_edges(n, WHEELS)
    assert verdict_on(graph, outcome, whole, demand)
    names = [name for name in outcome.columns if name.startswith(("colour", "share")) and outcome.columns[name].size]
    for _ in range(200):
        name = rng.choice(names)
        columns = changed(dict(outcome.columns), name, rng)
        if columns[name].dtype == np.int64 and bool((columns[name] < 0).any()):
            assert not verdict_on(graph, outcome, whole, demand, columns=columns)
            continue
        if not whole and not columns["share_denominator"][0]:
            assert not verdict_on(graph, outcome, whole, demand, columns=columns)
            continue
        right = serves(n, WHEELS, demand, columns, whole) == outcome.value
        assert verdict_on(graph, outcome, whole, demand, columns=columns) == right, columns
    other = outcome.value + 1
    assert not verdict_on(graph, outcome, whole, demand, value=other, verdict=ns.Verdict.BOUNDED)


@pytest.mark.parametrize("whole", [True, False])
@pytest.mark.parametrize("seed", range(12))
def test_no_fault_in_a_proof_makes_a_bound_pass_that_is_too_good(seed: int, whole: bool) -> None:
    """Two hundred faults under the claim that the plan must be longer than it is."""
    rng = random.Random(100 + seed)
    n = 10
    demand = [1] * n if seed % 2 else [1 + rng.randrange(4) for _ in range(n)]
    outcome = planned(n, WHEELS, demand, whole=whole)
    graph = nearchord.Graph.from_edges(n, WHEELS)
    least = shortest_length(n, WHEELS, demand)
    assert outcome.bound == (ceil(least - 1e-9) if whole else Fraction(least).limit_denominator(100))
    step = 1 if whole else Fraction(1, 2)
    claim = {"bound": outcome.bound + step, "value": None, "verdict": ns.Verdict.BOUNDED}
    names = [
        name for name in outcome.columns if name.startswith(("proof", "bottleneck")) and outcome.columns[name].size
    ]
    bare = {"value": None, "verdict": ns.Verdict.BOUNDED}
    for _ in range(200):
        columns = changed(dict(outcome.columns), rng.choice(names), rng)
        wrong = as_answer(graph, ns.Outcome(**{**vars(outcome), **claim, "columns": columns}), whole)
        with pytest.raises(nearchord.CheckFailed):
            check_plan(graph, wrong, np.array(demand, np.int64))
    right = as_answer(graph, ns.Outcome(**{**vars(outcome), **bare}), whole)
    assert check_plan(graph, right, np.array(demand, np.int64)).what != ()
