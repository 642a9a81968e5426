"""Certificates: every bound is confirmed from its proof, and no fault in a proof lets a wrong bound pass."""

from __future__ import annotations

import random
from collections import Counter
from dataclasses import replace

import nearchord
import nearchord_solve as ns
import networkx as nx
import numpy as np
import pytest
import strategies
from certified import answered, bounded, confirmed, mutated, verdict_on
from definition import heaviest_independent
from hypothesis import given, settings
from hypothesis import strategies as st
from nearchord.checks import splitting

BUDGETS = (ns.Budget(), ns.Budget(states=1), ns.Budget(states=12), ns.Budget(fill=0))


def weighted(n: int, edges: list[tuple[int, int]], weights: list[int]) -> nearchord.Graph:
    return nearchord.Graph.from_edges(n, edges, weights=weights)


def test_every_answer_about_a_graph_of_the_atlas_is_certified_and_confirmed() -> None:
    """Graphs on up to seven vertices, as networkx carries them, with weights that repeat and vanish."""
    for number, atlas in enumerate(nx.graph_atlas_g()):
        n = atlas.number_of_nodes()
        graph = weighted(n, sorted(atlas.edges), [(number * 7 + v * 5) % 6 for v in range(n)])
        for question in (nearchord.IndependentSet(), nearchord.VertexCover()):
            answer = answered(graph, question)
            assert answer.proof is nearchord.ProofKind.CERTIFICATE
            assert nearchord.check(graph, answer).not_confirmed == (), number


@settings(deadline=None)
@given(strategies.weighted_graphs(), st.sampled_from(BUDGETS), st.data())
def test_bounds_are_confirmed_within_any_budget_and_with_pins(
    drawn: tuple[int, list[tuple[int, int]], list[int]], budget: ns.Budget, data: st.DataObject
) -> None:
    """Where the answer says certificate; a bound that is the work of a search says so."""
    n, edges, weights = drawn
    graph = weighted(n, edges, weights)
    pins = data.draw(st.lists(st.integers(0, n - 1), unique=True, max_size=3)) if n else []
    cut = data.draw(st.integers(0, len(pins)))
    kind = data.draw(st.sampled_from((nearchord.IndependentSet, nearchord.VertexCover)))
    answer = answered(graph, kind(must=pins[:cut], never=pins[cut:]), budget)
    if answer.verdict.answered and answer.proof is nearchord.ProofKind.CERTIFICATE:
        assert nearchord.check(graph, answer).not_confirmed == ()
    elif answer.verdict is nearchord.Verdict.PROVEN:
        assert answer.proof is nearchord.ProofKind.SEARCH


def near_chordal(rng: random.Random, n: int) -> tuple[list[tuple[int, int]], list[int]]:
    """Overlaps of time windows with some pairs cleared, and small weights."""
    starts = [rng.randrange(12) for _ in range(n)]
    ends = [start + rng.randrange(6) for start in starts]
    edges = [(u, v) for v in range(n) for u in range(v) if starts[u] <= ends[v] and starts[v] <= ends[u]]
    for _ in range(min(len(edges), rng.randrange(1, 6))):
        edges.pop(rng.randrange(len(edges)))
    return edges, [rng.randrange(5) for _ in range(n)]


@pytest.mark.parametrize("seed", range(40))
def test_no_fault_in_a_proof_makes_a_bound_pass_that_is_too_good(seed: int) -> None:
    """A hundred faults a graph under the claim that the optimum is one less than brute force says."""
    rng = random.Random(seed)
    n = rng.randrange(4, 13)
    edges, weights = near_chordal(rng, n)
    weights[0] += 1
    graph = weighted(n, edges, weights)
    answer, cover = answered(graph), answered(graph, nearchord.VertexCover())
    best, total = heaviest_independent(n, edges, weights), sum(weights)
    assert (answer.value, cover.value) == (best, total - best)
    assert confirmed(graph, answer)
    nothing = replace(answer, chosen=np.zeros(0, np.uint32), value=0)
    everything = replace(cover, chosen=np.arange(n, dtype=np.uint32), value=total)
    assert confirmed(graph, bounded(nothing, best))
    assert confirmed(graph, bounded(everything, total - best))
    assert not confirmed(graph, bounded(nothing, best - 1))
    assert not confirmed(graph, bounded(everything, total - best + 1))
    for _ in range(100):
        faulty = mutated(dict(answer.columns), rng, n)
        assert not confirmed(graph, bounded(nothing, best - 1, **faulty)), faulty
        assert not confirmed(graph, bounded(everything, total - best + 1, **faulty)), faulty


def test_faults_are_refused_and_not_merely_left_open() -> None:
    """A thousand faults: each that changes anything is refused, or leaves a proof of the same bound. Few do."""
    rng = random.Random(1)
    ends: Counter[str] = Counter()
    for _ in range(40):
        n = rng.randrange(6, 13)
        edges, weights = near_chordal(rng, n)
        graph = weighted(n, edges, weights)
        answer = answered(graph)
        for _ in range(25):
            faulty = mutated(dict(answer.columns), rng, n)
            if any(not np.array_equal(column, answer.columns[name]) for name, column in faulty.items()):
                ends[verdict_on(graph, replace(answer, columns=faulty))] += 1
    assert ends["open"] == 0
    assert ends["refused"] > 4 * ends["confirmed"]


def test_most_faults_in_a_proof_are_found_even_where_the_bound_is_right() -> None:
    """Every number counts: a smaller weight leaves a vertex uncovered, a larger one makes a worse bound."""
    graph = weighted(5, [(0, 1), (1, 2), (2, 3), (0, 3), (3, 4)], [3, 4, 3, 4, 9])
    answer = answered(graph)
    for name in ("proof_clique_weight", "proof_home_weight"):
        for at in range(answer.columns[name].size):
            for step in (-1, 1):
                column = answer.columns[name].copy()
                column[at] += step
                change = confirmed(graph, bounded(answer, answer.bound, **{name: column}))
                assert not change or int(column[at]) == step, (name, at, step)


def test_a_proof_is_only_good_for_its_own_graph() -> None:
    """The same numbers about a graph with one edge less prove nothing."""
    edges = [(0, 1), (1, 2), (0, 2), (2, 3)]
    whole = weighted(4, edges, [1, 1, 1, 1])
    other = weighted(4, edges[1:], [1, 1, 1, 1])
    with pytest.raises(nearchord.CheckFailed, match="not about this one"):
        nearchord.check(other, answered(whole))
    own = answered(other)
    moved = replace(own, columns=answered(whole).columns, chosen=np.array([3], np.uint32), value=1)
    with pytest.raises(nearchord.CheckFailed, match="not a clique"):
        nearchord.check(other, bounded(moved, 2))


ABSURD = {
    "proof_clique_weight": (np.array([-1], np.int64), "negative|one weight a clique"),
    "proof_clique_start": (np.array([0, 2**62], np.int64), "do not ascend"),
    "proof_clique_vertex": (np.array([2**32 - 1], np.uint32), "but the graph has"),
    "proof_bag_above": (np.array([2**62], np.int64), "bag"),
    "proof_home_weight": (np.array([2**63 - 1], np.int64), "home"),
    "proof_bag_start": (np.zeros(0, np.int64), "do not ascend"),
    "proof_bag_adhesion": (np.zeros(0, np.float64), "no column"),
}


@pytest.mark.parametrize("name", ABSURD)
def test_absurd_numbers_are_refused(name: str) -> None:
    """Before anything is computed with them."""
    column, message = ABSURD[name]
    graph = weighted(4, [(0, 1), (1, 2), (2, 3), (0, 3)], [3, 4, 3, 4])
    answer = answered(graph)
    with pytest.raises(nearchord.CheckFailed, match=message):
        nearchord.check(graph, bounded(answer, answer.bound, **{name: column}))


def test_a_proof_of_too_many_states_is_left_open(monkeypatch: pytest.MonkeyPatch) -> None:
    """The checker has a limit of its own, and says so."""
    monkeypatch.setattr(splitting, "MOST_STATES", 3)
    graph = weighted(4, [(0, 1), (1, 2), (2, 3), (0, 3)], [3, 4, 3, 4])
    (left,) = nearchord.check(graph, answered(graph)).not_confirmed
    assert "too long" in left
