"""Questions that choose vertices against reference values of real graphs."""

import pytest
from definition import is_clique, is_forest
from nearchord_solve import Budget, Clique, ColourableSubgraph, Graph, InducedForest, Monitor, Verdict, solve
from published.reference_graphs import read_dimacs, reference_rows, weightings


@pytest.mark.parametrize("row", reference_rows(), ids=lambda row: row["name"])
def test_heaviest_cliques(row: dict[str, str]) -> None:
    """PROVEN with the value found by clique enumeration (column `mwc`)."""
    n, edges, own = read_dimacs(row["name"])
    graph = Graph.from_edges(n, edges)
    for kind, weights in weightings(n, own).items():
        outcome = solve(Clique(), graph, weights, Budget(states=10**5), "bound", Monitor())
        assert weights[outcome.chosen].sum() == outcome.value
        if n < 500:
            assert is_clique(edges, outcome.chosen.tolist())
        assert outcome.verdict is Verdict.PROVEN
        if row[f"mwc_{kind}_proved"] == "1":
            assert outcome.value == int(row[f"mwc_{kind}"])


@pytest.mark.parametrize("row", reference_rows(), ids=lambda row: row["name"])
def test_two_colours_and_forests(row: dict[str, str]) -> None:
    """Feasible, and around the values of general solvers (columns `bip` and `for`); equal where both proved it."""
    n, edges, own = read_dimacs(row["name"])
    graph = Graph.from_edges(n, edges)
    for kind, weights in weightings(n, own).items():
        for column, question in (("bip", ColourableSubgraph(2)), ("for", InducedForest())):
            outcome = solve(question, graph, weights, Budget(states=10**5), "bound", Monitor())
            assert weights[outcome.chosen].sum() == outcome.value <= outcome.bound
            if column == "for":
                assert is_forest(edges, outcome.chosen.tolist())
            else:
                colour = dict(zip(outcome.chosen.tolist(), outcome.columns["colour"].tolist(), strict=True))
                assert all(colour[u] != colour[v] for u, v in edges if u in colour and v in colour)
            if row.get(f"{column}_{kind}_proved") != "1":
                continue
            best = int(row[f"{column}_{kind}"])
            assert outcome.value <= best <= outcome.bound
            if outcome.verdict is Verdict.PROVEN:
                assert outcome.value == best
