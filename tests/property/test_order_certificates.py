"""Bounds that rest on an elimination order: right whatever the order is, and no fault lets a wrong one pass."""

from __future__ import annotations

import random
from dataclasses import replace

import nearchord
import networkx as nx
import numpy as np
import pytest
import strategies
from certified import answered, nothing_chosen, verdict_on
from definition import is_clique, is_colourable, is_forest, largest_by_trial
from elimination import columns_of, fill_of, spoilt
from hypothesis import given, settings
from hypothesis import strategies as st
from nearchord.checks import cliques, elimination, labelled
from nearchord.checks.edges import Edges

Pairs = list[tuple[int, int]]

QUESTIONS = (
    nearchord.Clique(),
    nearchord.InducedForest(),
    *(nearchord.ColourableSubgraph(colours=q) for q in (1, 2, 3, 4)),
)


def best_of(question: nearchord.Choice, n: int, edges: Pairs, weights: list[int]) -> int | None:
    """The optimum by trial, pins included; None without a feasible choice."""
    holds = {"clique": is_clique, "induced-forest": is_forest}.get(question.name)
    if holds is None:
        assert isinstance(question, nearchord.ColourableSubgraph)
        colours = question.colours

        def holds(pairs: Pairs, chosen: list[int]) -> bool:
            return is_colourable(pairs, chosen, colours)

    return largest_by_trial(n, edges, weights, holds, question.must, question.never)


def weighted(n: int, edges: Pairs, weights: list[int]) -> nearchord.Graph:
    return nearchord.Graph.from_edges(n, edges, weights=weights)


@settings(deadline=None)
@given(strategies.arbitrary_graphs(most=9), st.data())
def test_every_order_gives_the_optimum(drawn: strategies.Edges, data: st.DataObject) -> None:
    """The program of the checker over bags of any order, against trying all sets."""
    n, edges = drawn
    weights = data.draw(st.lists(st.integers(0, 9), min_size=n, max_size=n))
    order = data.draw(st.permutations(range(n)))
    columns = columns_of(order, fill_of(n, edges, order))
    ends = np.array(edges, np.int64).reshape(-1, 2)
    known = Edges(n, ends[:, 0], ends[:, 1])
    place = elimination.ordered(columns, np.ones(n, np.bool_))
    rows = elimination.rows_of(known, place, elimination.filled(columns, known, place))
    bags, by_place = elimination.bags_of(rows), np.array([weights[v] for v in order], np.int64)
    for colours in (2, 3, 4):
        best = best_of(nearchord.ColourableSubgraph(colours=colours), n, edges, weights)
        assert labelled.Program(bags, by_place, labelled.colour_rules(colours)).best() == best
    assert labelled.Program(bags, by_place, labelled.FORESTS).best() == best_of(
        nearchord.InducedForest(), n, edges, weights
    )
    plain = elimination.rows_of(known, place, elimination.no_fill())
    heaviest = best_of(nearchord.Clique(), n, edges, weights)
    assert cliques.heavier_clique(plain, by_place, heaviest)[0] is None
    if n:
        found, _ = cliques.heavier_clique(plain, by_place, heaviest - 1)
        assert is_clique(edges, [order[p] for p in found])
        assert by_place[found].sum() == heaviest


def test_every_answer_about_a_graph_of_the_atlas_is_certified_and_confirmed() -> None:
    """Graphs on up to seven vertices, as networkx carries them; and a bound one better is refused."""
    for number, atlas in enumerate(nx.graph_atlas_g()):
        n = atlas.number_of_nodes()
        graph = weighted(n, sorted(atlas.edges), [(number * 7 + v * 5) % 6 for v in range(n)])
        for question in QUESTIONS:
            answer = answered(graph, question)
            assert answer.proof is nearchord.ProofKind.CERTIFICATE
            assert nearchord.check(graph, answer).not_confirmed == (), (number, question)
            if answer.value:
                assert verdict_on(graph, nothing_chosen(answer, answer.bound - 1)) == "refused", (number, question)


@pytest.mark.parametrize("question", QUESTIONS, ids=str)
@settings(deadline=None, max_examples=40)
@given(drawn=strategies.weighted_graphs(), data=st.data())
def test_bounds_are_confirmed_with_pins(
    question: nearchord.Choice, drawn: tuple[int, Pairs, list[int]], data: st.DataObject
) -> None:
    """Whatever is PROVEN is certified and confirmed, and no better bound is."""
    n, edges, weights = drawn
    graph = weighted(n, edges, weights)
    pins = data.draw(st.lists(st.integers(0, n - 1), unique=True, max_size=4)) if n else []
    cut = data.draw(st.integers(0, len(pins)))
    answer = answered(graph, replace(question, must=tuple(pins[:cut]), never=tuple(pins[cut:])))
    if answer.verdict is nearchord.Verdict.INFEASIBLE:
        return
    assert (answer.verdict, answer.proof) == (nearchord.Verdict.PROVEN, nearchord.ProofKind.CERTIFICATE)
    assert nearchord.check(graph, answer).not_confirmed == ()
    better = replace(answer, verdict=nearchord.Verdict.BOUNDED, bound=answer.bound - 1)
    assert verdict_on(graph, better) == "refused"


def near_chordal(rng: random.Random, n: int) -> tuple[Pairs, list[int]]:
    """Overlaps of time windows with some pairs cleared, and small weights."""
    starts = [rng.randrange(8) for _ in range(n)]
    ends = [start + rng.randrange(6) for start in starts]
    edges = [(u, v) for v in range(n) for u in range(v) if starts[u] <= ends[v] and starts[v] <= ends[u]]
    for _ in range(min(len(edges), rng.randrange(2, 9))):
        edges.pop(rng.randrange(len(edges)))
    return sorted(edges), [rng.randrange(1, 6) for _ in range(n)]


@pytest.mark.parametrize("seed", range(24))
@pytest.mark.parametrize("question", QUESTIONS[:2] + QUESTIONS[3:], ids=str)
def test_no_fault_in_an_order_makes_a_bound_pass_that_is_too_good(question: nearchord.Choice, seed: int) -> None:
    """Fifty faults a graph: no bound below the optimum is confirmed, and every fault that is no order is refused."""
    rng = random.Random(seed)
    n = rng.randrange(5, 11)
    edges, weights = near_chordal(rng, n)
    graph = weighted(n, edges, weights)
    answer = answered(graph, question)
    best = best_of(question, n, edges, weights)
    assert answer.value == best
    assert verdict_on(graph, nothing_chosen(answer, best)) == "confirmed"
    columns = {name: column for name, column in answer.columns.items() if name.startswith("proof_")}
    total = sum(weights)
    for _ in range(50):
        faulty = spoilt(columns, rng, n)
        for bound in {best - 1, rng.randrange(best)}:
            assert verdict_on(graph, nothing_chosen(answer, bound, **faulty)) == "refused", faulty
        if best == total:
            continue  # such a bound is plain, and no proof is looked at
        order, fill = faulty["proof_order"].tolist(), faulty.get("proof_fill", np.zeros(0)).reshape(-1)
        whole = sorted(order) == list(range(n))
        pairs = list(zip(fill[::2].tolist(), fill[1::2].tolist(), strict=False))
        good = whole and (question.name == "clique" or pairs_fit(n, edges, order, pairs))
        assert verdict_on(graph, nothing_chosen(answer, best, **faulty)) == ("confirmed" if good else "refused"), faulty


def pairs_fit(n: int, edges: Pairs, order: list[int], pairs: Pairs) -> bool:
    """Whether these pairs, each once and none an edge, make the order leave nothing to fill."""
    apart = len(set(pairs)) == len(pairs) and not set(pairs) & set(edges)
    return apart and all(u < v for u, v in pairs) and fill_of(n, [*edges, *pairs], order) == []
