"""How many independent sets are best, against published numbers and formulas.

With weights of nought all independent sets are best, so that their number is counted too.  Numbers of independent sets
of paths and cycles are Fibonacci and Lucas numbers (Prodinger and Tichy, Fibonacci Quarterly 20 (1982) 16-21, from
memory); those of grids stand in the On-Line Encyclopedia of Integer Sequences as A006506, ways to place queens as
A000170 (both from memory).  Numbers for the other named graphs were recomputed by trial.
"""

import networkx as nx
import numpy as np
import pytest
from nearchord_solve import Budget, Graph, IndependentSet, Monitor, solve


def count(graph: nx.Graph, weight: int) -> int | None:
    """Number of best sets when all vertices weigh the same."""
    plain = nx.convert_node_labels_to_integers(graph)
    n = plain.number_of_nodes()
    weights = np.full(n, weight, np.int64)
    return solve(
        IndependentSet(count=True), Graph.from_edges(n, plain.edges), weights, Budget(), "bound", Monitor()
    ).count


def fibonacci(n: int) -> int:
    """F(0) = 0, F(1) = 1."""
    one, other = 0, 1
    for _ in range(n):
        one, other = other, one + other
    return one


@pytest.mark.parametrize("n", [1, 2, 3, 7, 50, 91, 92, 1000])
def test_independent_sets_of_paths_are_fibonacci_numbers(n: int) -> None:
    """Those of 91 vertices and more do not fit into 64 bits."""
    assert count(nx.path_graph(n), 0) == fibonacci(n + 2)


@pytest.mark.parametrize("n", [3, 4, 5, 30, 200])
def test_independent_sets_of_cycles_are_lucas_numbers(n: int) -> None:
    assert count(nx.cycle_graph(n), 0) == fibonacci(n - 1) + fibonacci(n + 1)


def test_a_long_path_has_a_number_of_many_digits() -> None:
    """Four thousand digits, from about 450 primes."""
    assert count(nx.path_graph(20_000), 0) == fibonacci(20_002)


@pytest.mark.parametrize("n", [1, 2, 3, 10, 11, 300, 301])
def test_maximum_independent_sets_of_paths(n: int) -> None:
    """On 2k vertices there is one gap of two, or none, in k + 1 places; on 2k + 1 there is no choice."""
    assert count(nx.path_graph(n), 1) == (n // 2 + 1 if n % 2 == 0 else 1)


@pytest.mark.parametrize("n", [4, 5, 10, 11, 300, 301])
def test_maximum_independent_sets_of_cycles(n: int) -> None:
    """Odd cycles have one gap of two, anywhere; even ones none."""
    assert count(nx.cycle_graph(n), 1) == (2 if n % 2 == 0 else n)


@pytest.mark.parametrize("n", [0, 1, 64, 65, 5000])
def test_vertices_alone_double_the_number(n: int) -> None:
    assert count(nx.empty_graph(n), 0) == 2**n
    assert count(nx.empty_graph(n), 1) == 1


@pytest.mark.parametrize(
    ("graph", "maximum", "every"),
    [
        (nx.petersen_graph(), 5, 76),
        (nx.icosahedral_graph(), 20, 69),
        (nx.hypercube_graph(4), 2, 743),
        (nx.grid_2d_graph(4, 4), 2, 1234),
    ],
)
def test_named_graphs(graph: nx.Graph, maximum: int, every: int) -> None:
    assert (count(graph, 1), count(graph, 0)) == (maximum, every)


@pytest.mark.parametrize(("n", "number"), [(1, 2), (2, 7), (3, 63), (5, 55447), (6, 5598861)])
def test_independent_sets_of_grids(n: int, number: int) -> None:
    """A006506."""
    assert count(nx.grid_2d_graph(n, n), 0) == number


@pytest.mark.parametrize(("n", "ways"), [(4, 2), (5, 10), (6, 4), (7, 40), (8, 92)])
def test_ways_to_place_queens(n: int, ways: int) -> None:
    """A000170: n queens on a board of n rows, none attacking another."""
    board = nx.Graph()
    cells = [(r, c) for r in range(n) for c in range(n)]
    board.add_nodes_from(cells)
    board.add_edges_from(
        ((r, c), (x, y))
        for r, c in cells
        for x, y in cells
        if (r, c) < (x, y) and (r == x or c == y or abs(r - x) == abs(c - y))
    )
    assert count(board, 1) == ways
