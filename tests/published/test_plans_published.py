"""Chromatic and fractional chromatic numbers from outside the project."""

import threading
from fractions import Fraction
from math import ceil

import networkx as nx
import numpy as np
import pytest
from nearchord_solve import Budget, Colouring, FractionalColouring, Graph, Monitor, Outcome, Stop, Verdict, solve
from plans import judged, planned
from published.reference_graphs import read_dimacs, reference_rows

SECONDS = 60


def both(graph: nx.Graph) -> tuple[int, Fraction]:
    """(chromatic number, fractional chromatic number), each confirmed as far as there is a certificate."""
    n, edges = graph.number_of_nodes(), sorted((min(pair), max(pair)) for pair in graph.edges)
    found = []
    for whole in (True, False):
        outcome = planned(n, edges, whole=whole)
        assert outcome.verdict is Verdict.PROVEN
        assert judged(n, edges, None, outcome, whole).not_confirmed == () or outcome.proof == "search"
        found.append(outcome.value)
    return found[0], found[1]


@pytest.mark.parametrize("k", [2, 3, 4, 5, 10, 25])
def test_odd_cycles(k: int) -> None:
    """2 + 1/k for the cycle on 2k + 1 vertices.

    E. R. Scheinerman and D. H. Ullman, Fractional Graph Theory (Wiley 1997), chapter 3.
    """
    assert both(nx.cycle_graph(2 * k + 1)) == (3, 2 + Fraction(1, k))


def test_mycielski_graphs() -> None:
    """A step adds one colour, and takes the fractional number f to f + 1/f.

    M. Larsen, J. Propp and D. Ullman, The fractional chromatic number of Mycielski's graphs, J. Graph Theory 19 (1995)
    411-416; J. Mycielski, Sur le coloriage des graphs, Colloq. Math. 3 (1955) 161-162.
    """
    f = Fraction(2)
    for number in range(2, 6):
        assert both(nx.convert_node_labels_to_integers(nx.mycielski_graph(number))) == (number, f)
        f += 1 / f


def test_vertex_transitive_graphs() -> None:
    """The number of vertices over the independence number (Scheinerman and Ullman, as above); independence numbers from
    common knowledge, recomputed elsewhere in these tests."""
    cases = [
        (nx.petersen_graph(), 3, Fraction(5, 2)),
        (nx.icosahedral_graph(), 4, Fraction(12, 3)),
        (nx.dodecahedral_graph(), 3, Fraction(20, 8)),
        (nx.circulant_graph(13, [1, 2]), 4, Fraction(13, 4)),
        (nx.complement(nx.cycle_graph(7)), 4, Fraction(7, 2)),
        (nx.hypercube_graph(3), 2, Fraction(2)),
    ]
    for graph, colours, length in cases:
        assert both(nx.convert_node_labels_to_integers(graph)) == (colours, length)


@pytest.mark.parametrize(("n", "k"), [(5, 2), (6, 2), (7, 2), (7, 3)])
def test_kneser_graphs(n: int, k: int) -> None:
    """n - 2k + 2 colours (L. Lovasz, J. Combin. Theory A 25 (1978) 319-324), and n / k in fractions."""
    graph = nx.convert_node_labels_to_integers(nx.kneser_graph(n, k))
    assert both(graph) == (n - 2 * k + 2, Fraction(n, k))


@pytest.mark.parametrize("row", reference_rows(), ids=lambda row: row["name"])
def test_real_graphs(row: dict[str, str]) -> None:
    """Chromatic numbers (columns `chi_*`) found by CP-SAT; PROVEN wherever they were proved, queen8_8 besides."""
    n, edges, _ = read_dimacs(row["name"])
    colours = _within_seconds(n, edges, whole=True)
    judged(n, edges, None, colours)
    assert colours.bound <= int(row["chi_ub"])
    assert colours.value >= int(row["chi_lb"])
    if row["chi_proved"] == "1":
        assert (colours.verdict, colours.value) == (Verdict.PROVEN, int(row["chi_ub"]))
    if row["name"] == "queen8_8":
        assert (colours.verdict, colours.value) == (Verdict.PROVEN, 9)
    frame = _within_seconds(n, edges, whole=False)
    assert judged(n, edges, None, frame, whole=False).not_confirmed == ()
    assert ceil(frame.bound) <= colours.value
    if row["chi_proved"] == "1":
        assert frame.verdict is Verdict.PROVEN


@pytest.mark.parametrize("name", ["huck", "jean", "myciel4", "bn_insurance", "iot_saclay_a8_d8", "grid_case300"])
def test_demands_on_real_graphs(name: str) -> None:
    """Frames scale with their demands, and whole units are at most those of every vertex apart."""
    if not reference_rows():
        pytest.skip("the shared data are not here")
    n, edges, _ = read_dimacs(name)
    single = planned(n, edges, whole=False).value
    assert planned(n, edges, [7] * n, whole=False).value == 7 * single
    demand = (1 + np.arange(n) * 7919 % 10).tolist()
    frame, colours = (planned(n, edges, demand, whole=whole) for whole in (False, True))
    assert (frame.verdict, colours.verdict) == (Verdict.PROVEN, Verdict.PROVEN)
    assert ceil(frame.value) <= colours.value <= 10 * planned(n, edges).value
    judged(n, edges, demand, colours)


def _within_seconds(n: int, edges: list[tuple[int, int]], whole: bool) -> Outcome:
    """Solve with a stop after a minute."""
    monitor = Monitor()
    timer = threading.Timer(SECONDS, lambda: monitor.cells.__setitem__(Monitor.STOP, Stop.SECONDS))
    timer.start()
    try:
        question = Colouring() if whole else FractionalColouring()
        return solve(question, Graph.from_edges(n, edges), None, Budget(), "bound", monitor)
    finally:
        timer.cancel()
