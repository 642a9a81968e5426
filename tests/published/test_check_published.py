"""The checker against values from outside the project."""

from __future__ import annotations

import os
from collections import Counter

import nearchord
import nearchord_solve
import networkx as nx
import numpy as np
import pytest
from certified import answered, nothing_chosen, verdict_on
from definition import least_fill
from nearchord.checks.branches import Branches
from nearchord.checks.classes import splittance
from nearchord.checks.edges import Edges
from nearchord.checks.packing import Packing
from published.reference_graphs import SHARED, read_dimacs, reference_rows, weightings


def test_split_graphs_are_as_many_as_published() -> None:
    """Graphs of splittance 0 on 1 to 7 vertices: OEIS A048194 (split graphs), over Read and Wilson's atlas."""
    counts: Counter[int] = Counter()
    for source in nx.graph_atlas_g()[1:]:
        graph = nearchord.Graph.from_edges(len(source), [tuple(sorted(edge)) for edge in source.edges])
        counts[graph.n] += splittance(Edges(graph.n, *graph.edges())) == 0
    assert [counts[n] for n in range(1, 8)] == [1, 2, 4, 9, 21, 56, 164]


COLOURING = ("huck", "jean", "anna", "miles250", "david", "mulsol.i.1", "zeroin.i.1", "fpsol2.i.1")


def fill_outcome(graph: nearchord.Graph) -> nearchord_solve.Outcome:
    ours = nearchord_solve.Graph.from_canonical(graph.n, graph.row_ptr, graph.targets)
    budget, monitor = nearchord_solve.Budget(), nearchord_solve.Monitor()
    return nearchord_solve.solve(nearchord_solve.Fill(), ours, None, budget, "bound", monitor)


def confirmed_bound(graph: nearchord.Graph, outcome: nearchord_solve.Outcome) -> int:
    edges = Edges(graph.n, *graph.edges())
    trees = Branches(graph, outcome.columns)
    packed, pairs = Packing(graph, outcome.columns).bound_beside(edges, trees.vertices())
    return packed + trees.bound(edges, pairs)


def test_certificates_of_atlas_graphs_are_confirmed() -> None:
    """Read and Wilson's atlas: a certificate proves the bound, and nothing proves more than the fill."""
    certified = 0
    for source in nx.graph_atlas_g()[1:]:
        graph = nearchord.Graph.from_edges(len(source), [tuple(sorted(edge)) for edge in source.edges])
        outcome = fill_outcome(graph)
        proven = confirmed_bound(graph, outcome)
        assert proven <= outcome.value
        if outcome.proof == "certificate":
            certified += 1
            assert proven == outcome.value, source.name
        else:
            assert set(outcome.proof_kinds) - {"packing", "branch"}, source.name
    assert certified > 1000


@pytest.mark.parametrize("name", COLOURING)
def test_certificates_of_colouring_graphs_are_confirmed(name: str) -> None:
    """Graphs of the Second DIMACS Challenge on colouring."""
    path = SHARED / "graphs" / f"{name}.col"
    if not path.exists() and os.environ.get("CI") != "true":
        pytest.skip(f"{path} is not there; set NEARCHORD_SHARED_DATA to the folder that holds it")
    graph = nearchord.Graph.read(path)
    outcome = fill_outcome(graph)
    assert outcome.proof == "certificate"
    assert confirmed_bound(graph, outcome) == outcome.value


def test_spoilt_packings_prove_no_more_than_the_least_fill() -> None:
    """Every single change of a number of the columns, over a part of the atlas: refused, or still a bound."""
    refused = lowered = 0
    for source in nx.graph_atlas_g()[100:1253:60]:
        edges = [tuple(sorted(edge)) for edge in source.edges]
        graph = nearchord.Graph.from_edges(len(source), edges)
        outcome, least = fill_outcome(graph), least_fill(len(source), edges)
        for name in ("ring", "group", "vertex", "numerator", "denominator"):
            column = np.asarray(outcome.columns[f"packing_{name}"])
            for at in range(column.size):
                for value in {0, 1, 2, 5, int(column[at]) + 1, 2 * int(column[at])} - {int(column[at])}:
                    spoilt = column.copy()
                    spoilt[at] = value
                    try:
                        proven = Packing(graph, {**outcome.columns, f"packing_{name}": spoilt}).bound(
                            Edges(graph.n, *graph.edges())
                        )
                    except nearchord.CheckFailed:
                        refused += 1
                        continue
                    assert proven <= least
                    lowered += proven < least
    assert refused > 100
    assert lowered > 10


@pytest.mark.parametrize("row", reference_rows(), ids=lambda row: row["name"])
def test_bounds_on_real_graphs_are_confirmed(row: dict[str, str]) -> None:
    """What is PROVEN within 10^5 states says certificate, and the checker computes the same bound."""
    n, edges, own = read_dimacs(row["name"])
    weights = weightings(n, own)["seed"]
    graph = nearchord.Graph.from_edges(n, edges, weights=weights.tolist())
    for question in (nearchord.Clique(), nearchord.ColourableSubgraph(colours=2), nearchord.InducedForest()):
        answer = answered(graph, question, nearchord_solve.Budget(states=10**5))
        if answer.verdict is nearchord.Verdict.PROVEN:
            assert answer.proof is nearchord.ProofKind.CERTIFICATE
            assert nearchord.check(graph, answer).not_confirmed == (), question.name
            assert verdict_on(graph, nothing_chosen(answer, answer.bound - 1)) == "refused", question.name
