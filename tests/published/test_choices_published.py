"""Questions that choose vertices against reference values of real graphs."""

import pytest
from definition import is_clique
from nearchord_solve import Budget, Clique, Graph, Monitor, Verdict, solve
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
